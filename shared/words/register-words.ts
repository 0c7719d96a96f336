import type { I18n } from "@lingui/core";
import type { Bar } from "../acoustics/protection/barred";
import { earNotTried, hasToPass } from "../acoustics/protection/fit-rating";
import type {
  Grade,
  InstrumentClass,
  LevelMetric,
  MeterSettings,
  ProtectorKind,
  SurveyStrategy,
  Zone,
} from "../acoustics/types";
import { formatLimit } from "../format/level";
import type { Locale } from "../i18n/index";
import type { Gear } from "../schemas/fit";
import type { InstrumentView } from "../schemas/run";

export function protectorKindWord(i18n: I18n, kind: ProtectorKind): string {
  switch (kind) {
    case "earmuff":
      return i18n.t("Earmuff");
    case "helmet-earmuff":
      return i18n.t("Earmuff on a helmet");
    case "foam-plug":
      return i18n.t("Foam plug");
    case "premoulded-plug":
      return i18n.t("Premoulded plug");
    case "custom-plug":
      return i18n.t("Plug moulded to the ear");
    case "banded-plug":
      return i18n.t("Plugs on a band");
    case "level-dependent":
      return i18n.t("Level-dependent");
    case "active-earmuff":
      return i18n.t("Active earmuff");
    case "active-plug":
      return i18n.t("Active plug");
    case "communication-headset":
      return i18n.t("Communication headset");
  }
}

/** Whether a fit passed what the noise asks for; where that is not known, or nothing, or one ear was not tried, this is said. */
export function passWord(
  i18n: I18n,
  { hasPassed, needDb }: { hasPassed: boolean | null; needDb: number | null },
): string {
  if (needDb !== null && !hasToPass(needDb)) return i18n.t("Nothing to pass");
  if (hasPassed === null)
    return needDb === null ? i18n.t("Need not known") : i18n.t("Not assessed");
  return hasPassed ? i18n.t("Fits") : i18n.t("Does not fit");
}

/** Of a test of one ear alone, which; null: both were tried, or none was rated. */
export function oneEarWord(
  i18n: I18n,
  ears: { readonly leftDb: number | null; readonly rightDb: number | null },
): string | null {
  const notTried = earNotTried(ears);
  if (notTried === null) return null;
  return notTried === "left" ? i18n.t("right ear only") : i18n.t("left ear only");
}

export function gearWord(i18n: I18n, gear: Gear): string {
  switch (gear) {
    case "helmet":
      return i18n.t("helmet");
    case "glasses":
      return i18n.t("glasses");
    case "respirator":
      return i18n.t("respirator");
  }
}

/**
 * Whether an own fit passed, of which part: a rating is of the passive one, and where the word while worn is of the
 * active part on, the two judge different things.
 */
export function ownFitWord(
  i18n: I18n,
  { hasPassed, needDb }: { hasPassed: boolean | null; needDb: number | null },
  isActiveCredited: boolean,
): string {
  const isJudged = hasPassed !== null && (needDb === null || hasToPass(needDb));
  if (!isActiveCredited || !isJudged) return passWord(i18n, { hasPassed, needDb });
  return hasPassed
    ? i18n.t("Fits with the active part off")
    : i18n.t("Does not fit with the active part off");
}

/** Why a device is out of the question. */
export function exclusionWord(i18n: I18n, { code, gear }: Bar): string {
  switch (code) {
    case "gear":
      return gear === null
        ? i18n.t("not with what is worn beside it")
        : i18n.t("not with {gear}", { gear: gearWord(i18n, gear) });
    case "cannot-wear":
      return i18n.t("this worker cannot wear it");
    case "no-data":
      return i18n.t("its data say nothing of this noise");
    case "archived":
      return i18n.t("no longer in use");
  }
}

/** What stands in the place of a way to hand a device out that is out of the question. */
export function barWord(i18n: I18n, bar: Bar): string {
  return bar.code === "no-data"
    ? i18n.t("goes out only on a passed fit: its data say nothing of this noise")
    : exclusionWord(i18n, bar);
}

/** "helmet, glasses"; null: none. */
export const gearWords = (i18n: I18n, gear: readonly Gear[]): string | null =>
  gear.length > 0 ? gear.map((one) => gearWord(i18n, one)).join(", ") : null;

export function zoneWord(i18n: I18n, zone: Zone): string {
  switch (zone) {
    case "none":
      return i18n.t("No zone");
    case "single":
      return i18n.t("Zone, one protector");
    case "double":
      return i18n.t("Zone, two protectors");
  }
}

export function gradeWord(i18n: I18n, grade: Grade): string {
  switch (grade) {
    case "measured-worker":
      return i18n.t("measured on the worker");
    case "measured-group":
      return i18n.t("measured on the group");
    case "task-level":
      return i18n.t("from the task’s level");
    case "estimate":
      return i18n.t("estimate");
  }
}

export function strategyWord(i18n: I18n, strategy: SurveyStrategy): string {
  switch (strategy) {
    case "task":
      return i18n.t("task by task");
    case "job":
      return i18n.t("by job");
    case "full-day":
      return i18n.t("by full days");
  }
}

export function instrumentKindWord(i18n: I18n, kind: InstrumentView["kind"]): string {
  switch (kind) {
    case "dosimeter":
      return i18n.t("Dosimeter");
    case "sound-level-meter":
      return i18n.t("Sound level meter");
    case "calibrator":
      return i18n.t("Acoustic calibrator");
  }
}

export function instrumentClassWord(i18n: I18n, instrument: InstrumentClass): string {
  switch (instrument) {
    case "class-1-meter":
      return i18n.t("Sound level meter, class 1");
    case "class-2-meter":
      return i18n.t("Sound level meter, class 2");
    case "dosimeter":
      return i18n.t("Dosimeter");
  }
}

export function responseWord(i18n: I18n, response: MeterSettings["response"]): string {
  switch (response) {
    case "slow":
      return i18n.t("slow");
    case "fast":
      return i18n.t("fast");
    case "none":
      return i18n.t("no time weighting");
  }
}

/** "5 dB, threshold 80, A, slow; criterion 90 dB". */
export function settingsWords(i18n: I18n, settings: MeterSettings, locale: Locale): string {
  const { exchangeRateDb, thresholdDb, weighting, response, criterionLevelDb } = settings;
  const values = {
    exchange: exchangeRateDb,
    weighting,
    response: responseWord(i18n, response),
    criterion: formatLimit(criterionLevelDb, locale),
  };
  return thresholdDb === null
    ? i18n.t(
        "{exchange} dB, no threshold, {weighting}, {response}; criterion {criterion} dB",
        values,
      )
    : i18n.t(
        "{exchange} dB, threshold {threshold}, {weighting}, {response}; criterion {criterion} dB",
        { ...values, threshold: formatLimit(thresholdDb, locale) },
      );
}

export function metricWord(i18n: I18n, metric: LevelMetric): string {
  switch (metric.kind) {
    case "laeq":
      return i18n.t("LAeq");
    case "steady":
      return i18n.t("steady, read on slow");
    case "lavg":
      return i18n.t("LAVG, {exchange} dB", { exchange: metric.settings.exchangeRateDb });
  }
}
