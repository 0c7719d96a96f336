import { useLingui } from "@lingui/react";
import { useId, useMemo, useState } from "react";
import type { ActivePart } from "../../../shared/acoustics/types";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { AtEarView } from "../../../shared/schemas/at-ear";
import { bandLabel } from "../../components/band-picture";
import { DataTable } from "../../components/data-table";
import { TextButton } from "../../components/link";
import { NumberInput, type Typed } from "../../components/number-input";
import { useLocale } from "../../lib/i18n";
import { noiseOf } from "./active-in-noise";
import {
  collapse,
  DELAY_TO_US,
  GAIN_TO,
  MOST_DELAY_US,
  type Outcome,
  outcomeOf,
  startOf,
  type Tried,
} from "./experiment";
import { useWidth } from "./use-width";

/** Delay and gain to be pushed about: why an active part's rating collapses. Nothing is stored. */
export function DelayGain({ view, active }: { view: AtEarView; active: ActivePart }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const start = useMemo(() => startOf(active), [active]);
  const [tried, setTried] = useState<Tried>(start);
  const level = useMemo(() => noiseOf(view.level), [view.level]);
  const alpha = ruleSetVersion(view.ruleSetKey, view.ruleSetVersion)?.protection.alpha ?? 1;
  const { bands } = view.inner;
  const outcome = outcomeOf(level, bands, active, alpha, tried);
  const byDelay = useMemo(
    () => collapse(level, bands, active, alpha, tried.gain),
    [level, bands, active, alpha, tried.gain],
  );
  const isStart = tried.delayUs === start.delayUs && tried.gain === start.gain;
  const isOwn = active.delayS !== null && active.gain !== null;
  return (
    <div className="delay-gain">
      <p className="review-lead">
        <b>{i18n.t("An experiment: nothing here is stored, and no result changes.")}</b>{" "}
        {i18n.t(
          "The opposite wave comes a little late and a little too weak or too strong. Bandwidth and maximum are the device’s own; it is not asked whether it saturates.",
        )}
      </p>
      <div className="delay-gain-controls">
        <Slider
          label={i18n.t("Delay")}
          unit="µs"
          value={tried.delayUs}
          sliderTo={DELAY_TO_US}
          most={MOST_DELAY_US}
          step={1}
          onValue={(delayUs) => setTried((before) => ({ ...before, delayUs }))}
        />
        <Slider
          label={i18n.t("Gain")}
          unit={i18n.t("1 is exact")}
          value={tried.gain}
          sliderTo={GAIN_TO}
          most={GAIN_TO}
          step={0.01}
          onValue={(gain) => setTried((before) => ({ ...before, gain }))}
        />
        <p className="delay-gain-back">
          <TextButton disabled={isStart} onClick={() => setTried(start)}>
            {isOwn ? i18n.t("Back to the device’s own") : i18n.t("Back to the start")}
          </TextButton>
        </p>
      </div>
      <p className="delay-gain-says">
        {tried.gain === 0 ? (
          <b>
            {i18n.t(
              "At gain 0 the active part does nothing: it takes nothing off and adds nothing.",
            )}
          </b>
        ) : (
          <OutcomeWords outcome={outcome} taskName={view.task.name} />
        )}
      </p>
      <div className="delay-gain-pictures">
        <CurvePicture outcome={outcome} />
        {byDelay.length > 0 && (
          <CollapsePicture points={byDelay} tried={tried} furtherDb={outcome.furtherDb} />
        )}
      </div>
      <div className="delay-gain-table">
        <DataTable
          caption={i18n.t("What the tried delay and gain would do by octave band")}
          rows={outcome.bands}
          rowKey={({ frequencyHz }) => String(frequencyHz)}
          columns={[
            {
              id: "band",
              head: i18n.t("Band"),
              unit: "Hz",
              kind: "figure",
              isRowHead: true,
              cell: ({ frequencyHz }) => frequencyHz,
            },
            {
              id: "credited",
              head: i18n.t("It changes"),
              unit: "dB",
              kind: "figure",
              cell: ({ creditedDb }) =>
                creditedDb < 0 ? (
                  <b>{formatLevelChange(-creditedDb, locale)}</b>
                ) : (
                  formatLevelChange(creditedDb === 0 ? 0 : -creditedDb, locale)
                ),
            },
            {
              id: "passive",
              head: i18n.t("Under it"),
              unit: "dB(A)",
              kind: "figure",
              cell: ({ passiveADb }) => formatLevel(passiveADb, locale),
            },
            {
              id: "active",
              head: i18n.t("Part on"),
              unit: "dB(A)",
              kind: "figure",
              cell: ({ activeADb }) => formatLevel(activeADb, locale),
            },
          ]}
        />
      </div>
    </div>
  );
}

function OutcomeWords({ outcome, taskName }: { outcome: Outcome; taskName: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { furtherDb, breakEvenHz } = outcome;
  const even =
    breakEvenHz === null
      ? i18n.t("It breaks even nowhere.")
      : breakEvenHz === 0
        ? i18n.t("It only adds, at every frequency.")
        : i18n.t("It breaks even at {hz} Hz and adds noise above.", {
            hz: formatNumber(breakEvenHz, 0, locale),
          });
  if (furtherDb === null)
    return (
      <>
        {i18n.t(
          "What that does to {task} is not assessed: no octave bands of it, or of the protector, are known.",
          { task: taskName },
        )}{" "}
        {even}
      </>
    );
  return (
    <>
      {furtherDb < 0 ? (
        <b>
          {i18n.t("In {task} it would be {level} dB louder at the ear than with the part off.", {
            task: taskName,
            level: formatLevel(-furtherDb, locale),
          })}
        </b>
      ) : (
        <b>
          {i18n.t("In {task} the part would take {level} dB further off.", {
            task: taskName,
            level: formatLevel(furtherDb, locale),
          })}
        </b>
      )}{" "}
      {even}
    </>
  );
}

/** A slider, and a field beside it that takes the figure itself. */
function Slider({
  label,
  unit,
  value,
  sliderTo,
  most,
  step,
  onValue,
}: {
  label: string;
  unit: string;
  value: number;
  sliderTo: number;
  most: number;
  step: number;
  onValue: (value: number) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const id = useId();
  const [typed, setTyped] = useState<Typed>(value);
  const isTyped = typeof typed === "number" && typed >= 0 && typed <= most;
  // A field that can't be read keeps its text; a slider that moves puts its own figure there.
  const [last, setLast] = useState(value);
  if (last !== value) {
    setLast(value);
    if (typed !== value) setTyped(value);
  }
  return (
    <div className="slider">
      <label htmlFor={id}>{label}</label>
      <input
        id={id}
        type="range"
        min={0}
        max={sliderTo}
        step={step}
        value={Math.min(sliderTo, value)}
        aria-valuetext={`${formatNumber(value, step < 1 ? 2 : 0, locale)} ${unit}`}
        onChange={(event) => onValue(Number(event.target.value))}
      />
      <NumberInput
        className="input is-number"
        aria-label={i18n.t("{label}, typed", { label })}
        aria-describedby={isTyped ? `${id}-unit` : `${id}-unit ${id}-error`}
        aria-invalid={!isTyped || undefined}
        value={typed}
        onValue={(next) => {
          setTyped(next);
          if (typeof next === "number" && next >= 0 && next <= most) onValue(next);
        }}
      />
      <span className="unit" id={`${id}-unit`}>
        {unit}
      </span>
      {!isTyped && (
        <p className="field-error" id={`${id}-error`}>
          {i18n.t("A figure from 0 to {most}.", { most: formatNumber(most, 0, locale) })}
        </p>
      )}
    </div>
  );
}

const HEIGHT = 200;
const LEFT = 34;
const RIGHT = 6;
const TOP = 12;
const BOTTOM = 24;
/** What is added is drawn so far above the ink line, dB. */
const UP_DB = 10;
const FROM_HZ = 50;
const TO_HZ = 8000;

/** 0 in ink; what is taken off falls below it, what is added stands above, each to the end of the scale. */
const yOn = (downDb: number) => (db: number) =>
  TOP +
  ((Math.max(-UP_DB, Math.min(downDb, db)) + UP_DB) / (UP_DB + downDb)) * (HEIGHT - TOP - BOTTOM);

function Ground({ widthPx, downDb }: { widthPx: number; downDb: number }) {
  const y = yOn(downDb);
  return Array.from({ length: (UP_DB + downDb) / 10 + 1 }, (_, step) => step * 10 - UP_DB).map(
    (db) => (
      <g key={db}>
        <line
          className={db === 0 ? "band-zero" : "band-guide"}
          x1={LEFT}
          x2={widthPx - RIGHT}
          y1={Math.round(y(db)) + 0.5}
          y2={Math.round(y(db)) + 0.5}
        />
        <text x={LEFT - 6} y={y(db) + 4} textAnchor="end">
          {db === 0 ? "0" : db < 0 ? `+${-db}` : `−${db}`}
        </text>
      </g>
    ),
  );
}

const CURVE_DOWN_DB = 40;
const NOISE_DOWN_DB = 20;

function CurvePicture({ outcome: { curve, bands, breakEvenHz } }: { outcome: Outcome }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { ref, widthPx } = useWidth(420);
  const x = (hz: number) =>
    LEFT + (Math.log(hz / FROM_HZ) / Math.log(TO_HZ / FROM_HZ)) * (widthPx - LEFT - RIGHT - 14);
  const yOf = yOn(CURVE_DOWN_DB);
  const isOnScale = breakEvenHz !== null && breakEvenHz > FROM_HZ && breakEvenHz < TO_HZ;
  return (
    <div className="band-picture" ref={ref}>
      <svg
        width={widthPx}
        height={HEIGHT}
        role="img"
        aria-label={i18n.t(
          "Change by frequency with the tried delay and gain, dB; the table beneath says the same by octave band",
        )}
      >
        <Ground widthPx={widthPx} downDb={CURVE_DOWN_DB} />
        {bands.map(({ frequencyHz }, index) => (
          <text
            key={frequencyHz}
            x={x(frequencyHz)}
            y={HEIGHT - 6}
            textAnchor={index === bands.length - 1 ? "end" : "middle"}
          >
            {bandLabel(frequencyHz)}
          </text>
        ))}
        <polyline
          className="at-ear-curve"
          points={curve
            .map(({ frequencyHz, attenuationDb }) => `${x(frequencyHz)},${yOf(attenuationDb)}`)
            .join(" ")}
        />
        {isOnScale && (
          <>
            <path className="at-ear-even" d={`M${x(breakEvenHz)} ${TOP + 2}V${yOf(0) + 8}`} />
            {/* At the upper end, where no ring is: a band that adds noise is credited with less than nothing, and its
                ring may stand just above the ink line. */}
            <text
              x={x(breakEvenHz)}
              y={yOf(-UP_DB) - 1}
              textAnchor={x(breakEvenHz) > widthPx / 2 ? "end" : "start"}
              className="at-ear-added-figure"
            >
              {`${formatNumber(breakEvenHz, 0, locale)} Hz`}
            </text>
          </>
        )}
        {bands.map(({ frequencyHz, creditedDb }) => (
          <circle
            key={frequencyHz}
            className="band-ring"
            cx={x(frequencyHz)}
            cy={yOf(creditedDb)}
            r="3.2"
          />
        ))}
      </svg>
      <p className="picture-legend">
        {i18n.t(
          "Line: the bare formula, which repeats at whole periods; a device does not. Rings: what it is credited with by octave band. Upright: where it breaks even. Drawn to 10 dB above and 40 below.",
        )}
      </p>
    </div>
  );
}

function CollapsePicture({
  points,
  tried,
  furtherDb,
}: {
  points: readonly { delayUs: number; furtherDb: number }[];
  tried: Tried;
  furtherDb: number | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { ref, widthPx } = useWidth(420);
  const x = (delayUs: number) => LEFT + (delayUs / DELAY_TO_US) * (widthPx - LEFT - RIGHT - 14);
  const yOf = yOn(NOISE_DOWN_DB);
  const isOnScale = tried.delayUs <= DELAY_TO_US && furtherDb !== null;
  return (
    <div className="band-picture" ref={ref}>
      <svg
        width={widthPx}
        height={HEIGHT}
        role="img"
        aria-label={i18n.t(
          "Change of the level at the ear by delay, at the tried gain, dB; the sentence above says where it stands",
        )}
      >
        <Ground widthPx={widthPx} downDb={NOISE_DOWN_DB} />
        {[0, 250, 500, 750, 1000].map((us) => (
          <text
            key={us}
            x={x(us)}
            y={HEIGHT - 6}
            textAnchor={us === 0 ? "start" : us === DELAY_TO_US ? "end" : "middle"}
          >
            {formatNumber(us, 0, locale)}
          </text>
        ))}
        <polyline
          className="at-ear-curve"
          points={points.map((one) => `${x(one.delayUs)},${yOf(one.furtherDb)}`).join(" ")}
        />
        {isOnScale && (
          <circle className="band-ring" cx={x(tried.delayUs)} cy={yOf(furtherDb)} r="4" />
        )}
      </svg>
      <p className="picture-legend">
        {i18n.t(
          "The same for the whole noise of this task, A-weighted, over the delay in µs. Ring: the delay that is tried.",
        )}
      </p>
    </div>
  );
}
