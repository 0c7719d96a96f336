import type { I18n } from "@lingui/core";
import type { RoleName } from "../../shared/schemas/session";

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
    case "representative":
      return i18n.t("Workers’ representative");
  }
}
