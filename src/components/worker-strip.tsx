import { useLingui } from "@lingui/react";
import { formatWholeLevel } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";
import { type StripGeometry, stripGeometry } from "./drop-strip-geometry";
import { barPath, Halos, Limits, Marks } from "./drop-strip-marks";
import { type StripWords, stripLabel } from "./strip-label";

const WIDTH_PX = 350;
const K = 2.1;
const LINE = 20;
/** Of the strip's words, on the wide side: they are placed before they are drawn. */
const CHARACTER = 9;

/** The strip as an arrow in whole decibels: on the worker’s page, where nothing else of a strip is loaded. */
export function WorkerStrip(props: StripWords) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const geometry = stripGeometry(props, { widthPx: WIDTH_PX, k: K });
  const { bar, outer, inner, full, limits, boxHeight, width, dotted, chevrons } = geometry;
  const limit = limits[0];
  const aroundWords = {
    lower: i18n.t("around you at least"),
    upper: i18n.t("around you at most"),
    exact: i18n.t("around you"),
  }[props.outsideBound];
  const aroundLevel = formatWholeLevel(props.outsideDb, locale);
  const around =
    outer && props.outsideDb !== null
      ? placeAround(outer.x, limit?.x ?? null, width, `${aroundWords} ${aroundLevel}`)
      : null;
  const above = around?.isAbove ? 26 + LINE : 26;
  const below = 28;
  const innerMark = inner ?? full;
  return (
    <svg
      className="strip is-worker w-full"
      viewBox={`0 ${-above} ${width} ${boxHeight + above + below}`}
      style={{ maxWidth: width }}
      role="img"
      aria-label={stripLabel(i18n, props)}
    >
      {bar && <WorkerArrow bar={bar} limitX={limit?.x ?? null} />}
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
      {around && (
        <text
          className="strip-worker-text"
          x={around.x}
          y={around.isAbove ? -8 - LINE : -8}
          textAnchor={around.isLeft ? "end" : "start"}
        >
          {aroundWords} <tspan fontWeight={640}>{aroundLevel}</tspan>
        </text>
      )}
      {innerMark && props.atEarDb !== null && (
        <text className="strip-worker-text" x={Math.max(0, innerMark.x - 9)} y={boxHeight + 20}>
          <tspan fontWeight={640}>
            {formatWholeLevel(props.atEarDb, locale, props.limits[0]?.levelDb)}
          </tspan>{" "}
          {i18n.t("at your ear")}
        </text>
      )}
    </svg>
  );
}

/**
 * Where the words for the noise around stand: beside the limit's, on the side of the tick, and a line above them where
 * they have no room there.
 */
function placeAround(outerX: number, limitX: number | null, width: number, words: string) {
  const length = words.length * CHARACTER;
  if (limitX !== null && outerX < limitX)
    return { x: outerX, isLeft: true, isAbove: outerX < length };
  const x = limitX === null ? outerX - 14 : Math.max(outerX - 14, limitX + 34);
  if (x + length <= width) return { x, isLeft: false, isAbove: false };
  return { x: width, isLeft: true, isAbove: limitX !== null && width - length < limitX + 34 };
}

/** A fall towards the ear: pale as far as the limit, full from there on. */
function WorkerArrow({
  bar,
  limitX,
}: {
  bar: NonNullable<StripGeometry["bar"]>;
  limitX: number | null;
}) {
  const length = bar.outerX - bar.innerX;
  if (length <= 0) return <path className="strip-bar" d={barPath(bar)} />;
  const headLength = Math.min(6.7 * K, length);
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
