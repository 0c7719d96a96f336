import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatLevel, formatLimit, formatWholeLevel } from "../../shared/format/level";
import { withinSentence } from "../../shared/format/words";
import type { Locale } from "../../shared/i18n/index";
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
  type TargetBand,
  type Tick,
} from "./drop-strip-geometry";
import { verdictWord } from "./verdict";

/**
 * `row` fills its table cell, band and limit unbroken under a `StripScale`; `list` stands alone with brackets; `card`
 * writes the figures at the ticks; `worker` is an arrow in whole decibels; `print` is black only, 60 × 8 mm.
 */
export type StripVariant = "row" | "list" | "card" | "worker" | "print";

export interface DropStripProps extends StripFacts {
  readonly variant?: StripVariant;
  readonly widthPx?: number;
  readonly k?: number;
  /** Where the cells beside it say the same. */
  readonly isHidden?: boolean;
  /** The verdict without protection as the end of a sentence: "over 85". */
  readonly outsideWords?: string;
  /** The task that decides the protector's word. */
  readonly decidingTask?: string;
}

const K: Readonly<Record<StripVariant, number>> = {
  row: 1.5,
  list: 1.5,
  card: 2.1,
  worker: 2.1,
  print: 1,
};

/** What a strip says, for those who hear it. One function, so that it never says less than it shows. */
export function stripLabel(i18n: I18n, props: DropStripProps): string {
  const locale: Locale = i18n.locale === "de" ? "de" : "en";
  const level = (levelDb: number) => formatLevel(levelDb, locale);
  const sentences: string[] = [];

  if (props.atEarDb === null) sentences.push(i18n.t("At the ear not known."));
  else {
    const parts = [
      props.atEarUDb === null
        ? i18n.t("At the ear {level}", { level: level(props.atEarDb) })
        : i18n.t("At the ear {level} plus or minus {uncertainty}", {
            level: level(props.atEarDb),
            uncertainty: level(props.atEarUDb),
          }),
      ...props.limits.map((limit) => limit.label),
    ];
    if (props.isExpected) parts.push(i18n.t("expected"));
    if (props.verdict) parts.push(withinSentence(verdictWord(i18n, props.verdict), locale));
    let sentence = parts.join(", ");
    if (props.atEarActiveDb !== null)
      sentence += i18n.t("; {level} with the active part on", {
        level: level(props.atEarActiveDb),
      });
    if (props.atEarAsWorkedDb !== null)
      sentence += i18n.t("; {level} as worked", { level: level(props.atEarAsWorkedDb) });
    sentences.push(`${sentence}.`);
  }

  if (props.outsideDb === null) sentences.push(i18n.t("Without protection not known."));
  else {
    const text = level(props.outsideDb);
    const outside =
      props.outsideBound === "lower"
        ? i18n.t("Without protection at least {level}", { level: text })
        : props.outsideBound === "upper"
          ? i18n.t("Without protection at most {level}", { level: text })
          : i18n.t("Without protection {level}", { level: text });
    sentences.push(props.outsideWords ? `${outside}, ${props.outsideWords}.` : `${outside}.`);
  }

  if (props.hasProtector === "no") sentences.push(i18n.t("No protector."));
  else if (props.hasProtector === "unknown") sentences.push(i18n.t("Protector not known."));
  else if (props.word && props.whileWornDb !== null) {
    const worn = level(props.whileWornDb);
    const word = protectorSentence(i18n, props.word);
    sentences.push(
      props.decidingTask
        ? i18n.t("{word}: {level} in {task}.", { word, level: worn, task: props.decidingTask })
        : i18n.t("{word}: {level} while worn.", { word, level: worn }),
    );
  }
  return sentences.join(" ");
}

function protectorSentence(i18n: I18n, word: NonNullable<StripFacts["word"]>): string {
  switch (word) {
    case "too-little":
      return i18n.t("Protector too little");
    case "just-enough":
      return i18n.t("Protector just enough");
    case "good":
      return i18n.t("Protector good");
    case "strong-side":
      return i18n.t("Protector on the strong side");
    case "too-much":
      return i18n.t("Protector too much");
    case "enough":
      return i18n.t("Protector enough");
  }
}

export function DropStrip(props: DropStripProps) {
  const { i18n } = useLingui();
  const { variant = "row", isHidden = false } = props;
  const widthPx = props.widthPx ?? (variant === "worker" ? 350 : 200);
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
  if (variant === "worker")
    return <WorkerStrip props={props} geometry={geometry} k={k} named={named} />;

  const above = variant === "card" ? 24 : variant === "print" ? 5 : 0;
  const below = variant === "card" ? 20 : 0;
  const height = geometry.height + above + below;
  return (
    // biome-ignore lint/a11y/noSvgWithoutTitle: named by stripLabel, or hidden
    <svg
      className={`strip${variant === "print" ? " is-print" : ""}`}
      viewBox={`0 ${-above} ${widthPx} ${height}`}
      width={variant === "print" ? "60mm" : widthPx}
      height={variant === "print" ? undefined : height}
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
  return limits.map(({ x, label }) => (
    <rect key={label} className="strip-ink" x={x - 1} width={2} height="100%" />
  ));
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

const barPath = (
  bar: NonNullable<StripGeometry["bar"]>,
  fromX = bar.outerX,
  toX = bar.innerX,
  half = bar.thickness / 2,
) => {
  const yAt = (x: number) =>
    bar.outerX === bar.innerX
      ? bar.outerY
      : bar.outerY + ((x - bar.outerX) * (bar.innerY - bar.outerY)) / (bar.innerX - bar.outerX);
  return `M${fromX} ${yAt(fromX) - half}L${toX} ${yAt(toX) - half}L${toX} ${yAt(toX) + half}L${fromX} ${yAt(fromX) + half}Z`;
};

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

/** Paper beside a limit where the bar runs under it. */
function Halos({ geometry: { bar, limits } }: { geometry: StripGeometry }) {
  if (!bar) return null;
  const [from, to] = [Math.min(bar.outerX, bar.innerX), Math.max(bar.outerX, bar.innerX)];
  const top = bar.outerY - bar.thickness / 2 - 1;
  const height = bar.innerY - bar.outerY + bar.thickness + 2;
  return limits
    .filter((limit) => limit.x + 2 > from && limit.x - 2 < to)
    .map((limit) => (
      <rect
        key={limit.label}
        className="strip-halo"
        x={limit.x - 2}
        y={top}
        width={4}
        height={height}
      />
    ));
}

function Limits({ geometry: { limits, boxHeight } }: { geometry: StripGeometry }) {
  return limits.map(({ x, label }) => (
    <path
      key={label}
      className="strip-ink"
      d={`M${x - 3} 0h6v1.5h-2V${boxHeight - 1.5}h2v1.5h-6v-1.5h2V1.5h-2Z`}
    />
  ));
}

function TickMark({
  tick,
  isExpected,
  className,
}: {
  tick: Tick;
  isExpected: boolean;
  className: string;
}) {
  if (!isExpected) {
    return (
      <rect
        className={`strip-ink ${className}`}
        x={tick.x - tick.width / 2}
        y={tick.y}
        width={tick.width}
        height={tick.height}
      />
    );
  }
  return (
    <rect
      className={`strip-open ${className}`}
      x={tick.x - tick.width / 2 + 0.7}
      y={tick.y + 0.7}
      width={tick.width - 1.4}
      height={tick.height - 1.4}
    />
  );
}

function Marks({
  geometry,
  isExpected,
  caretScale = 1,
}: {
  geometry: StripGeometry;
  isExpected: boolean;
  caretScale?: number;
}) {
  const { chevrons, whiskers, dotted, link, ring, dot, outer, inner, full, caret, foot } = geometry;
  return (
    <>
      {dotted && (
        <line
          className={dotted.isUnknown ? "strip-dots" : "strip-dots is-bound"}
          x1={dotted.fromX}
          x2={dotted.toX}
          y1={dotted.y}
          y2={dotted.y}
        />
      )}
      {link && (
        <line className="strip-link" x1={link.fromX} x2={link.toX} y1={link.y} y2={link.y} />
      )}
      {ring && <circle className="strip-open" cx={ring.x} cy={ring.y} r={ring.r} />}
      {dot && <circle className="strip-ink" cx={dot.x} cy={dot.y} r={dot.r} />}
      {whiskers.map(({ fromX, toX, y }) => (
        <path
          key={y}
          className="strip-line"
          strokeWidth={1.5}
          d={`M${fromX} ${y}H${toX}M${toX} ${y - 1.9}v3.8`}
        />
      ))}
      {outer && <TickMark tick={outer} isExpected={isExpected} className="strip-outer" />}
      {inner && <TickMark tick={inner} isExpected={isExpected} className="strip-inner" />}
      {full && <TickMark tick={full} isExpected={isExpected} className="strip-inner" />}
      {chevrons.map(({ x, y, pointsTo }) => {
        const step = pointsTo === "right" ? 1 : -1;
        return (
          <path
            key={`${pointsTo}${y}`}
            className="strip-line"
            strokeWidth={1.6}
            d={[-4, 0]
              .map(
                (dx) => `M${x + (dx - 1) * step} ${y - 4.5}l${4.5 * step} 4.5l${-4.5 * step} 4.5`,
              )
              .join("")}
          />
        );
      })}
      {foot && caret && <Foot foot={foot} caretY={caret.y} scale={caretScale} />}
      {caret && <Caret x={caret.x} y={caret.y} scale={caretScale} isExpected={isExpected} />}
    </>
  );
}

function Caret({
  x,
  y,
  scale,
  isExpected,
}: {
  x: number;
  y: number;
  scale: number;
  isExpected: boolean;
}) {
  const half = 3.3 * scale;
  return (
    <path
      className={isExpected ? "strip-open" : "strip-caret"}
      d={`M${x} ${y}L${x + half} ${y + 4.4 * scale}H${x - half}Z`}
    />
  );
}

function Foot({
  foot,
  caretY,
  scale,
}: {
  foot: NonNullable<StripGeometry["foot"]>;
  caretY: number;
  scale: number;
}) {
  const base = caretY + 4.4 * scale - 0.8;
  if (foot.kind === "too-little") {
    return (
      <rect
        className="strip-ink"
        x={Math.min(foot.fromX, foot.toX)}
        y={base - 2.2 * scale}
        width={Math.abs(foot.toX - foot.fromX)}
        height={2.2 * scale}
      />
    );
  }
  const height = 3.2 * scale;
  // 35° from the upright.
  const lean = height * 0.7;
  const strokes: string[] = [];
  for (let x = foot.toX + 5; x < foot.fromX; x += 3.4)
    strokes.push(`M${x} ${base}l${lean} ${-height}`);
  return <path className="strip-line" strokeWidth={1.5} d={strokes.join("")} />;
}

/** Half the width of a Mono figure of 15 px, px. */
const halfFigure = (text: string) => (text.length * 8.8) / 2;

function CardFigures({ props, geometry }: { props: DropStripProps; geometry: StripGeometry }) {
  const locale = useLocale();
  const { outer, inner, full, ring, boxHeight } = geometry;
  const below = boxHeight + 19;
  const atEar = formatLevel(props.atEarDb, locale);
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

function WorkerStrip({
  props,
  geometry,
  k,
  named,
}: {
  props: DropStripProps;
  geometry: StripGeometry;
  k: number;
  named: object;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { bar, outer, inner, full, limits, boxHeight, width, dotted, chevrons } = geometry;
  const limit = limits[0];
  const above = 26;
  const below = 28;
  const innerMark = inner ?? full;
  return (
    // biome-ignore lint/a11y/noSvgWithoutTitle: named by stripLabel, or hidden
    <svg
      className="strip is-worker w-full"
      viewBox={`0 ${-above} ${width} ${boxHeight + above + below}`}
      style={{ maxWidth: width }}
      {...named}
    >
      {bar && <WorkerArrow bar={bar} limitX={limit?.x ?? null} k={k} />}
      <Halos geometry={geometry} />
      <Limits geometry={{ ...geometry, limits: limit ? [limit] : [] }} />
      <Marks
        geometry={{
          ...geometry,
          whiskers: [],
          caret: null,
          foot: null,
          ring: null,
          dot: null,
          link: null,
          dotted,
          chevrons,
        }}
        isExpected={props.isExpected}
      />
      {limit && (
        <text
          className="strip-worker-text"
          x={limit.x}
          y={-8}
          textAnchor={outer && outer.x < limit.x ? "start" : "end"}
          dx={outer && outer.x < limit.x ? -3 : 19}
        >
          {limit.label}
        </text>
      )}
      {outer && props.outsideDb !== null && (
        <text
          className="strip-worker-text"
          x={limit && outer.x >= limit.x ? Math.max(outer.x - 14, limit.x + 34) : outer.x}
          y={-8}
          textAnchor={limit && outer.x < limit.x ? "end" : "start"}
        >
          {i18n.t("around you")}{" "}
          <tspan fontWeight={640}>{formatWholeLevel(props.outsideDb, locale)}</tspan>
        </text>
      )}
      {innerMark && props.atEarDb !== null && (
        <text className="strip-worker-text" x={Math.max(0, innerMark.x - 9)} y={boxHeight + 20}>
          <tspan fontWeight={640}>{formatWholeLevel(props.atEarDb, locale)}</tspan>{" "}
          {i18n.t("at your ear")}
        </text>
      )}
    </svg>
  );
}

/** A fall towards the ear: pale as far as the limit, full from there on. */
function WorkerArrow({
  bar,
  limitX,
  k,
}: {
  bar: NonNullable<StripGeometry["bar"]>;
  limitX: number | null;
  k: number;
}) {
  const length = bar.outerX - bar.innerX;
  if (length <= 0) return <path className="strip-bar" d={barPath(bar)} />;
  const headLength = Math.min(6.7 * k, length);
  const neckX = bar.innerX + headLength;
  const slope = (bar.outerY - bar.innerY) / length;
  const yAt = (x: number) => bar.innerY + (x - bar.innerX) * slope;
  const half = bar.thickness / 2;
  const headHalf = (6.5 * headLength) / 6.7;
  const splitX = limitX === null ? bar.outerX : Math.max(neckX, Math.min(bar.outerX, limitX));
  const isPale = limitX !== null && bar.innerX > limitX;
  const shaftX = isPale ? bar.outerX : splitX;
  return (
    <>
      {!isPale && splitX < bar.outerX && (
        <path className="strip-bar-pale" d={barPath(bar, bar.outerX, splitX)} />
      )}
      <path
        className={isPale ? "strip-bar-pale" : "strip-bar"}
        d={`M${shaftX} ${yAt(shaftX) - half}L${neckX} ${yAt(neckX) - half}L${neckX} ${yAt(neckX) - headHalf}L${bar.innerX} ${bar.innerY}L${neckX} ${yAt(neckX) + headHalf}L${neckX} ${yAt(neckX) + half}L${shaftX} ${yAt(shaftX) + half}Z`}
      />
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
    <svg className="strip strip-fill" width={widthPx} aria-hidden="true">
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
