import { useLingui } from "@lingui/react";
import { useEffect, useRef, useState } from "react";
import { formatShare } from "../../../shared/format/dose";
import { formatLevel, formatLimit } from "../../../shared/format/level";
import type { GroupStatistics } from "../../../shared/schemas/group";
import { DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";

type Point = GroupStatistics["plot"][number];

/** Shares that the upright scale names, with their places on a normal scale. */
const SHARES: readonly (readonly [sharePct: number, z: number])[] = [
  [1, -2.3263],
  [5, -1.6449],
  [20, -0.8416],
  [50, 0],
  [80, 0.8416],
  [95, 1.6449],
  [99, 2.3263],
];
const [LEFT, RIGHT, TOP, BOTTOM] = [44, 16, 22, 26];
const HEIGHT = 300;
const MARGIN_Z = 0.25;

/**
 * The samples on a normal scale: on the line, where they are normally distributed. Limits are uprights, the tolerance
 * limit a capped whisker. Drawn for the eye; the table behind it says the same.
 */
export function ProbabilityPlot({ statistics }: { statistics: GroupStatistics }) {
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
  const { plot, meanDb, sdDb, toleranceLimitDb, exceedances } = statistics;
  const levels = [
    ...plot.map(({ levelDb }) => levelDb),
    ...exceedances.map(({ levelDb }) => levelDb),
    ...(toleranceLimitDb === null ? [] : [toleranceLimitDb]),
  ];
  const lowDb = Math.floor((Math.min(...levels) - 1) / 5) * 5;
  const highDb = Math.ceil((Math.max(...levels) + 1) / 5) * 5;
  const lowZ = Math.min(-2.3263, ...plot.map(({ z }) => z)) - MARGIN_Z;
  const highZ = Math.max(2.3263, ...plot.map(({ z }) => z)) + MARGIN_Z;
  const perDb = (widthPx - LEFT - RIGHT) / (highDb - lowDb);
  const x = (levelDb: number) => LEFT + (levelDb - lowDb) * perDb;
  const y = (z: number) => TOP + ((highZ - z) / (highZ - lowZ)) * (HEIGHT - TOP - BOTTOM);
  const step = perDb * 5 < 34 ? 10 : 5;
  const grid = Array.from(
    { length: Math.floor((highDb - lowDb) / 5) + 1 },
    (_, index) => lowDb + 5 * index,
  ).filter((levelDb) => levelDb % step === 0);
  const hasFit = meanDb !== null && sdDb !== null && sdDb > 0;
  // The line ends where the frame does.
  const fitFrom = hasFit ? Math.max(lowZ, (lowDb - meanDb) / sdDb) : 0;
  const fitTo = hasFit ? Math.min(highZ, (highDb - meanDb) / sdDb) : 0;
  const key = ({ workerId, levelDb, share }: Point) => `${workerId} ${levelDb} ${share}`;
  return (
    <div className="plot">
      <div className="plot-picture" ref={frame}>
        <svg
          height={HEIGHT}
          viewBox={`0 0 ${widthPx} ${HEIGHT}`}
          role="img"
          aria-label={i18n.t("Probability plot; the table behind it says the same")}
        >
          {SHARES.map(([sharePct, z]) => (
            <g key={sharePct}>
              <line className="plot-guide" x1={LEFT} x2={widthPx - RIGHT} y1={y(z)} y2={y(z)} />
              <text x={LEFT - 6} y={y(z) + 4} textAnchor="end">
                {formatShare(sharePct, locale)}
              </text>
            </g>
          ))}
          {grid.map((levelDb) => (
            <text key={levelDb} x={x(levelDb)} y={HEIGHT - 6} textAnchor="middle">
              {formatLimit(levelDb, locale)}
            </text>
          ))}
          {hasFit && (
            <line
              className="plot-fit"
              x1={x(meanDb + fitFrom * sdDb)}
              x2={x(meanDb + fitTo * sdDb)}
              y1={y(fitFrom)}
              y2={y(fitTo)}
            />
          )}
          {exceedances.map(({ levelDb }) => (
            <g key={levelDb}>
              <line
                className="plot-limit"
                x1={x(levelDb)}
                x2={x(levelDb)}
                y1={TOP}
                y2={HEIGHT - BOTTOM}
              />
              <text className="label-ink" x={x(levelDb)} y={TOP - 7} textAnchor="middle">
                {formatLimit(levelDb, locale)}
              </text>
            </g>
          ))}
          {plot.map((point) => (
            <line
              key={key(point)}
              className="plot-tick"
              x1={x(point.levelDb)}
              x2={x(point.levelDb)}
              y1={y(point.z) - 5}
              y2={y(point.z) + 5}
            />
          ))}
          {hasFit && toleranceLimitDb !== null && (
            <path
              className="plot-bound"
              d={`M${x(meanDb + 1.6449 * sdDb)} ${y(1.6449)}H${x(toleranceLimitDb)}m0 -4v8`}
            />
          )}
        </svg>
        <p className="picture-legend">
          {i18n.t(
            "Ticks: samples by rising level, dB. Line: the normal distribution fitted to them. Whisker: from the 95 % point to the tolerance limit. Uprights: action values and limits.",
          )}
        </p>
      </div>
      <details className="plot-table">
        <summary className="link">{i18n.t("The same as a table")}</summary>
        <DataTable<Point>
          caption={i18n.t("Samples by rising level")}
          rows={plot}
          rowKey={key}
          columns={[
            {
              id: "worker",
              head: i18n.t("Worker"),
              isRowHead: true,
              cell: ({ workerName }) => workerName ?? "–",
            },
            {
              id: "level",
              head: i18n.t("Level"),
              unit: "dB",
              kind: "figure",
              cell: ({ levelDb }) => formatLevel(levelDb, locale),
            },
            {
              id: "share",
              head: i18n.t("Below"),
              kind: "figure",
              cell: ({ share }) => formatShare(100 * share, locale),
            },
          ]}
        />
      </details>
    </div>
  );
}
