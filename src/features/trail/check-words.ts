import type { I18n } from "@lingui/core";
import type { RowFaultKind, SealFaultKind } from "../../../shared/schemas/trail-check";
import type { HeadMail } from "../../../shared/schemas/trail-keeper";

export function sealFaultWord(i18n: I18n, kind: SealFaultKind, count: number): string {
  switch (kind) {
    case "seal-missing":
      return i18n.t("{count, plural, one {A seal is missing} other {# seals are missing}}", {
        count,
      });
    case "event-missing":
      return i18n.t("The event was removed");
    case "entry-missing":
      return i18n.t("What was recorded of rows was removed");
    case "seal-broken":
      return i18n.t("The seal does not follow: what it covers was changed, or the seal itself");
    case "values-removed":
      return i18n.t("The event’s values were removed, and no erasure did that");
    case "values-changed":
      return i18n.t("The event’s values are not what was written");
  }
}

export function rowFaultWord(i18n: I18n, kind: RowFaultKind): string {
  switch (kind) {
    case "row-changed":
      return i18n.t("Changed behind the trail");
    case "row-inserted":
      return i18n.t("Put in behind the trail");
    case "row-removed":
      return i18n.t("Removed behind the trail");
  }
}

export function operationWord(i18n: I18n, operation: "insert" | "update" | "delete"): string {
  switch (operation) {
    case "insert":
      return i18n.t("Put in");
    case "update":
      return i18n.t("Changed");
    case "delete":
      return i18n.t("Removed");
  }
}

export function headMailWord(i18n: I18n, state: HeadMail["state"]): string {
  switch (state) {
    case "waiting":
      return i18n.t("on its way");
    case "sent":
      return i18n.t("sent");
    case "refused":
      return i18n.t("refused by the mail server");
    case "bounced":
      return i18n.t("came back undeliverable");
  }
}
