import { canonicalJson } from "./audit";

export type Changes = Record<string, { from: unknown; to: unknown }>;

/** The members that differ, each with what it was and what it is: the values of a change's event. */
export function changesBetween<After extends object>(
  before: { readonly [Name in keyof After]: unknown },
  after: After,
): Changes {
  const names = Object.keys(after) as (keyof After & string)[];
  return Object.fromEntries(
    names
      .filter((name) => canonicalJson(before[name]) !== canonicalJson(after[name]))
      .map((name) => [name, { from: before[name], to: after[name] }]),
  );
}

export const isUnchanged = (changes: Changes): boolean => Object.keys(changes).length === 0;
