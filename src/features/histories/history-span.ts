/** A part of a history, seconds from its start: what the chart shows. */
export interface Span {
  readonly fromS: number;
  readonly toS: number;
}

/** Closer than so many values there is nothing more to see. */
const FEWEST_VALUES = 20;

export const shortestSpanS = (intervalMs: number, lengthS: number): number =>
  Math.min(lengthS, (FEWEST_VALUES * intervalMs) / 1000);

export const isWhole = ({ fromS, toS }: Span, lengthS: number): boolean =>
  fromS <= 0 && toS >= lengthS;

/** A span of that length or less, moved to lie within the history. */
export function fitSpan({ fromS, toS }: Span, shortestS: number, lengthS: number): Span {
  const size = Math.min(lengthS, Math.max(shortestS, toS - fromS));
  const middle = (fromS + toS) / 2;
  const from = Math.min(Math.max(0, middle - size / 2), lengthS - size);
  return { fromS: from, toS: from + size };
}

/** Closer (`factor` under 1) or wider; what is at `aroundS` stays where it is. */
export function zoomSpan(
  { fromS, toS }: Span,
  factor: number,
  aroundS: number,
  shortestS: number,
  lengthS: number,
): Span {
  const size = Math.min(lengthS, Math.max(shortestS, (toS - fromS) * factor));
  const share = (aroundS - fromS) / (toS - fromS);
  const from = aroundS - share * size;
  return fitSpan({ fromS: from, toS: from + size }, shortestS, lengthS);
}

/** Earlier (under 0) or later by a share of what is seen. */
export function panSpan({ fromS, toS }: Span, share: number, lengthS: number): Span {
  const size = toS - fromS;
  const from = Math.min(Math.max(0, fromS + share * size), lengthS - size);
  return { fromS: from, toS: from + size };
}

/** A span with half of itself before and after, for which levels are asked: a small move needs no new ones. */
export function withMargin({ fromS, toS }: Span, lengthS: number): Span {
  const half = (toS - fromS) / 2;
  return { fromS: Math.max(0, fromS - half), toS: Math.min(lengthS, toS + half) };
}
