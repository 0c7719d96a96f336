import type { FindingKind } from "../schemas/finding";

/** Kinds of which supervisor, officer and the worker are told by mail; the others wait on the officer's page. */
export const NOTIFIED_KINDS: ReadonlySet<FindingKind> = new Set([
  "over-limit-outside",
  "over-limit-at-ear",
  "no-protector",
  "dual-protection",
  "peak-or-ceiling",
]);
