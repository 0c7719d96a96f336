import type { I18n } from "@lingui/core";
import type { Control } from "../../../shared/schemas/follow-up";

/** A kind of control, as a heading. */
export function controlWord(i18n: I18n, control: Control): string {
  switch (control) {
    case "eliminate":
      return i18n.t("Eliminate");
    case "substitute":
      return i18n.t("Substitute");
    case "engineer":
      return i18n.t("Engineer");
    case "organise":
      return i18n.t("Organise");
    case "protect":
      return i18n.t("Protect");
  }
}

/** What it means, in a few words beside it. */
export function controlNote(i18n: I18n, control: Control): string {
  switch (control) {
    case "eliminate":
      return i18n.t("do without the noisy work");
    case "substitute":
      return i18n.t("a quieter machine, tool or process");
    case "engineer":
      return i18n.t("enclose, damp, screen, maintain");
    case "organise":
      return i18n.t("less time in it, fewer people, other places");
    case "protect":
      return i18n.t("hearing protectors, last of all");
  }
}
