import { useLingui } from "@lingui/react";
import { memo } from "react";
import { formatNumber } from "../../../shared/format/number";
import type { Envelope, HistoryAnalysis, HistoryChannel } from "../../../shared/schemas/history";
import { useLocale } from "../../lib/i18n";
import { clockTicks, type HistoryClock } from "./history-clock";
import type { Drawn } from "./history-stretches";
import { criterionText, doseText, stretchName } from "./history-words";
import { CHANNEL_SYMBOL } from "./import-words";

const WIDTH = 680;
const LEFT = 34;
const RIGHT = 140;
const LEVELS = { top: 6, height: 190 };
const DOSES = { top: 226, height: 90 };
const LANES_TOP = 334;

/** Places on the paper, short enough for thousands of them. */
const tenths = (place: number) => Math.round(place * 10) / 10;

/** The whole shift on paper: black lines that a printer draws sharp, whatever the screen shows. */
export const HistoryPrint = memo(function HistoryPrint({
  envelope,
  analysis,
  clock,
  channels,
  drawn,
  taskNames,
}: {
  envelope: Envelope;
  analysis: HistoryAnalysis;
  clock: HistoryClock;
  channels: readonly HistoryChannel[];
  drawn: readonly Drawn[];
  taskNames: Readonly<Record<string, string>>;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { lengthS } = clock;
  const x = (atS: number) => LEFT + (atS / lengthS) * (WIDTH - LEFT - RIGHT);
  const y = (levelDb: number) =>
    LEVELS.top + LEVELS.height * (1 - (Math.min(Math.max(levelDb, 40), 140) - 40) / 100);
  const channel =
    channels.find((one) => one === "las") ??
    channels.find((one) => one === "laeq") ??
    channels[0] ??
    "laeq";
  const levels = envelope.channels[channel];
  const path = (levels?.high ?? [])
    .map((high, index) => {
      const low = levels?.low[index] ?? null;
      if (high === null || low === null) return "";
      const at = tenths(x(envelope.fromS + (index + 0.5) * envelope.bucketS));
      return `M${at} ${tenths(y(low / 100) + 0.5)}V${tenths(y(high / 100))}`;
    })
    .join("");
  const mostPct = Math.max(105, ...analysis.runningDose.map(({ dosePct }) => dosePct.at(-1) ?? 0));
  const doseY = (pct: number) => DOSES.top + DOSES.height * (1 - pct / mostPct);
  const plotEnd = WIDTH - RIGHT;
  let labelY = Number.NEGATIVE_INFINITY;
  const ends = analysis.runningDose
    .map((dose) => ({ dose, at: doseY(dose.dosePct.at(-1) ?? 0) }))
    .toSorted((a, b) => a.at - b.at)
    .map(({ dose, at }) => {
      labelY = Math.max(at + 3, labelY + 11);
      return { dose, labelY };
    });
  return (
    <svg className="shift-print" viewBox={`0 0 ${WIDTH} ${LANES_TOP + 56}`} aria-hidden="true">
      <defs>
        <pattern
          id="left-out-lines"
          width="5"
          height="5"
          patternUnits="userSpaceOnUse"
          patternTransform="rotate(35)"
        >
          <line y2="5" />
        </pattern>
      </defs>
      {[40, 60, 80, 100, 120, 140].map((db) => (
        <g key={db}>
          <line className="guide" x1={LEFT} x2={plotEnd} y1={y(db)} y2={y(db)} />
          <text x={LEFT - 4} y={y(db) + 3} textAnchor="end">
            {formatNumber(db, 0, locale)}
          </text>
        </g>
      ))}
      <path className="trace" d={path} />
      <text x={plotEnd + 6} y={LEVELS.top + 12}>
        {i18n.t("{channel}, dB", { channel: CHANNEL_SYMBOL[channel] })}
      </text>
      {clockTicks(clock, { fromS: 0, toS: lengthS }, 10).map(({ atS, text }) => (
        <g key={atS}>
          <line
            className="guide"
            x1={x(atS)}
            x2={x(atS)}
            y1={LEVELS.top}
            y2={DOSES.top + DOSES.height}
          />
          <text x={x(atS)} y={LEVELS.top + LEVELS.height + 14} textAnchor="middle">
            {text}
          </text>
        </g>
      ))}
      <line className="limit" x1={LEFT} x2={plotEnd} y1={doseY(100)} y2={doseY(100)} />
      <text x={LEFT - 4} y={doseY(100) + 3} textAnchor="end">
        {doseText(100, "exact", locale)}
      </text>
      {analysis.runningDose.map((dose, place) => (
        <polyline
          // biome-ignore lint/suspicious/noArrayIndexKey: the order is the analysis's own
          key={place}
          className="trace"
          points={[0, ...dose.dosePct]
            .map((pct, index) => `${tenths(x(index * dose.bucketS))},${tenths(doseY(pct))}`)
            .join(" ")}
        />
      ))}
      {ends.map(({ dose, labelY: at }) => (
        <text key={`${dose.label} ${JSON.stringify(dose.settings)}`} x={plotEnd + 6} y={at}>
          {doseText(dose.dosePct.at(-1) ?? null, dose.bound, locale)}{" "}
          {criterionText(i18n, dose, locale)}
        </text>
      ))}
      {drawn.map((one) => {
        const top = one.kind === "task" ? LANES_TOP : LANES_TOP + 28;
        const [from, to] = [x(one.fromS), x(one.toS)];
        return (
          <g key={one.key}>
            {one.kind === "task" ? (
              <path className="trace" d={`M${from} ${top}v6H${to}v-6`} />
            ) : (
              <rect
                className="hatch"
                x={from}
                y={top}
                width={Math.max(1, to - from)}
                height={8}
                fill="url(#left-out-lines)"
              />
            )}
            <text x={from} y={top + 19}>
              {stretchName(i18n, one, taskNames)}
            </text>
          </g>
        );
      })}
    </svg>
  );
});
