import { useLingui } from "@lingui/react";
import { type KeyboardEvent, type ReactNode, useEffect, useId, useRef, useState } from "react";
import { formatDate, formatMonth } from "../../shared/format/date";
import { formatLevel, formatLimit, formatWholeLevel } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";
import { placeLabels } from "./mark-rows";

export interface HistoryDay {
  /** ISO date. */
  readonly date: string;
  /** At the ear, dB; null: not assessed, no tick. */
  readonly levelDb: number | null;
  readonly isExpected?: boolean;
  /** Direct label at the tick: "88: worn-out cushions". */
  readonly note?: string;
}

export interface HistoryMark {
  readonly date: string;
  /** "your Fenmuff, from May" */
  readonly label: string;
}

export interface HistoryChartProps {
  /** Said first to those who hear it. */
  readonly title: string;
  readonly days: readonly HistoryDay[];
  readonly limitDb: number | null;
  readonly marks?: readonly HistoryMark[];
  readonly variant?: "officer" | "worker";
  /** Link to the same as a table. */
  readonly tableLink: ReactNode;
}

const LOW_DB = 70;
const HIGH_DB = 90;
/** A row of a mark's words. */
const LABEL_ROW_PX = 18;
/** Between a limit's line and a tick's words. */
const NOTE_CLEARANCE_PX = 4;
/** Of a mark's words, on the wide side: they are placed before they are drawn. */
const CHARACTER_PX = { officer: 6.6, worker: 7.4 };

const DAY_MS = 86_400_000;
const dayNumber = (date: string) => Date.parse(date) / DAY_MS;

/** The months between two days, each by the day on which its label stands; every second or third where a year would crowd them. */
function monthLabels(fromDay: number, toDay: number): { date: string; day: number }[] {
  const months: { date: string; day: number }[] = [];
  const at = new Date(fromDay * DAY_MS);
  at.setUTCDate(1);
  while (at.getTime() / DAY_MS <= toDay) {
    months.push({
      date: at.toISOString().slice(0, 10),
      day: Math.max(fromDay, at.getTime() / DAY_MS),
    });
    at.setUTCMonth(at.getUTCMonth() + 1);
  }
  const step = Math.ceil(months.length / 4);
  return months.filter((_, index) => index % step === 0);
}

/** Days as ticks against the limit. Drawn for the eye; arrow keys read it day by day; the table says the same. */
export function HistoryChart({
  title,
  days,
  limitDb,
  marks = [],
  variant = "officer",
  tableLink,
}: HistoryChartProps) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const readId = useId();
  const frame = useRef<HTMLDivElement>(null);
  const [widthPx, setWidthPx] = useState(600);
  const [at, setAt] = useState<number | null>(null);

  useEffect(() => {
    const element = frame.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry && entry.contentRect.width > 0) setWidthPx(Math.round(entry.contentRect.width));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);

  const levels = days.flatMap((day) => (day.levelDb === null ? [] : [day.levelDb]));
  // A level beyond the frame widens it, below to a line with its figure: no day is cut off or drawn where it is not.
  const bottomDb = Math.min(LOW_DB, ...levels.map((levelDb) => Math.floor(levelDb / 10) * 10));
  const topDb = Math.max(HIGH_DB, ...levels.map((levelDb) => Math.ceil((levelDb + 1) / 5) * 5));
  const plotPx = variant === "worker" ? 104 : 150;
  const rightPx = 36;
  const dayNumbers = days.map((day) => dayNumber(day.date));
  const fromDay = Math.min(...dayNumbers);
  const toDay = Math.max(...dayNumbers);
  const dayPx = (widthPx - rightPx - 10) / Math.max(1, toDay - fromDay);
  const x = (day: number) => 4 + (day - fromDay) * dayPx;
  const levelPx = (plotPx - 6) / (topDb - bottomDb);
  const y = (levelDb: number) => plotPx - (levelDb - bottomDb) * levelPx;
  // Words of a tick close to the limit stand clear of its line, on the tick's side.
  const noteY = (levelDb: number) => {
    const besideY = y(levelDb) + 4;
    if (limitDb === null) return besideY;
    return levelDb > limitDb
      ? Math.min(besideY, y(limitDb) - NOTE_CLEARANCE_PX)
      : Math.max(besideY, y(limitDb) + NOTE_CLEARANCE_PX + 10);
  };
  const markX = (mark: HistoryMark) => Math.round(x(dayNumber(mark.date)));
  const labels = placeLabels(
    marks.map((mark) => ({
      lineX: markX(mark),
      width: mark.label.length * CHARACTER_PX[variant],
    })),
    widthPx,
  );
  const labelRows = Math.max(0, ...labels.map(({ row }) => row + 1));
  const heightPx = plotPx + labelRows * LABEL_ROW_PX;
  const lineToX = widthPx - rightPx;
  const tickHalf = variant === "worker" ? 4.5 : 5;
  const guides = Array.from(
    { length: Math.floor((topDb - bottomDb) / 5) + 1 },
    (_, step) => bottomDb + step * 5,
  ).filter(
    (levelDb) => levelDb % 10 === 0 && (limitDb === null || Math.abs(levelDb - limitDb) >= 4),
  );
  const show = (levelDb: number) =>
    variant === "worker" ? formatWholeLevel(levelDb, locale) : formatLevel(levelDb, locale);

  const current = at === null ? null : days[at];
  const read = current
    ? current.levelDb === null
      ? i18n.t("{date}: not assessed", { date: formatDate(current.date, locale) })
      : i18n.t("{date}: {level} dB at the ear", {
          date: formatDate(current.date, locale),
          level: show(current.levelDb),
        })
    : "";

  function onKeyDown(event: KeyboardEvent) {
    const last = days.length - 1;
    const next: Record<string, number> = {
      ArrowRight: Math.min(last, (at ?? -1) + 1),
      ArrowLeft: Math.max(0, (at ?? last + 1) - 1),
      Home: 0,
      End: last,
    };
    const index = next[event.key];
    if (index === undefined) return;
    event.preventDefault();
    setAt(index);
  }

  if (days.length === 0) return null;
  return (
    <figure className={`history-chart${variant === "worker" ? " is-worker" : ""}`} ref={frame}>
      {/* biome-ignore lint/a11y/useSemanticElements: a fieldset is for form controls */}
      <div
        role="group"
        // biome-ignore lint/a11y/noNoninteractiveTabindex: the arrow keys read it day by day
        tabIndex={0}
        aria-label={title}
        aria-describedby={readId}
        onKeyDown={onKeyDown}
        onBlur={() => setAt(null)}
      >
        <svg height={heightPx + 24} viewBox={`0 0 ${widthPx} ${heightPx + 24}`} aria-hidden="true">
          {guides.map((levelDb) => (
            <g key={levelDb}>
              <line className="guide" x2={lineToX} y1={y(levelDb)} y2={y(levelDb)} />
              <text className="figure-text" x={widthPx} y={y(levelDb) + 4.5} textAnchor="end">
                {formatLimit(levelDb, locale)}
              </text>
            </g>
          ))}
          {limitDb !== null && (
            <>
              <line className="limit-line" x2={lineToX} y1={y(limitDb)} y2={y(limitDb)} />
              <text
                className="figure-text label-ink"
                x={widthPx}
                y={y(limitDb) + 4.5}
                textAnchor="end"
              >
                {formatLimit(limitDb, locale)}
              </text>
            </>
          )}
          {marks.map((mark, index) => {
            const label = labels[index];
            if (!label) return null;
            const bottomY = plotPx + (label.row + 1) * LABEL_ROW_PX;
            return (
              <g key={mark.date}>
                <line
                  className="mark-line"
                  x1={markX(mark)}
                  x2={markX(mark)}
                  y1={limitDb === null ? 6 : y(limitDb) + 8}
                  y2={label.isUnderLine ? bottomY - LABEL_ROW_PX + 2 : bottomY}
                />
                <text
                  className="label-mark"
                  x={label.x}
                  y={bottomY - 3}
                  textAnchor={label.isEnd ? "end" : "start"}
                >
                  {mark.label}
                </text>
              </g>
            );
          })}
          {days.map((day) => {
            if (day.levelDb === null) return null;
            const dayX = x(dayNumber(day.date));
            const isRight = dayX > widthPx / 2;
            return (
              <g key={day.date}>
                <line
                  className={`day-tick${day.isExpected ? " is-expected" : ""}`}
                  x1={dayX}
                  x2={dayX}
                  y1={y(day.levelDb) - tickHalf}
                  y2={y(day.levelDb) + tickHalf}
                />
                {day.note && (
                  <text
                    className="label-ink"
                    x={dayX + (isRight ? -8 : 8)}
                    y={noteY(day.levelDb)}
                    textAnchor={isRight ? "end" : "start"}
                  >
                    {day.note}
                  </text>
                )}
              </g>
            );
          })}
          {current?.levelDb != null && (
            <circle
              className="reader"
              cx={x(dayNumber(current.date))}
              cy={y(current.levelDb)}
              r={8}
            />
          )}
          {monthLabels(fromDay, toDay).map(({ date, day }) => (
            <text key={date} x={x(day)} y={heightPx + 20}>
              {formatMonth(date, locale)}
            </text>
          ))}
        </svg>
      </div>
      <figcaption>
        <span className="history-read" id={readId} aria-live="polite">
          {read}
        </span>{" "}
        {tableLink}
      </figcaption>
    </figure>
  );
}
