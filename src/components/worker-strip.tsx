import { useLingui } from "@lingui/react";
import { formatWholeLevel } from "../../shared/format/level";
import { useLocale } from "../lib/i18n";
import { type StripGeometry, stripGeometry } from "./drop-strip-geometry";
import { barPath, Halos, Limits, Marks } from "./drop-strip-marks";
import { type StripWords, stripLabel } from "./strip-label";

const WIDTH_PX = 350;
const K = 2.1;

/** The strip as an arrow in whole decibels: on the worker’s page, where nothing else of a strip is loaded. */
export function WorkerStrip(props: StripWords) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const geometry = stripGeometry(props, { widthPx: WIDTH_PX, k: K });
  const { bar, outer, inner, full, limits, boxHeight, width, dotted, chevrons } = geometry;
  const limit = limits[0];
  const above = 26;
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
