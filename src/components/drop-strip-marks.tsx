import type { StripGeometry, Tick } from "./drop-strip-geometry";

export const barPath = (
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

/** Paper beside a limit where the bar runs under it. */
export function Halos({ geometry: { bar, limits } }: { geometry: StripGeometry }) {
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

export function Limits({ geometry: { limits, boxHeight } }: { geometry: StripGeometry }) {
  return limits.map(({ x, label, isTarget }) =>
    isTarget ? (
      <line key={label} className="strip-edge" x1={x + 0.5} x2={x + 0.5} y2={boxHeight} />
    ) : (
      <path
        key={label}
        className="strip-ink"
        d={`M${x - 3} 0h6v1.5h-2V${boxHeight - 1.5}h2v1.5h-6v-1.5h2V1.5h-2Z`}
      />
    ),
  );
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

export function Marks({
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
