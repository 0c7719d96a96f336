import type { FindingState } from "../schemas/finding";

/** States in which a finding can be late: what is marked as done waits for its check, and what is closed is over. */
export const LATE_STATES = [
  "new",
  "in-hand",
  "came-back",
] as const satisfies readonly FindingState[];

/** Past its date, and still somebody's to act on. `today` is the site's. */
export const isOverdue = (
  { dueOn, state }: { readonly dueOn: string | null; readonly state: FindingState },
  today: string,
): boolean =>
  dueOn !== null && dueOn < today && (LATE_STATES as readonly FindingState[]).includes(state);
