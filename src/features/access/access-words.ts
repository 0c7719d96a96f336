import type { I18n } from "@lingui/core";
import { isolate } from "../../../shared/i18n/isolate";
import type { ReaderView, ReadKind } from "../../../shared/schemas/access";
import { roleWord } from "../../lib/role-word";

/** "Supervisor of Day crew", "Visitor". */
export function readerWord(i18n: I18n, { role, crewName, employerName }: ReaderView): string {
  if (role === "employer")
    return i18n.t("Of the employer {name}", { name: isolate(employerName ?? "") });
  if (role === "visitor") return i18n.t("Visitor");
  return crewName === null
    ? roleWord(i18n, role)
    : i18n.t("Supervisor of {crew}", { crew: crewName });
}

/** What a grant shows of a worker's record. */
export function seesWord(i18n: I18n, { role, year, siteName }: ReaderView): string {
  switch (role) {
    case "officer":
      return i18n.t("All of the record, with the reason of a personal requirement.");
    case "auditor":
      return i18n.t("All of the record, without the reason of a personal requirement.");
    case "supervisor":
      return i18n.t("Days, protectors and open findings while in the crew.");
    case "administrator":
      return i18n.t("Name and number, to link a sign-in. No exposure.");
    case "visitor":
      return i18n.t("The records of {year} at {site}.", {
        year: String(year),
        site: siteName ?? "",
      });
    case "employer":
      return i18n.t("Levels and verdicts of days worked for that employer at {site}.", {
        site: siteName ?? "",
      });
    case "worker":
      return i18n.t("The own record.");
    case "representative":
      return i18n.t("Counts of the site without names. No record.");
  }
}

/** What a role shows of somebody's account. */
export function seesOfAccountWord(i18n: I18n, { role }: ReaderView): string {
  return role === "administrator"
    ? i18n.t("Name, mail address, roles and the last sign-in.")
    : i18n.t("What you changed here, in the trail.");
}

/** The part of a record, as in "page, history". */
export function readWord(i18n: I18n, kind: ReadKind): string {
  switch (kind) {
    case "page":
      return i18n.t("worker’s page");
    case "history":
      return i18n.t("history");
    case "result":
      return i18n.t("result of a day");
    case "shift":
      return i18n.t("shift");
    case "run":
      return i18n.t("run");
    case "fits":
      return i18n.t("protectors and fit");
    case "training":
      return i18n.t("training");
    case "finding":
      return i18n.t("finding");
    case "letter":
      return i18n.t("letter of results");
    case "export":
      return i18n.t("file of a year");
  }
}
