import type { I18n } from "@lingui/core";
import type { TokenScope, TokenView } from "../../../shared/schemas/api-token";

export function scopeWord(i18n: I18n, scope: TokenScope): string {
  switch (scope) {
    case "read-programme":
      return i18n.t("read the programme");
    case "read-results":
      return i18n.t("read results");
    case "enter-readings":
      return i18n.t("enter readings");
  }
}

export function scopeMeaning(i18n: I18n, scope: TokenScope): string {
  switch (scope) {
    case "read-programme":
      return i18n.t(
        "Read the programme: sites, areas, tasks, jobs, protectors. Nobody’s exposure.",
      );
    case "read-results":
      return i18n.t("Read results: workers, days, runs, findings and the year file.");
    case "enter-readings":
      return i18n.t("Enter readings: runs one by one or from a file.");
  }
}

export function tokenStateWord(i18n: I18n, state: TokenView["state"]): string {
  switch (state) {
    case "works":
      return i18n.t("works");
    case "ended":
      return i18n.t("ended");
    case "expired":
      return i18n.t("expired");
  }
}
