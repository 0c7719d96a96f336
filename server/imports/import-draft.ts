import type { ImportIssue } from "../../shared/schemas/import";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { DayKey } from "../queries/day-inputs";

/** What a file would do, found out before anything is stored. */
export interface ImportDraft {
  fresh: number;
  changed: number;
  unchanged: number;
  /** Days that the file is about, for the summary. */
  days: readonly DayKey[];
  issues: readonly ImportIssue[];
  /** Writes what is new; returns the days to compute. */
  store: (entryId: string) => Promise<DayKey[]>;
}

/** A custom issue of a schema carries its code in `params`. */
interface SchemaIssue {
  code: string;
  path: PropertyKey[];
  params?: unknown;
}

/** A field's issue as one of the API, whatever schema found it. */
export function toProblemIssue(found: SchemaIssue): ProblemIssue {
  const path = found.path as (string | number)[];
  if (found.code === "custom") {
    const { code, ...params } = found.params as { code: string } & ProblemIssue["params"];
    return { path, code, params };
  }
  const bounds = Object.entries(found).filter(
    ([name, value]) => (name === "minimum" || name === "maximum") && typeof value === "number",
  );
  return { path, code: found.code, params: Object.fromEntries(bounds) as ProblemIssue["params"] };
}
