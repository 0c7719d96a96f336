import { useLingui } from "@lingui/react";
import type { TargetBand } from "../../shared/acoustics/protection/adequacy";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";
import {
  BAR_THICKNESS,
  levelX,
  STRIP_FROM_DB,
  STRIP_TO_DB,
  type StripFacts,
  type StripGeometry,
  type StripLimit,
  stripGeometry,
} from "./drop-strip-geometry";
import { barPath, Halos, Limits, Marks } from "./drop-strip-marks";
import { type StripWords, stripLabel } from "./strip-label";

/**
 * `row` fills its table cell, band and limit unbroken under a `StripScale`; `list` stands alone with brackets; `card`
 * writes the figures at the ticks. The worker’s arrow is `WorkerStrip`, paper's strip server/reports/strip-picture.ts.
 */
export type StripVariant = "row" | "list" | "card";

export interface DropStripProps extends StripWords {
  readonly variant?: StripVariant;
  readonly widthPx?: number;
  readonly k?: number;
  /** Where the cells beside it say the same. */
  readonly isHidden?: boolean;
}

const K: Readonly<Record<StripVariant, number>> = {
  row: 1.5,
  list: 1.5,
  card: 2.1,
};

export function DropStrip(props: DropStripProps) {
  const { i18n } = useLingui();
  const { variant = "row", isHidden = false } = props;
  const widthPx = props.widthPx ?? 200;
  const k = props.k ?? K[variant];
  const geometry = stripGeometry(props, { widthPx, k });
  const label = isHidden ? undefined : stripLabel(i18n, props);
  const named = {
    role: isHidden ? undefined : "img",
    "aria-label": label,
    "aria-hidden": isHidden || undefined,
  } as const;

  if (variant === "row") {
    return (
      // biome-ignore lint/a11y/noSvgWithoutTitle: named by stripLabel, or hidden
      <svg className="strip strip-fill" width={widthPx} {...named}>
        <UnbrokenBand geometry={geometry} />
        <svg y="50%" overflow="visible" aria-hidden="true">
          <g transform={`translate(0 ${Math.round(-geometry.height / 2)})`}>
            <Bar geometry={geometry} isExpected={props.isExpected} />
            <Halos geometry={geometry} />
          </g>
        </svg>
        <UnbrokenLimits geometry={geometry} />
        <svg y="50%" overflow="visible" aria-hidden="true">
          <g transform={`translate(0 ${Math.round(-geometry.height / 2)})`}>
            <Marks geometry={geometry} isExpected={props.isExpected} />
          </g>
        </svg>
      </svg>
    );
  }

  const above = variant === "card" ? 24 : 0;
  const below = variant === "card" ? 20 : 0;
  const height = geometry.height + above + below;
  return (
    // biome-ignore lint/a11y/noSvgWithoutTitle: named by stripLabel, or hidden
    <svg
      className="strip"
      viewBox={`0 ${-above} ${widthPx} ${height}`}
      width={widthPx}
      height={height}
      {...named}
    >
      <Band geometry={geometry} />
      <Bar geometry={geometry} isExpected={props.isExpected} />
      <Halos geometry={geometry} />
      <Limits geometry={geometry} />
      <Marks
        geometry={geometry}
        isExpected={props.isExpected}
        caretScale={variant === "list" ? k : 1}
      />
      {variant === "card" && <CardFigures props={props} geometry={geometry} />}
    </svg>
  );
}

function UnbrokenBand({ geometry: { band } }: { geometry: StripGeometry }) {
  if (!band) return null;
  return (
    <>
      <rect className="strip-v1" x={band.lowX} width={band.highX - band.lowX} height="100%" />
      <rect
        className="strip-v2"
        x={band.goodLowX}
        width={band.goodHighX - band.goodLowX}
        height="100%"
      />
      <line className="strip-edge" x1={band.lowX} x2={band.lowX} y2="100%" />
      <line className="strip-edge" x1={band.highX} x2={band.highX} y2="100%" />
    </>
  );
}

function UnbrokenLimits({ geometry: { limits } }: { geometry: StripGeometry }) {
  return limits.map(({ x, label, isTarget }) =>
    isTarget ? (
      <line key={label} className="strip-edge" x1={x + 0.5} x2={x + 0.5} y2="100%" />
    ) : (
      <rect key={label} className="strip-ink" x={x - 1} width={2} height="100%" />
    ),
  );
}

function Band({ geometry: { band, boxHeight } }: { geometry: StripGeometry }) {
  if (!band) return null;
  const bottom = boxHeight - 0.5;
  return (
    <>
      <rect className="strip-v1" x={band.lowX} width={band.highX - band.lowX} height={boxHeight} />
      <rect
        className="strip-v2"
        x={band.goodLowX}
        width={band.goodHighX - band.goodLowX}
        height={boxHeight}
      />
      <path
        className="strip-edge"
        d={`M${band.lowX + 4} .5h-4V${bottom}h4M${band.highX - 4} .5h4V${bottom}h-4`}
      />
      <path className="strip-good-bracket" d={`M${band.goodLowX} -1v-2.6H${band.goodHighX}v2.6`} />
    </>
  );
}

/** Ink and paper of the ruled bar, in units of the box: a line every 1.9. */
const RULED = [0.9, 1];

function Bar({ geometry: { bar }, isExpected }: { geometry: StripGeometry; isExpected: boolean }) {
  if (!bar) return null;
  const half = bar.thickness / 2;
  if (isExpected) {
    return (
      <path
        className="strip-bar-edge"
        d={[-half, half]
          .map((dy) => `M${bar.outerX} ${bar.outerY + dy}L${bar.innerX} ${bar.innerY + dy}`)
          .join("")}
      />
    );
  }
  const length = bar.outerX - bar.innerX;
  const lean = length === 0 ? 0 : (Math.atan2(bar.outerY - bar.innerY, length) * 180) / Math.PI;
  return (
    <>
      <path className="strip-bar" d={barPath(bar)} />
      {/* A level line, sheared: its dashes stay upright. */}
      <line
        className="strip-bar-ruled"
        x2={length}
        strokeWidth={bar.thickness}
        strokeDasharray={RULED.map((part) => (part * bar.thickness) / BAR_THICKNESS).join(" ")}
        transform={`translate(${bar.innerX} ${bar.innerY}) skewY(${lean})`}
      />
    </>
  );
}

/** Half the width of a Mono figure of 15 px, px. */
const halfFigure = (text: string) => (text.length * 8.8) / 2;

function CardFigures({ props, geometry }: { props: DropStripProps; geometry: StripGeometry }) {
  const locale = useLocale();
  const { outer, inner, full, ring, boxHeight } = geometry;
  const below = boxHeight + 19;
  const atEar = formatLevel(props.atEarDb, locale, props.atEarBound);
  const active = formatLevel(props.atEarActiveDb, locale);
  const innerX = inner?.x ?? full?.x ?? null;
  // The two figures beneath must not touch; the one that does not count gives way.
  const ringX =
    ring && innerX !== null && ring.x < innerX
      ? Math.min(ring.x, innerX - halfFigure(atEar) - halfFigure(active) - 10)
      : ring?.x;
  return (
    <>
      {outer && (
        <text className="strip-figure" x={outer.x} y={-8} textAnchor="middle">
          {formatLevel(props.outsideDb, locale, props.outsideBound)}
        </text>
      )}
      {innerX !== null && (
        <text className="strip-figure is-bold" x={innerX} y={below} textAnchor="middle">
          {atEar}
        </text>
      )}
      {ringX !== undefined && (
        <text className="strip-figure" x={ringX} y={below} textAnchor="middle">
          {active}
        </text>
      )}
    </>
  );
}

/** Band and limit alone: what runs on through a heading row and stands while the figures are loading. */
export function StripGround({
  limits,
  targetBand,
  widthPx = 200,
}: {
  limits: readonly StripLimit[];
  targetBand: TargetBand | null;
  widthPx?: number;
}) {
  const geometry = levelScale(limits, targetBand, widthPx);
  return (
    <svg className="strip strip-fill is-ground" width={widthPx} aria-hidden="true">
      <UnbrokenBand geometry={geometry} />
      <UnbrokenLimits geometry={geometry} />
    </svg>
  );
}

const SCALE_DB = Array.from({ length: 13 }, (_, step) => STRIP_FROM_DB + step * 5).filter(
  (levelDb) => levelDb <= STRIP_TO_DB,
);

/** The head of a strip column: the scale, the target as a bracket, the limits by name. */
export function StripScale({
  limits,
  targetBand,
  widthPx = 200,
}: {
  limits: readonly StripLimit[];
  targetBand: TargetBand | null;
  widthPx?: number;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const scale = levelScale(limits, targetBand, widthPx);
  // A figure is about 15 px wide, a three-digit one 23: under 190 px every second one has to go.
  const isNarrow = widthPx < 190;
  return (
    <svg
      className="strip-scale"
      width={widthPx}
      height={44}
      viewBox={`0 -44 ${widthPx} 44`}
      role="img"
      aria-label={i18n.t("Scale from 60 to 120 dB")}
    >
      {scale.band && (
        <>
          <text className="strip-scale-target" x={scale.band.lowX} y={-28.5}>
            {i18n.t("target")}
          </text>
          <path
            className="strip-edge"
            style={{ strokeWidth: 1.4 }}
            d={`M${scale.band.lowX} -20.5v-4.5H${scale.band.highX}v4.5`}
          />
        </>
      )}
      {scale.limits.map(({ x, label }, index) => (
        <g key={label}>
          {index === 0 && (
            <text className="strip-scale-limit" x={x - 1} y={-28.5}>
              {label}
            </text>
          )}
          <path className="strip-ink" d={`M${x - 3} -25.6h6v1.8h-2v3.3h-2v-3.3h-2Z`} />
        </g>
      ))}
      {SCALE_DB.map((levelDb) => {
        const isMajor = levelDb % 10 === 0;
        const x = Math.round(levelX(levelDb, widthPx) - 0.5) + 0.5;
        return (
          <g key={levelDb}>
            <line className="strip-scale-tick" x1={x} x2={x} y1={isMajor ? -5 : -3.4} y2={0} />
            {isMajor && !(isNarrow && levelDb % 20 !== 0) && (
              <text className="strip-scale-figure" x={x} y={-8} textAnchor="middle">
                {formatLimit(levelDb, locale)}
              </text>
            )}
          </g>
        );
      })}
    </svg>
  );
}

function levelScale(limits: readonly StripLimit[], targetBand: TargetBand | null, widthPx: number) {
  const nothing: StripFacts = {
    outsideDb: null,
    outsideUDb: null,
    outsideBound: "exact",
    atEarDb: null,
    atEarBound: "exact",
    atEarUDb: null,
    atEarActiveDb: null,
    atEarAsWorkedDb: null,
    whileWornDb: null,
    isExpected: false,
    hasProtector: "unknown",
    word: null,
    verdict: null,
    limits,
    targetBand,
  };
  return stripGeometry(nothing, { widthPx, k: 1 });
}
