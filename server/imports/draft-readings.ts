import { ReadingFacts } from "../../shared/schemas/evaluation";
import type { ProblemIssue } from "../../shared/schemas/problem";
import { type RunInput, RunInput as RunSchema } from "../../shared/schemas/run";
import { findRunDoubts } from "../../shared/schemas/run-doubts";
import { employmentIssues, futureIssues, lockWorkers } from "../commands/check-shift";
import { recordRun } from "../commands/record-run";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { calibrationsOn } from "../queries/calibrations";
import { IS_OF_DAY } from "../queries/day-inputs";
import { facedShifts } from "../queries/faced-shifts";
import { type ImportWorker, workersByNumber } from "../queries/import-lookups";
import { Cells } from "./cells";
import { IMPORT_COLUMNS } from "./columns";
import { type ImportDraft, toProblemIssue } from "./import-draft";
import type { CsvFile, CsvLine } from "./read-csv";

const ofRun: Record<string, string> = {
  durationMin: "duration_min",
  checkBeforeDb: "check_before_db",
  checkAfterDb: "check_after_db",
  covers: "covers",
  keptReason: "kept_reason",
  unusual: "unusual",
  date: "date",
  instrumentId: "instrument_serial",
  shiftId: "start",
};
const ofReading: Record<string, string> = {
  criterionLevelDb: "criterion_level_db",
  exchangeRateDb: "exchange_rate_db",
  thresholdDb: "threshold_db",
  weighting: "weighting",
  response: "response",
  dosePct: "dose_pct",
  averageDb: "average_db",
  lceqDb: "lceq_db",
  lasMaxDb: "las_max_db",
  peak: "peak_db",
  levelDb: "peak_db",
};

const readingColumns = [...new Set(Object.values(ofReading)), "peak_weighting"];

function columnOf(path: ProblemIssue["path"]): string {
  const last = String(path.at(-1));
  return (path[0] === "readings" ? ofReading[last] : ofRun[String(path[0])]) ?? "employee_number";
}

const runKey = ({ cells }: CsvLine) =>
  ["employee_number", "date", "instrument_serial", "start"]
    .map((name) => cells.get(name) ?? "")
    .join("\t");
const runColumns = [
  "duration_min",
  "covers",
  "check_before_db",
  "check_after_db",
  "kept_reason",
  "unusual",
];

/** What a file of dosimeter readings would do: lines of one worker, date, instrument and shift are one run. */
export async function draftReadings(actor: Actor, site: Site, file: CsvFile): Promise<ImportDraft> {
  const cells = new Cells(file, IMPORT_COLUMNS.readings);
  const groups = [...groupBy(file.lines, runKey).values()];
  const workers = await workersByNumber(
    site.id,
    groups.map(([first]) => first!.cells.get("employee_number") ?? ""),
  );
  await lockWorkers([...workers.values()].map(({ id }) => id));
  const found = await rows<{ id: string; serialNumber: string }>(
    `SELECT id, serial_number AS "serialNumber" FROM instruments WHERE site_id = :siteId AND kind <> 'calibrator'`,
    { siteId: site.id },
  );
  const instruments = new Map(
    found.map(({ id, serialNumber }) => [serialNumber.normalize("NFC"), id]),
  );
  const workerIds = `{${[...workers.values()].map(({ id }) => id).join(",")}}`;
  const shifts = await rows<{ id: string; workerId: string; date: string; start: string }>(
    `SELECT id, worker_id AS "workerId", date::text AS date, to_char(local_start, 'HH24:MI') AS start FROM shifts
     WHERE worker_id = ANY (CAST(:workerIds AS uuid[])) AND NOT is_void`,
    { workerIds },
  );
  const shiftIds = new Map(
    shifts.map(({ id, workerId, date, start }) => [`${workerId} ${date} ${start}`, id]),
  );
  const recorded = await recordedRuns(workerIds);
  const today = todayAt(site.timeZone);

  const fresh: { run: RunInput; lines: readonly CsvLine[] }[] = [];
  const asked: { run: RunInput; first: CsvLine }[] = [];
  const days: { workerId: string; date: string }[] = [];
  let unchanged = 0;
  for (const lines of groups) {
    const { worker, date, start, run: read } = readRun(cells, lines, workers, instruments);
    const first = lines[0]!;
    refuseAll(cells, lines, [
      ...(worker && date ? employmentIssues(date, worker) : []),
      ...(date ? futureIssues(date, today) : []),
    ]);
    const shiftId =
      worker && date && start ? (shiftIds.get(`${worker.id} ${date} ${start}`) ?? null) : null;
    if (worker && date && start && shiftId === null) cells.refuse(first, "start", "shift-unknown");
    if (!read) continue;
    const run = { ...read, shiftId };
    const same = recorded.get(keyOfRun(run));
    if (same === undefined && date) asked.push({ run, first });
    if (!cells.areGood(lines)) continue;
    days.push({ workerId: run.workerId, date: run.date });
    if (same === undefined) fresh.push({ run, lines });
    else if (same === factsOf(run)) unchanged += 1;
    // A recorded run is corrected on its own page, with its reason and its readings beside the earlier ones.
    else cells.refuse(first, "instrument_serial", "reading-recorded-already");
  }
  const states = await calibrationsOn(asked.map(({ run }) => run));
  const faced = await facedShifts(asked.map(({ run }) => run));
  asked.forEach(({ run, first }, place) => {
    const { date, keptReason, checkBeforeDb, checkAfterDb, durationMin, covers } = run;
    if (keptReason !== null) return;
    const found = findRunDoubts({
      checkBeforeDb,
      checkAfterDb,
      date,
      calibration: states[place]!,
      durationMin,
      leastMin: null,
      needsChecks: false,
      covers,
      shift: faced[place] ?? null,
      shown: [],
    });
    for (const { code, params } of found) cells.refuse(first, "kept_reason", code, { ...params });
  });
  const runs = fresh.map(({ run }) => run);
  return {
    fresh: fresh.filter(({ lines }) => cells.areGood(lines)).length,
    changed: 0,
    unchanged,
    days,
    issues: cells.issues,
    store: async (entryId) => {
      for (const run of runs) await recordRun(actor, site.id, run, entryId);
      return runs.map(({ workerId, date }) => ({ workerId, date }));
    },
  };
}

function refuseAll(cells: Cells, lines: readonly CsvLine[], issues: readonly ProblemIssue[]): void {
  for (const { path, code, params } of issues) {
    const at = path[0] === "readings" && typeof path[1] === "number" ? lines[path[1]] : lines[0];
    cells.refuseUnlessRefused(at ?? lines[0]!, columnOf(path), code, params);
  }
}

/** Stand for what is missing or refused, so that everything else of the run is looked at all the same. */
const STAND_IN = {
  id: "00000000-0000-4000-8000-000000000000",
  date: "2000-01-01",
  durationMin: 480,
  covers: "part",
  reading: {
    settings: {
      criterionLevelDb: 90,
      exchangeRateDb: 5,
      thresholdDb: 80,
      weighting: "A",
      response: "slow",
    },
    averageDb: 80,
  },
} as const;

function readRun(
  cells: Cells,
  lines: readonly CsvLine[],
  workers: ReadonlyMap<string, ImportWorker>,
  instruments: ReadonlyMap<string, string>,
) {
  const first = lines[0]!;
  for (const line of lines.slice(1)) {
    for (const name of runColumns) {
      if ((line.cells.get(name) ?? "") !== (first.cells.get(name) ?? ""))
        cells.refuse(line, name, "differs-within-run", { line: first.line });
    }
  }
  const number = cells.needed(first, "employee_number");
  const worker = number === null ? undefined : workers.get(number);
  if (number !== null && !worker) cells.refuse(first, "employee_number", "worker-unknown");
  const date = cells.date(first, "date");
  const serial = cells.needed(first, "instrument_serial");
  const instrumentId =
    serial === null
      ? null
      : (instruments.get(serial) ?? cells.refuse(first, "instrument_serial", "instrument-unknown"));
  const start = cells.time(first, "start");
  const durationMin = cells.neededNumber(first, "duration_min");
  const covers =
    cells.choice(first, "covers", ["shift", "projected", "part"]) ??
    (first.cells.get("covers") ? null : cells.refuse(first, "covers", "empty"));
  const parsed = RunSchema.safeParse({
    workerId: worker?.id ?? STAND_IN.id,
    date: date ?? STAND_IN.date,
    instrumentId: instrumentId ?? STAND_IN.id,
    durationMin: durationMin ?? STAND_IN.durationMin,
    covers: covers ?? STAND_IN.covers,
    readings: lines.map((line) => readReading(cells, line) ?? STAND_IN.reading),
    checkBeforeDb: cells.number(first, "check_before_db"),
    checkAfterDb: cells.number(first, "check_after_db"),
    keptReason: cells.text(first, "kept_reason"),
    unusual: cells.text(first, "unusual"),
  });
  if (!parsed.success) refuseAll(cells, lines, parsed.error.issues.map(toProblemIssue));
  return { worker, date, start, run: parsed.success ? parsed.data : null };
}

/** One line of a run; null where something in it is refused. */
function readReading(cells: Cells, line: CsvLine): Reading | null {
  const peakDb = cells.number(line, "peak_db");
  const weighting = cells.choice(line, "peak_weighting", ["A", "C", "Z"]);
  if ((peakDb === null) !== (weighting === null))
    cells.refuse(line, peakDb === null ? "peak_db" : "peak_weighting", "empty");
  const parsed = ReadingFacts.safeParse({
    settings: {
      criterionLevelDb: cells.neededNumber(line, "criterion_level_db"),
      exchangeRateDb: cells.neededNumber(line, "exchange_rate_db"),
      thresholdDb: cells.number(line, "threshold_db"),
      weighting: cells.choice(line, "weighting", ["A", "C", "Z"]),
      response: cells.choice(line, "response", ["slow", "fast", "none"]),
    },
    dosePct: cells.number(line, "dose_pct"),
    averageDb: cells.number(line, "average_db"),
    lceqDb: cells.number(line, "lceq_db"),
    lasMaxDb: cells.number(line, "las_max_db"),
    peak: peakDb === null || weighting === null ? null : { levelDb: peakDb, weighting },
  });
  if (!parsed.success) {
    for (const { path, code, params } of parsed.error.issues.map(toProblemIssue))
      cells.refuseUnlessRefused(line, ofReading[String(path.at(-1))] ?? "", code, params);
    return null;
  }
  return readingColumns.some((name) => cells.isRefused(line, name)) ? null : parsed.data;
}

const keyOfRun = ({
  workerId,
  date,
  instrumentId,
}: Pick<RunInput, "workerId" | "date" | "instrumentId">) => `${workerId} ${date} ${instrumentId}`;

type Reading = RunInput["readings"][number];
type Facts = Pick<RunInput, "durationMin" | "covers" | "readings">;

/** What makes two runs the same one. */
const factsOf = ({ durationMin, covers, readings }: Facts) =>
  JSON.stringify([
    durationMin,
    covers,
    ...readings.map(({ settings: s, dosePct, averageDb, lceqDb, lasMaxDb, peak }: Reading) => [
      s.criterionLevelDb,
      s.exchangeRateDb,
      s.thresholdDb,
      s.weighting,
      s.response,
      dosePct,
      averageDb,
      lceqDb,
      lasMaxDb,
      peak?.levelDb ?? null,
      peak?.weighting ?? null,
    ]),
  ]);

/** Runs recorded for these workers, as `factsOf` has them, by worker, date and instrument. */
async function recordedRuns(workerIds: string): Promise<Map<string, string>> {
  const found = await rows<{ workerId: string; date: string; instrumentId: string } & Facts>(
    `SELECT r.worker_id AS "workerId", r.date::text AS date, r.instrument_id AS "instrumentId", v.duration_min AS "durationMin", v.covers,
       (SELECT json_agg(json_build_object('settings', json_build_object('criterionLevelDb', g.criterion_level_db, 'exchangeRateDb', g.exchange_rate_db,
            'thresholdDb', g.threshold_db, 'weighting', g.weighting, 'response', g.response), 'dosePct', g.dose_pct, 'averageDb', g.average_db, 'lceqDb', g.lceq_db,
          'lasMaxDb', g.las_max_db, 'peak', CASE WHEN g.peak_db IS NOT NULL THEN json_build_object('levelDb', g.peak_db, 'weighting', g.peak_weighting) END) ORDER BY g.position)
        FROM readings g WHERE g.run_revision_id = v.id) AS readings
     FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id WHERE r.worker_id = ANY (CAST(:workerIds AS uuid[])) AND ${IS_OF_DAY}`,
    { workerIds },
  );
  return new Map(found.map((run) => [keyOfRun(run), factsOf(run)]));
}
