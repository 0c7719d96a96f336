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
/** Least width of the level scale, dB: samples that hardly differ stay a bundle. */
const LEAST_SPAN_DB = 5;
/** Least distance of two numbers under the level scale. */
const LABEL_PX = 40;
const STEPS_DB: readonly number[] = [1, 2, 5, 10, 20];

/**
 * The level scale: of the samples, and of what lies no further than half their span from them. A limit far away would
 * press them into a line; it stands at the edge.
 */
export function plotScale(
  samplesDb: readonly number[],
  othersDb: readonly number[],
): { lowDb: number; highDb: number } {
  const least = Math.min(...samplesDb);
  const most = Math.max(...samplesDb);
  const span = Math.max(LEAST_SPAN_DB, most - least);
  const near = othersDb.filter(
    (levelDb) => levelDb >= least - span / 2 && levelDb <= most + span / 2,
  );
  const middle = (least + most) / 2;
  const lowDb = Math.floor(Math.min(middle - span / 2, ...near) - 0.5);
  const highDb = Math.ceil(Math.max(middle + span / 2, ...near) + 0.5);
  return { lowDb, highDb };
}

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
  const limits = exceedances.map(({ levelDb }) => levelDb);
  const { lowDb, highDb } = plotScale(
    plot.map(({ levelDb }) => levelDb),
    [...limits, ...(toleranceLimitDb === null ? [] : [toleranceLimitDb])],
  );
  const below = limits.filter((levelDb) => levelDb < lowDb);
  const within = limits.filter((levelDb) => levelDb >= lowDb && levelDb <= highDb);
  const above = limits.filter((levelDb) => levelDb > highDb);
  const words = (levels: readonly number[]) =>
    levels.map((levelDb) => formatLimit(levelDb, locale)).join(", ");
  const lowZ = Math.min(-2.3263, ...plot.map(({ z }) => z)) - MARGIN_Z;
  const highZ = Math.max(2.3263, ...plot.map(({ z }) => z)) + MARGIN_Z;
  const perDb = (widthPx - LEFT - RIGHT) / (highDb - lowDb);
  const x = (levelDb: number) => LEFT + (levelDb - lowDb) * perDb;
  const y = (z: number) => TOP + ((highZ - z) / (highZ - lowZ)) * (HEIGHT - TOP - BOTTOM);
  const step = STEPS_DB.find((one) => one * perDb >= LABEL_PX) ?? 20;
  const grid = Array.from({ length: highDb - lowDb + 1 }, (_, index) => lowDb + index).filter(
    (levelDb) => levelDb % step === 0,
  );
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
          {below.length > 0 && (
            <g>
              <path className="plot-far" d={chevrons(LEFT + 1, -1)} />
              <text className="label-ink" x={LEFT + 16} y={TOP - 7}>
                {words(below)}
              </text>
            </g>
          )}
          {above.length > 0 && (
            <g>
              <path className="plot-far" d={chevrons(widthPx - RIGHT - 1, 1)} />
              <text className="label-ink" x={widthPx - RIGHT - 16} y={TOP - 7} textAnchor="end">
                {words(above)}
              </text>
            </g>
          )}
          {within.map((levelDb) => (
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
            <ToleranceWhisker
              fromX={Math.min(x(meanDb + 1.6449 * sdDb), widthPx - RIGHT)}
              toX={toleranceLimitDb <= highDb ? x(toleranceLimitDb) : null}
              edgeX={widthPx - RIGHT}
              y={y(1.6449)}
              words={formatLevel(toleranceLimitDb, locale)}
            />
          )}
        </svg>
        <p className="picture-legend">
          {i18n.t(
            "Ticks: samples by rising level, dB. Line: the normal distribution fitted to them. Whisker: from the 95 % point to the tolerance limit. Uprights: action values and limits, at the edge those further away.",
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

/** A double chevron at the head of the frame that points out of it: what is meant lies further that way. */
function chevrons(x: number, direction: -1 | 1): string {
  return [0, 5]
    .map(
      (inset) =>
        `M${x - direction * (inset + 5)} ${TOP - 16}l${direction * 5} 5l${-direction * 5} 5`,
    )
    .join("");
}

/** From the 95 % point to the tolerance limit, capped; past the frame it ends in a chevron and says its number. */
function ToleranceWhisker({
  fromX,
  toX,
  edgeX,
  y,
  words,
}: {
  fromX: number;
  toX: number | null;
  edgeX: number;
  y: number;
  words: string;
}) {
  if (toX !== null) return <path className="plot-bound" d={`M${fromX} ${y}H${toX}m0 -4v8`} />;
  return (
    <g>
      <path
        className="plot-bound"
        d={`M${fromX} ${y}H${edgeX}M${edgeX - 10} ${y - 5}l5 5l-5 5M${edgeX - 5} ${y - 5}l5 5l-5 5`}
      />
      <text className="label-ink" x={edgeX} y={y - 9} textAnchor="end">
        {words}
      </text>
    </g>
  );
}
