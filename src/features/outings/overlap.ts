import { ApiError } from "../../lib/api";

/** Another run of the same instrument, at the same time. */
export interface Overlap {
  /** ISO instants; the end is null while it is out. */
  readonly from: string;
  readonly to: string | null;
  /** Null where the reader may not see it. */
  readonly runId: string | null;
}

/** The run that was in the way; null where something else was. */
export function overlapOf(error: unknown): Overlap | null {
  if (!(error instanceof ApiError) || error.code !== "instruments-overlap") return null;
  const { from, to } = error.params;
  if (typeof from !== "string") return null;
  const { runId } = (error.body ?? {}) as { runId?: unknown };
  return {
    from,
    to: typeof to === "string" ? to : null,
    runId: typeof runId === "string" ? runId : null,
  };
}
