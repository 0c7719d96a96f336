import type { I18n } from "@lingui/core";
import type { RoleName } from "../../../shared/schemas/session";
import type { UserView } from "../../../shared/schemas/user";

export const ROLES: readonly RoleName[] = [
  "officer",
  "supervisor",
  "worker",
  "auditor",
  "administrator",
];

export function roleWord(i18n: I18n, role: RoleName): string {
  switch (role) {
    case "officer":
      return i18n.t("Safety officer");
    case "supervisor":
      return i18n.t("Supervisor");
    case "worker":
      return i18n.t("Worker");
    case "auditor":
      return i18n.t("Auditor");
    case "administrator":
      return i18n.t("Administrator");
  }
}

/** "Safety officer, Ostmere works". */
export function grantWords(
  i18n: I18n,
  { role, siteName }: Pick<UserView["grants"][number], "role" | "siteName">,
): string {
  return siteName === null
    ? i18n.t("{role}, all sites", { role: roleWord(i18n, role) })
    : i18n.t("{role}, {site}", { role: roleWord(i18n, role), site: siteName });
}
