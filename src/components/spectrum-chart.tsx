import { useLingui } from "@lingui/react";
import { useEffect, useRef, useState } from "react";
import { formatLevel } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";
import { bandLabel } from "./band-picture";

export interface BandLevel {
  readonly frequencyHz: number;
  readonly levelDb: number | null;
}

const LEFT = 34;
const RIGHT = 4;
const TOP = 20;
const BOTTOM = 24;
const HEIGHT = 220;
/** Place of 25 Hz among the third-octaves, which stand at 10·lg f. */
const FIRST = 14;
const COUNT = 30;
/** The scale reaches at least so far below the highest band; what lies under it is a foot only. */
const SPAN_DB = 50;
/** Narrower than that, an octave has no room for its figure. */
const FIGURE_PX = 38;

const place = (hz: number) => Math.round(10 * Math.log10(hz)) - FIRST;

/**
 * A sound's spectrum: an upright line for each third-octave, a tick with its figure over the three of each octave. On one
 * scale, that is widened by whole tens where a level lies beyond it. Drawn for the eye; a table says the same.
 */
export function SpectrumChart({
  title,
  octaves,
  thirds,
  lowDb,
  highDb,
}: {
  title: string;
  octaves: readonly BandLevel[];
  thirds: readonly BandLevel[];
  lowDb: number;
  highDb: number;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const frame = useRef<HTMLDivElement>(null);
  const [widthPx, setWidthPx] = useState(560);
  useEffect(() => {
    const element = frame.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry && entry.contentRect.width > 0) setWidthPx(Math.round(entry.contentRect.width));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);

  const all = [...octaves, ...thirds].flatMap(({ levelDb }) => (levelDb === null ? [] : [levelDb]));
  const topDb = Math.max(highDb, ...all.map((db) => Math.ceil(db / 10) * 10));
  const bottomDb =
    all.length === 0 ? lowDb : Math.min(lowDb, Math.floor((Math.max(...all) - SPAN_DB) / 10) * 10);
  const perDb = (HEIGHT - TOP - BOTTOM) / (topDb - bottomDb);
  const foot = HEIGHT - BOTTOM;
  const y = (db: number) => Math.min(foot - 2, TOP + (topDb - db) * perDb);
  const step = (widthPx - LEFT - RIGHT) / COUNT;
  const x = (hz: number) => LEFT + (place(hz) + 0.5) * step;
  const guides = Array.from(
    { length: Math.round((topDb - bottomDb) / 20) + 1 },
    (_, index) => bottomDb + index * 20,
  ).filter((db) => db <= topDb);
  const hasRoom = 3 * step >= FIGURE_PX;
  return (
    <div className="band-picture spectrum-chart" ref={frame}>
      <svg width={widthPx} height={HEIGHT} role="img" aria-label={title}>
        {guides.map((db) => (
          <g key={db}>
            <line
              className={db === bottomDb ? "band-zero" : "band-guide"}
              x1={LEFT}
              x2={widthPx - RIGHT}
              y1={Math.round(TOP + (topDb - db) * perDb) + 0.5}
              y2={Math.round(TOP + (topDb - db) * perDb) + 0.5}
            />
            <text x={LEFT - 8} y={TOP + (topDb - db) * perDb + 4} textAnchor="end">
              {db < 0 ? `−${-db}` : db}
            </text>
          </g>
        ))}
        {thirds.map(({ frequencyHz, levelDb }) =>
          levelDb === null ? null : (
            <path
              key={frequencyHz}
              className="spectrum-third"
              strokeWidth={Math.max(2, Math.min(6, step * 0.42))}
              d={`M${x(frequencyHz)} ${foot}V${y(levelDb)}`}
            />
          ),
        )}
        {octaves.map(({ frequencyHz, levelDb }, index) => (
          <g key={frequencyHz}>
            {(hasRoom || index % 2 === 1) && (
              <text x={x(frequencyHz)} y={HEIGHT - 6} textAnchor="middle">
                {bandLabel(frequencyHz)}
              </text>
            )}
            {levelDb !== null && (
              <>
                <path
                  className="band-tick"
                  d={`M${x(frequencyHz) - 1.4 * step} ${y(levelDb)}h${2.8 * step}`}
                />
                {hasRoom && (
                  <text
                    className="spectrum-figure"
                    x={x(frequencyHz)}
                    y={y(levelDb) - 5}
                    textAnchor="middle"
                  >
                    {formatLevel(levelDb, locale)}
                  </text>
                )}
              </>
            )}
          </g>
        ))}
      </svg>
      <p className="picture-legend">
        <span>
          {i18n.t("Upright lines: third-octaves. Ticks: octaves. Unweighted; Hz beneath.")}
        </span>
      </p>
    </div>
  );
}
