import type { I18n } from "@lingui/core";
import type { RoleName } from "../../../shared/schemas/session";
import type { UserView } from "../../../shared/schemas/user";
import { roleWord } from "../../lib/role-word";

export const ROLES: readonly RoleName[] = [
  "officer",
  "supervisor",
  "worker",
  "auditor",
  "administrator",
  "representative",
];

/** "Safety officer, Ostmere works". */
export function grantWords(
  i18n: I18n,
  {
    role,
    siteName,
    year,
    groupName,
  }: Pick<UserView["grants"][number], "role" | "siteName"> &
    Partial<Pick<UserView["grants"][number], "year" | "groupName">>,
): string {
  if (role === "employer")
    return i18n.t("Results for an employer, {site}", { site: siteName ?? "" });
  if (year) return i18n.t("Visitor, {site}, {year}", { site: siteName ?? "", year: String(year) });
  if (groupName)
    return i18n.t("{grant}, by group {group}", {
      grant: grantWords(i18n, { role, siteName }),
      group: groupName,
    });
  return siteName === null
    ? i18n.t("{role}, all sites", { role: roleWord(i18n, role) })
    : i18n.t("{role}, {site}", { role: roleWord(i18n, role), site: siteName });
}
