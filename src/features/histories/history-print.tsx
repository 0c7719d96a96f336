import { useLingui } from "@lingui/react";
import { memo } from "react";
import { formatBoundedDose, formatShare } from "../../../shared/format/dose";
import { formatNumber } from "../../../shared/format/number";
import type { Envelope, HistoryAnalysis, HistoryChannel } from "../../../shared/schemas/history";
import { useLocale } from "../../lib/i18n";
import { doseAxisTopPct, doseLook, dosePlace, doseTicks } from "./dose-axis";
import { clockTicks, type HistoryClock } from "./history-clock";
import type { Drawn } from "./history-stretches";
import { criterionText, stretchName } from "./history-words";
import { CHANNEL_SYMBOL } from "./import-words";
import { nameRows } from "./name-rows";

const WIDTH = 680;
const LEFT = 34;
const RIGHT = 176;
const LEVELS = { top: 6, height: 190 };
const DOSES = { top: 226, height: 104 };
const LANES_TOP = 348;
/** Of the print's letters, at 9 px: their mean width, and from line to line. */
const LETTER = 4.6;
const LINE = 11;
/** Room of a name right of the picture, in letters. */
const NAME_LETTERS = Math.floor((RIGHT - 8) / LETTER);
const NAME_GAP = 6;

/** Places on the paper, short enough for thousands of them. */
const tenths = (place: number) => Math.round(place * 10) / 10;

/** A text in lines of so many letters, broken between words. */
export function inLines(text: string, letters: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(" ")) {
    const last = lines.at(-1);
    if (last !== undefined && last.length + 1 + word.length <= letters)
      lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  return lines;
}

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
  const peakChannel = channels.find((one) => one === "lcpeak" || one === "lzpeak");
  const peakPath = (peakChannel ? (envelope.channels[peakChannel]?.high ?? []) : [])
    .map((high, index) =>
      high === null
        ? ""
        : `M${tenths(x(envelope.fromS + (index + 0.5) * envelope.bucketS))} ${tenths(y(high / 100) - 0.8)}v1.6`,
    )
    .join("");
  const topPct = doseAxisTopPct(
    Math.max(0, ...analysis.runningDose.map(({ dosePct }) => dosePct.at(-1) ?? 0)),
  );
  const doseY = (pct: number) =>
    DOSES.top + DOSES.height * (1 - dosePlace(pct) / dosePlace(topPct));
  const plotEnd = WIDTH - RIGHT;
  let freeY = Number.NEGATIVE_INFINITY;
  const ends = analysis.runningDose
    .map((dose, place) => ({ dose, place, at: doseY(dose.dosePct.at(-1) ?? 0) }))
    .toSorted((a, b) => a.at - b.at)
    .map(({ dose, place, at }) => {
      const text = `${formatBoundedDose(dose.dosePct.at(-1) ?? null, dose.bound, locale)} ${criterionText(i18n, dose, locale)}`;
      const lines = inLines(text, NAME_LETTERS - 5);
      const top = Math.max(at + 3, freeY);
      freeY = top + LINE * lines.length;
      return { key: place, place, lines, top };
    });
  const ofKind = (kind: Drawn["kind"]) =>
    drawn.filter((one) => one.kind === kind).toSorted((a, b) => a.fromS - b.fromS);
  const lane = (kind: Drawn["kind"]) => {
    const stretches = ofKind(kind);
    const names = stretches.map((one) =>
      one.kind === "task"
        ? stretchName(i18n, one, taskNames)
        : i18n.t("Left out: {reason}", { reason: one.reason }),
    );
    const places = nameRows(
      stretches.map((one, index) => ({ from: x(one.fromS), text: names[index]! })),
      { letter: LETTER, gap: NAME_GAP, width: WIDTH },
    );
    const rowCount = Math.max(0, ...places.map(({ row }) => row + 1));
    return { stretches, names, places, height: rowCount === 0 ? 0 : 12 + LINE * rowCount };
  };
  const tasks = lane("task");
  const leftOut = lane("left-out");
  const leftOutTop = Math.max(LANES_TOP + tasks.height, freeY - LINE) + 6;
  const height = leftOutTop + leftOut.height + 4;
  return (
    <svg className="shift-print" viewBox={`0 0 ${WIDTH} ${height}`} aria-hidden="true">
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
      <path className="peaks" d={peakPath} />
      <text x={plotEnd + 6} y={LEVELS.top + 12}>
        {i18n.t("{channel}, dB", { channel: CHANNEL_SYMBOL[channel] })}
      </text>
      {peakChannel && (
        <text x={plotEnd + 6} y={LEVELS.top + 12 + LINE}>
          {i18n.t("Points: {channel}, dB", { channel: CHANNEL_SYMBOL[peakChannel] })}
        </text>
      )}
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
      {doseTicks(topPct)
        .filter(({ isNamed }) => isNamed)
        .map(({ pct }) => (
          <g key={pct}>
            <line
              className={pct === 100 ? "limit" : "guide"}
              x1={LEFT}
              x2={plotEnd}
              y1={doseY(pct)}
              y2={doseY(pct)}
            />
            <text x={LEFT - 4} y={doseY(pct) + 3} textAnchor="end">
              {formatShare(pct, locale)}
            </text>
          </g>
        ))}
      {analysis.runningDose.map((dose, place) => (
        <polyline
          // biome-ignore lint/suspicious/noArrayIndexKey: the order is the analysis's own
          key={place}
          className="trace"
          strokeDasharray={doseLook(place).dash.join(" ")}
          points={[0, ...dose.dosePct]
            .map((pct, index) => `${tenths(x(index * dose.bucketS))},${tenths(doseY(pct))}`)
            .join(" ")}
        />
      ))}
      {ends.map(({ key, place, lines, top }) => (
        <g key={key}>
          <line
            className="trace"
            strokeDasharray={doseLook(place).dash.join(" ")}
            x1={plotEnd + 4}
            x2={plotEnd + 24}
            y1={top - 3}
            y2={top - 3}
          />
          {lines.map((text, index) => (
            <text key={text} x={plotEnd + 28} y={top + LINE * index}>
              {text}
            </text>
          ))}
        </g>
      ))}
      {tasks.stretches.map((one, index) => {
        const [from, to] = [x(one.fromS), x(one.toS)];
        const { x: nameX, row } = tasks.places[index]!;
        return (
          <g key={one.key}>
            <path className="trace" d={`M${from} ${LANES_TOP}v6H${to}v-6`} />
            <text x={nameX} y={LANES_TOP + 17 + LINE * row}>
              {tasks.names[index]}
            </text>
          </g>
        );
      })}
      {leftOut.stretches.map((one, index) => {
        const [from, to] = [x(one.fromS), x(one.toS)];
        const { x: nameX, row } = leftOut.places[index]!;
        return (
          <g key={one.key}>
            <rect
              className="hatch"
              x={from}
              y={leftOutTop}
              width={Math.max(1, to - from)}
              height={8}
              fill="url(#left-out-lines)"
            />
            <text x={nameX} y={leftOutTop + 18 + LINE * row}>
              {leftOut.names[index]}
            </text>
          </g>
        );
      })}
    </svg>
  );
});
