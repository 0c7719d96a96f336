import { useEffect, useRef, useState } from "react";
import { OCTAVE_BANDS_HZ } from "../../shared/acoustics/types";

export interface BandSeries {
  readonly key: string;
  readonly label: string;
  /** dB by band of `OCTAVE_BANDS_HZ`; null: not stated, a gap. */
  readonly valuesDb: readonly (number | null)[];
  readonly deviationDb?: readonly (number | null)[];
  /** `active`: rings on a broken line, as on the strip. */
  readonly kind?: "plain" | "active";
}

/** "63", "1k": as short as the axis is. */
export const bandLabel = (hz: number): string => (hz >= 1000 ? `${hz / 1000}k` : String(hz));

const LEFT = 34;
const RIGHT = 8;
const TOP = 14;
const BOTTOM = 24;
const TICK_HALF = 7;

/** Runs of neighbouring bands that have a value: a missing band is a gap and no line across it. */
function runs(valuesDb: readonly (number | null)[]): { band: number; db: number }[][] {
  const found: { band: number; db: number }[][] = [[]];
  valuesDb.forEach((db, band) => {
    if (db === null) found.push([]);
    else found.at(-1)?.push({ band, db });
  });
  return found.filter((run) => run.length > 0);
}

/**
 * Values by octave band as ticks on a thin line, on one scale that is never fitted to them. Attenuation falls downward,
 * levels rise. Drawn for the eye; the table beside it says the same.
 */
export function BandPicture({
  title,
  series,
  lowDb,
  highDb,
  isDownward = false,
  heightPx = 210,
}: {
  title: string;
  series: readonly BandSeries[];
  lowDb: number;
  highDb: number;
  isDownward?: boolean;
  heightPx?: number;
}) {
  const frame = useRef<HTMLDivElement>(null);
  const [widthPx, setWidthPx] = useState(460);
  useEffect(() => {
    const element = frame.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(([entry]) => {
      if (entry && entry.contentRect.width > 0) setWidthPx(Math.round(entry.contentRect.width));
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, []);

  const all = series.flatMap(({ valuesDb, deviationDb }) =>
    valuesDb.flatMap((db, band) => {
      const spread = deviationDb?.[band] ?? 0;
      return db === null ? [] : [db - spread, db + spread];
    }),
  );
  // What lies beyond the frame widens it by whole tens, so that nothing is cut off.
  const bottomDb = Math.min(lowDb, ...all.map((db) => Math.floor(db / 10) * 10));
  const topDb = Math.max(highDb, ...all.map((db) => Math.ceil(db / 10) * 10));
  const perDb = (heightPx - TOP - BOTTOM) / (topDb - bottomDb);
  const y = (db: number) => TOP + (isDownward ? db - bottomDb : topDb - db) * perDb;
  const step = (widthPx - LEFT - RIGHT) / OCTAVE_BANDS_HZ.length;
  const x = (band: number) => LEFT + (band + 0.5) * step;
  const guides = Array.from(
    { length: Math.round((topDb - bottomDb) / 10) + 1 },
    (_, index) => bottomDb + index * 10,
  );
  const everySecond = guides.length > 7;

  return (
    <div className="band-picture" ref={frame}>
      <svg width={widthPx} height={heightPx} role="img" aria-label={title}>
        {guides.map((db, index) => (
          <g key={db}>
            <line
              className={db === 0 ? "band-zero" : "band-guide"}
              x1={LEFT}
              x2={widthPx - RIGHT}
              y1={Math.round(y(db)) + 0.5}
              y2={Math.round(y(db)) + 0.5}
            />
            {(!everySecond || index % 2 === 0) && (
              <text x={LEFT - 8} y={y(db) + 4} textAnchor="end">
                {db < 0 ? `−${-db}` : db}
              </text>
            )}
          </g>
        ))}
        {OCTAVE_BANDS_HZ.map((hz, band) => (
          <text key={hz} x={x(band)} y={heightPx - 6} textAnchor="middle">
            {bandLabel(hz)}
          </text>
        ))}
        {series.map(({ key, valuesDb, deviationDb, kind = "plain" }) => (
          <g key={key} className={`band-series is-${kind}`}>
            {runs(valuesDb).map((run) => (
              <polyline
                key={run[0]?.band}
                points={run.map(({ band, db }) => `${x(band)},${y(db)}`).join(" ")}
              />
            ))}
            {valuesDb.map((db, band) => {
              if (db === null) return null;
              const spread = deviationDb?.[band] ?? null;
              const hz = OCTAVE_BANDS_HZ[band];
              return (
                <g key={hz}>
                  {spread !== null && spread > 0 && (
                    <path
                      className="band-whisker"
                      d={`M${x(band)} ${y(db - spread)}V${y(db + spread)}M${x(band) - 3} ${y(db - spread)}h6M${x(band) - 3} ${y(db + spread)}h6`}
                    />
                  )}
                  {kind === "active" ? (
                    <circle className="band-ring" cx={x(band)} cy={y(db)} r="3" />
                  ) : (
                    <path
                      className="band-tick"
                      d={`M${x(band) - TICK_HALF} ${y(db)}h${2 * TICK_HALF}`}
                    />
                  )}
                </g>
              );
            })}
          </g>
        ))}
      </svg>
    </div>
  );
}
