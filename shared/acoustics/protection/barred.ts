import type { RankedProtector } from "./choose-protector";

type Asked = Pick<RankedProtector, "excludedBy" | "lastFit">;
type Judged = Pick<RankedProtector, "excludedBy" | "wornDb">;

/** Why a device may not be tried on a worker, or not go out to one. */
export type Bar = NonNullable<RankedProtector["excludedBy"]>;

/**
 * What can't be worn is not tried either; where only data are missing, an own fit is what gives them, and what a worker
 * could not wear may be worn again, which a trial shows. Null: it may be tried.
 */
export const barToTrial = ({ excludedBy }: Pick<Asked, "excludedBy">): Bar | null =>
  excludedBy?.code === "no-data" || excludedBy?.code === "cannot-wear" ? null : excludedBy;

/** By its own data: what a fit alone tells is of the one who was tested. */
const isJudged = ({ excludedBy, wornDb }: Judged): boolean =>
  wornDb !== null && excludedBy?.code !== "no-data";

/**
 * A device whose data say nothing of the noise goes out only on an own fit that reaches what is needed. Where nothing
 * among `all` can be judged, none of them is better than another, and no device is barred for that. Null: it may go out.
 */
export function barToIssue({ excludedBy, lastFit }: Asked, all: readonly Judged[]): Bar | null {
  if (excludedBy?.code !== "no-data") return excludedBy;
  const isFitted = lastFit !== null && lastFit.hasPassed !== false;
  return isFitted || !all.some(isJudged) ? null : excludedBy;
}
