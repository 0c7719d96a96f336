import { METHODS } from "../acoustics/methods";
import type { DayInput, RuleSetVersion } from "../acoustics/types";
import { RESULT_COLUMNS, resultFacts } from "../day/result-facts";
import { ruleSetVersion } from "../rule-sets";
import { MANIFEST, RESULTS_FOLDER, type ResultLine, type YearManifest } from "./manifest";
import { readLines, readRecords } from "./read-records";
import { BrokenZip, readZip, type ZipEntry } from "./read-zip";
import { Sha256 } from "./sha256";

export type FileState = "as-stated" | "changed" | "rows-differ" | "missing" | "not-listed";

export interface CheckedFile {
  path: string;
  rows: number | null;
  state: FileState;
}

export interface DifferingResult {
  id: string;
  worker: string;
  date: string;
  file: string;
  /** Why nothing could be derived; null where it was, and differs. */
  problem: "unreadable" | "unknown-method" | "unknown-rule-set" | "not-computable" | null;
  fields: { name: string; stated: string; derived: string }[];
}

export interface YearFileReport {
  /** Null: the file is whole. */
  broken: string | null;
  manifest: YearManifest | null;
  files: CheckedFile[];
  /** Results derived anew from their inputs, with the same outcome. */
  rederived: number;
  /** Imported as figures: there are no inputs to derive them from. */
  imported: number;
  differing: DifferingResult[];
  differingCount: number;
}

/** Named at most; the count is of all. */
const NAMED = 200;

/** Columns of results.csv and the members of the outcome that they state. */
const STATED: Record<string, string> = {
  rule_set: "ruleSetKey",
  rule_set_version: "ruleSetVersion",
  method_version: "methodVersion",
  shift_min: "shiftMin",
  unaccounted_min: "unaccountedMin",
  dose_pct: "dosePct",
  expanded_u_db: "uncertaintyDb",
  at_ear_off_db: "atEarOffDb",
  at_ear_on_db: "atEarActiveDb",
  at_ear_as_worked_db: "atEarAsWorkedDb",
  at_ear_counted_db: "atEarCountedDb",
  while_worn_db: "whileWornDb",
  verdict_without_protection: "verdictOutside",
  verdict_at_ear: "verdictAtEar",
  protector: "hasProtector",
  protector_word: "word",
  reason: "reason",
  grade: "grade",
};

const MEMBERS = Object.values(RESULT_COLUMNS).map(([name]): string => name);
/** What results did not keep at first: where one says nothing of it, nothing is compared. */
const KEPT_LATER = new Set(["atEarBound", "whileWornBound", "doseBound", "atEarCountedDb"]);

/** Two programs' transcendental functions may differ in the last place; a figure that means something else differs by more. */
const sameNumber = (a: number, b: number) =>
  a === b || Math.abs(a - b) <= 1e-9 * Math.max(1, Math.abs(a), Math.abs(b));

function sameValue(a: unknown, b: unknown): boolean {
  if (typeof a === "number" && typeof b === "number") return sameNumber(a, b);
  if (a === null || b === null || typeof a !== "object" || typeof b !== "object")
    return (a ?? null) === (b ?? null);
  if (Array.isArray(a) !== Array.isArray(b)) return false;
  const [left, right] = [a as Record<string, unknown>, b as Record<string, unknown>];
  return [...new Set([...Object.keys(left), ...Object.keys(right)])].every((name) =>
    sameValue(left[name] ?? null, right[name] ?? null),
  );
}

const textOf = (value: unknown) => JSON.stringify(value ?? null);

/** What the arithmetic of the recorded version makes of a result's input; or why it can't. */
function derive(
  line: ResultLine,
): Record<string, unknown> | NonNullable<DifferingResult["problem"]> {
  const method = METHODS[line.methodVersion];
  if (!method) return "unknown-method";
  const find = ({ key, version }: { key: string; version: number }) => ruleSetVersion(key, version);
  const governing = find(line.governing);
  const comparison = line.comparison.map(find);
  if (!governing || comparison.some((found) => !found)) return "unknown-rule-set";
  try {
    const input = line.input as DayInput;
    const evaluation = method.evaluateDay(input, governing, comparison as RuleSetVersion[]);
    return JSON.parse(JSON.stringify(resultFacts(input, evaluation, governing)));
  } catch {
    return "not-computable";
  }
}

async function* piecesOf(
  entry: ZipEntry,
  hash: Sha256,
  size: { bytes: number },
): AsyncGenerator<Uint8Array> {
  const reader = entry.stream().getReader();
  try {
    for (;;) {
      const { done, value } = await reader.read();
      if (done) return;
      hash.update(value);
      size.bytes += value.length;
      yield value;
    }
  } finally {
    reader.releaseLock();
  }
}

/**
 * Checks a year's file with nothing but itself: whether it is whole, each file against its hash in the manifest, and each
 * result against what its recorded method version makes of its input. `tell` hears how far it is, 0 to 1.
 */
export async function checkYearFile(
  blob: Blob,
  tell: (share: number) => void = () => undefined,
): Promise<YearFileReport> {
  const report: YearFileReport = {
    broken: null,
    manifest: null,
    files: [],
    rederived: 0,
    imported: 0,
    differing: [],
    differingCount: 0,
  };
  let entries: ZipEntry[];
  try {
    entries = await readZip(blob);
  } catch (error) {
    return { ...report, broken: error instanceof BrokenZip ? error.message : "it can’t be read" };
  }
  const listed = new Map(entries.map((entry) => [entry.path, entry]));
  const last = listed.get(MANIFEST);
  if (!last) return { ...report, broken: "it has no manifest" };
  try {
    report.manifest = JSON.parse(await new Response(last.stream()).text()) as YearManifest;
    if (report.manifest.format !== 1)
      return { ...report, broken: "its manifest is of another kind" };
  } catch {
    return { ...report, broken: "its manifest can’t be read" };
  }
  const differs = (found: DifferingResult) => {
    report.differingCount += 1;
    if (report.differing.length < NAMED) report.differing.push(found);
  };
  /** What results.csv has to say of a current result, as far as it is derived here. */
  const derivedOf = new Map<string, Record<string, unknown>>();
  const totalBytes = entries.reduce((sum, { sizeBytes }) => sum + sizeBytes, 0);
  let doneBytes = 0;

  async function readResults(path: string, bytes: AsyncIterable<Uint8Array>): Promise<number> {
    let rows = 0;
    for await (const text of readLines(bytes)) {
      rows += 1;
      if (rows % 500 === 0) await new Promise((resolve) => setTimeout(resolve));
      let line: ResultLine;
      try {
        line = JSON.parse(text) as ResultLine;
      } catch {
        differs({
          id: "",
          worker: "",
          date: "",
          file: `${path}, line ${rows}`,
          problem: "unreadable",
          fields: [],
        });
        continue;
      }
      const { id, worker, date } = line;
      let outcome = line.outcome;
      if (line.origin === "imported") report.imported += 1;
      else {
        const derived = derive(line);
        if (typeof derived === "string") {
          differs({ id, worker, date, file: path, problem: derived, fields: [] });
          continue;
        }
        const stated = line.outcome;
        const isSilent = (name: string) => KEPT_LATER.has(name) && (stated[name] ?? null) === null;
        const fields = MEMBERS.filter(
          (name) => !isSilent(name) && !sameValue(stated[name], derived[name]),
        ).map((name) => ({
          name,
          stated: textOf(stated[name]),
          derived: textOf(derived[name]),
        }));
        if (fields.length > 0) differs({ id, worker, date, file: path, problem: null, fields });
        else report.rederived += 1;
        outcome = {
          ...derived,
          ...Object.fromEntries([...KEPT_LATER].map((name) => [name, stated[name]])),
        };
      }
      if (line.isCurrent)
        derivedOf.set(
          id,
          Object.fromEntries(
            [...Object.values(STATED), "outsideDb"].map((name) => [name, outcome[name] ?? null]),
          ),
        );
    }
    return rows;
  }

  async function readTable(path: string, bytes: AsyncIterable<Uint8Array>): Promise<number> {
    let rows = -1;
    let head: string[] = [];
    for await (const record of readRecords(bytes)) {
      rows += 1;
      if (rows === 0) head = record;
      else if (path === "results.csv") holdAgainst(head, record);
    }
    return Math.max(0, rows);
  }

  /** A line of results.csv against what was derived of the same result. */
  function holdAgainst(head: readonly string[], record: readonly string[]): void {
    const value = (name: string) => record[head.indexOf(name)] ?? "";
    const derived = derivedOf.get(value("result_id"));
    const fields = Object.entries(STATED).flatMap(([column, name]) => {
      const stated = value(column);
      const own = derived?.[name] ?? null;
      const isSame =
        typeof own === "number"
          ? stated !== "" && sameNumber(Number(stated), own)
          : stated === (own ?? "");
      return isSame ? [] : [{ name: column, stated: textOf(stated), derived: textOf(own) }];
    });
    // The level without protection stands in one of two columns, by the rule set.
    const outside = value("lex_8h_db") || value("twa_db");
    const ownOutside = (derived?.outsideDb ?? null) as number | null;
    if (ownOutside === null ? outside !== "" : !sameNumber(Number(outside), ownOutside))
      fields.push({ name: "lex_8h_db", stated: textOf(outside), derived: textOf(ownOutside) });
    if (fields.length === 0) return;
    differs({
      id: value("result_id"),
      worker: value("worker"),
      date: value("date"),
      file: "results.csv",
      problem: null,
      fields,
    });
  }

  const stated = new Map(report.manifest.files.map((file) => [file.path, file]));
  // Results first: the table of results is held against what they come to.
  const order = [...report.manifest.files].sort(
    (a, b) => Number(b.path.startsWith(RESULTS_FOLDER)) - Number(a.path.startsWith(RESULTS_FOLDER)),
  );
  for (const { path, rows: statedRows, sha256 } of order) {
    const entry = listed.get(path);
    if (!entry) {
      report.files.push({ path, rows: statedRows, state: "missing" });
      continue;
    }
    const hash = new Sha256();
    const size = { bytes: 0 };
    let rows: number | null = null;
    let isReadable = true;
    try {
      const bytes = piecesOf(entry, hash, size);
      if (path.startsWith(RESULTS_FOLDER)) rows = await readResults(path, bytes);
      else if (path.endsWith(".csv")) rows = await readTable(path, bytes);
      else for await (const _ of bytes);
    } catch {
      isReadable = false;
    }
    const isSame = isReadable && hash.digest() === sha256;
    report.files.push({
      path,
      rows,
      state: !isSame ? "changed" : rows !== statedRows ? "rows-differ" : "as-stated",
    });
    doneBytes += entry.sizeBytes;
    tell(doneBytes / totalBytes);
  }
  for (const { path } of entries)
    if (path !== MANIFEST && !stated.has(path))
      report.files.push({ path, rows: null, state: "not-listed" });
  report.files.sort((a, b) => a.path.localeCompare(b.path));
  tell(1);
  return report;
}

/** Whether nothing speaks against the file. */
export const isSound = ({ broken, files, differingCount }: YearFileReport): boolean =>
  broken === null && differingCount === 0 && files.every(({ state }) => state === "as-stated");
