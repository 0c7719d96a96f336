import type { I18n } from "@lingui/core";
import type { DutyBearer, EmployerDuty } from "../../shared/rule-sets/employer-duties";

export function dutyWord(i18n: I18n, duty: EmployerDuty): string {
  switch (duty) {
    case "measure":
      return i18n.t("Measures the noise");
    case "protect":
      return i18n.t("Provides protectors");
    case "train":
      return i18n.t("Trains");
    case "keep":
      return i18n.t("Keeps the records");
    case "tell":
      return i18n.t("Tells the results");
  }
}

export const bearerWord = (i18n: I18n, bearer: DutyBearer): string =>
  bearer === "host" ? i18n.t("this site") : i18n.t("the employer");
