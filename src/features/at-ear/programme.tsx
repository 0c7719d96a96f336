import { useLingui } from "@lingui/react";
import { useId, useState } from "react";
import { withAudioDb } from "../../../shared/acoustics/protection/programme-audio";
import { formatLevel } from "../../../shared/format/level";
import type { AtEarView } from "../../../shared/schemas/at-ear";
import { NumberInput, type Typed } from "../../components/number-input";
import { useLocale } from "../../lib/i18n";

const LEAST_DB = 20;
const MOST_DB = 120;

const isLevel = (typed: Typed): typed is number =>
  typeof typed === "number" && typed >= LEAST_DB && typed <= MOST_DB;

/** A radio or a signal under the cup: both sounds together while it plays, by energy. Nothing is stored. */
export function Programme({ view }: { view: AtEarView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const id = useId();
  const [typed, setTyped] = useState<Typed>(view.worker?.audioDb ?? null);
  const { offDb, onDb } = view.whileWorn;
  const isWrong = typed !== null && !isLevel(typed);
  const noise = (db: number) => formatLevel(db, locale);
  const both = (db: number) => (isLevel(typed) ? formatLevel(withAudioDb(db, typed), locale) : "–");
  return (
    <div className="programme">
      <p className="programme-line">
        <label htmlFor={id}>{i18n.t("Programme under the cup")}</label>
        <NumberInput
          id={id}
          className="input is-number"
          aria-describedby={isWrong ? `${id}-unit ${id}-error` : `${id}-unit`}
          aria-invalid={isWrong || undefined}
          value={typed}
          onValue={setTyped}
        />
        <span className="unit" id={`${id}-unit`}>
          {i18n.t("dB(A), at the ear")}
        </span>
      </p>
      {isWrong && (
        <p className="field-error" id={`${id}-error`}>
          {i18n.t("A level from 20 to 120 dB(A).")}
        </p>
      )}
      <p className="programme-says">
        {offDb === null
          ? i18n.t("Together: Not assessed, for what is left of the noise is not known.")
          : typed === null || isWrong
            ? i18n.t(
                "{noise} dB(A) of the noise are left in {task}. What is heard under the cup adds to that by energy.",
                {
                  noise: noise(offDb),
                  task: view.task.name,
                },
              )
            : onDb === null
              ? i18n.t(
                  "Together with the noise in {task}: {both} dB(A), of which the noise is {noise}.",
                  {
                    task: view.task.name,
                    both: both(offDb),
                    noise: noise(offDb),
                  },
                )
              : i18n.t(
                  "Together with the noise in {task}: {both} dB(A) with the part off, {on} with it on; the noise alone is {noise} and {noiseOn}.",
                  {
                    task: view.task.name,
                    both: both(offDb),
                    on: both(onDb),
                    noise: noise(offDb),
                    noiseOn: noise(onDb),
                  },
                )}
      </p>
    </div>
  );
}
