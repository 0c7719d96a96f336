import { useLingui } from "@lingui/react";
import { useId, useState } from "react";
import type { MeterSettings } from "../../shared/acoustics/types";
import { responseWord, settingsWords } from "../../shared/words/register-words";
import { useLocale } from "../lib/i18n";
import { NumberInput, type Typed } from "./number-input";

/** The settings that dosimeters are commonly read under. */
export const COMMON_SETTINGS: readonly MeterSettings[] = [
  { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: 80, weighting: "A", response: "slow" },
  { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: 90, weighting: "A", response: "slow" },
  { criterionLevelDb: 85, exchangeRateDb: 3, thresholdDb: null, weighting: "A", response: "slow" },
  { criterionLevelDb: 85, exchangeRateDb: 3, thresholdDb: 80, weighting: "A", response: "slow" },
];

export function isSameSettings(a: MeterSettings, b: MeterSettings): boolean {
  return (
    a.criterionLevelDb === b.criterionLevelDb &&
    a.exchangeRateDb === b.exchangeRateDb &&
    a.thresholdDb === b.thresholdDb &&
    a.weighting === b.weighting &&
    a.response === b.response
  );
}

/** Settings while they are typed: a number may be missing or unreadable. */
export type TypedSettings = Omit<MeterSettings, "criterionLevelDb" | "thresholdDb"> & {
  readonly criterionLevelDb: Typed;
  readonly thresholdDb: Typed;
};

/** One of the common settings, or others written out. */
export function SettingsInput({
  value,
  onValue,
  id,
  describedBy,
}: {
  value: TypedSettings;
  onValue: (value: TypedSettings) => void;
  id?: string;
  describedBy?: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const common = COMMON_SETTINGS.findIndex((settings) =>
    isSameSettings(settings, value as MeterSettings),
  );
  const [isOther, setIsOther] = useState(common < 0);
  const own = useId();
  return (
    <div className="settings-input">
      <select
        className="input"
        id={id}
        aria-label={id ? undefined : i18n.t("Settings")}
        aria-describedby={describedBy}
        value={isOther || common < 0 ? "other" : String(common)}
        onChange={(event) => {
          const chosen = COMMON_SETTINGS[Number(event.target.value)];
          setIsOther(chosen === undefined);
          if (chosen) onValue(chosen);
        }}
      >
        {COMMON_SETTINGS.map((settings, index) => (
          <option key={settingsWords(i18n, settings, locale)} value={index}>
            {settingsWords(i18n, settings, locale)}
          </option>
        ))}
        <option value="other">{i18n.t("Others, written out")}</option>
      </select>
      {(isOther || common < 0) && (
        <div className="settings-parts">
          <label htmlFor={`${own}-criterion`}>
            <span>{i18n.t("Criterion level, dB")}</span>
            <NumberInput
              id={`${own}-criterion`}
              value={value.criterionLevelDb}
              onValue={(criterionLevelDb) => onValue({ ...value, criterionLevelDb })}
            />
          </label>
          <label>
            <span>{i18n.t("Exchange rate, dB")}</span>
            <select
              className="input"
              value={value.exchangeRateDb}
              onChange={(event) =>
                onValue({
                  ...value,
                  exchangeRateDb: Number(event.target.value),
                })
              }
            >
              {[3, 4, 5].map((rate) => (
                <option key={rate}>{rate}</option>
              ))}
            </select>
          </label>
          <label htmlFor={`${own}-threshold`}>
            <span>{i18n.t("Threshold, dB; empty: none")}</span>
            <NumberInput
              id={`${own}-threshold`}
              value={value.thresholdDb}
              onValue={(thresholdDb) => onValue({ ...value, thresholdDb })}
            />
          </label>
          <label>
            <span>{i18n.t("Weighting")}</span>
            <select
              className="input"
              value={value.weighting}
              onChange={(event) =>
                onValue({ ...value, weighting: event.target.value as MeterSettings["weighting"] })
              }
            >
              {["A", "C", "Z"].map((weighting) => (
                <option key={weighting}>{weighting}</option>
              ))}
            </select>
          </label>
          <label>
            <span>{i18n.t("Response")}</span>
            <select
              className="input"
              value={value.response}
              onChange={(event) =>
                onValue({ ...value, response: event.target.value as MeterSettings["response"] })
              }
            >
              {(["slow", "fast", "none"] as const).map((response) => (
                <option key={response} value={response}>
                  {responseWord(i18n, response)}
                </option>
              ))}
            </select>
          </label>
        </div>
      )}
    </div>
  );
}
