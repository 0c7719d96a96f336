import { RULE_SETS } from "../rule-sets";
import type { FindingKind } from "../schemas/finding";

/** Kinds of which supervisor, officer and the worker are told by mail; the others wait on the officer's page. */
const NOTIFIED_KINDS: ReadonlySet<FindingKind> = new Set([
  "over-limit-outside",
  "over-limit-at-ear",
  "no-protector",
  "dual-protection",
  "peak-or-ceiling",
]);

/** Whether people are told of a new finding: an action value passed is the employer's to act on, and nobody's limit. */
export function isNotified({ kind, criterion }: { kind: FindingKind; criterion: string }): boolean {
  if (!NOTIFIED_KINDS.has(kind)) return false;
  return !RULE_SETS.some(({ key, criteria }) =>
    criteria.some(({ id, kind }) => kind === "action" && `${key}:${id}` === criterion),
  );
}

/** Days further back are findings for the officer, and no news for anybody. Common practice, no source. */
export const NEWS_FOR_DAYS = 31;
