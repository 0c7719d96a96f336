import type { Unaccounted } from "../../shared/acoustics/types";
import type { ProblemIssue } from "../../shared/schemas/problem";
import { checkShiftFacts, ShiftFacts, ShiftTaskInput } from "../../shared/schemas/shift";
import { addDays } from "../../shared/time/zone";
import {
  employmentIssues,
  futureIssues,
  isSameShift,
  lockWorkers,
  openEndIssues,
  overlapIssues,
  startOf,
  wholeDayIssues,
} from "../commands/check-shift";
import { type CheckedShift, storeShifts } from "../commands/store-shifts";
import { todayAt } from "../lib/calendar";
import { groupBy } from "../lib/group-by";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { crewOn, type ImportWorker, idsByName, workersByNumber } from "../queries/import-lookups";
import { type SavedShiftRow, savedShifts } from "../queries/saved-shifts";
import { Cells } from "./cells";
import { IMPORT_COLUMNS } from "./columns";
import { type ImportDraft, toProblemIssue } from "./import-draft";
import type { CsvFile, CsvLine } from "./read-csv";

/** Shifts written in one go. */
const BATCH = 1000;

/** Column of a field, for what the checks of a shift have to say. */
function columnOf([field, , part]: ProblemIssue["path"]): string {
  const ofTask: Record<string, string> = {
    taskId: "task",
    durationMin: "minutes",
    wornPct: "worn_pct",
  };
  const ofShift: Record<string, string> = {
    localStart: "start",
    whichHour: "which_hour",
    lengthMin: "length_min",
    unaccounted: "unaccounted",
    note: "note",
    date: "date",
    reason: "",
    tasks: "minutes",
  };
  return (part !== undefined ? ofTask[String(part)] : ofShift[String(field)]) ?? "employee_number";
}

interface Draft {
  lines: CsvLine[];
  worker: ImportWorker;
  date: string;
  facts: ReturnType<typeof ShiftFacts.parse>;
  confirmsWholeDay: boolean;
  confirmsOpenEnd: boolean;
  crewName: string | null;
  startsAt: Date;
}

/** Lines that tell of one shift: the same worker, date and start. */
const shiftKey = ({ cells }: CsvLine) =>
  ["employee_number", "date", "start"].map((name) => cells.get(name) ?? "").join("\t");
const shiftColumns = [
  "length_min",
  "crew",
  "which_hour",
  "whole_day",
  "open_end",
  "unaccounted",
  "unaccounted_level_db",
  "note",
];

/** What a file of shifts would do, held to the same checks as a day's entry. */
export async function draftShifts(
  actor: Actor,
  site: Site,
  file: CsvFile,
  reason: string | null,
): Promise<ImportDraft> {
  const cells = new Cells(file, IMPORT_COLUMNS.shifts);
  const groups = [...groupBy(file.lines, shiftKey).values()];
  const workers = await workersByNumber(
    site.id,
    groups.map(([first]) => first!.cells.get("employee_number") ?? ""),
  );
  const taskIds = await idsByName("tasks", site.id);
  const crewIds = await idsByName("crews", site.id);
  const today = todayAt(site.timeZone);

  const drafts = groups.flatMap((lines): Draft[] => {
    const { worker, date, isTimed, ...read } = readShift(cells, lines, workers, taskIds, crewIds);
    const { facts, confirmsWholeDay } = read;
    const issues = [
      ...(worker && date ? employmentIssues(date, worker) : []),
      ...(date ? futureIssues(date, today) : []),
      ...(facts ? wholeDayIssues(facts.lengthMin, confirmsWholeDay) : []),
    ];
    const startsAt = date && facts && isTimed ? startOf(date, facts, site.timeZone, issues) : null;
    refuseAll(cells, lines, issues);
    return worker && date && facts && startsAt ? [{ ...read, worker, date, facts, startsAt }] : [];
  });

  const workerIds = [...new Set(drafts.map(({ worker }) => worker.id))];
  await lockWorkers(workerIds);
  const nearby = groupBy(
    await shiftsAround(
      workerIds,
      drafts.map(({ date }) => date),
    ),
    ({ workerId }) => workerId,
  );
  const crewOf = await crewOn(site.id, workerIds);
  const accepted = drafts.map((draft) => {
    const { worker, date, facts } = draft;
    const own =
      nearby
        .get(worker.id)
        ?.find((shift) => shift.date === date && shift.localStart === facts.localStart) ?? null;
    return {
      ...draft,
      own,
      state: own
        ? isSameShift(facts, own)
          ? ("unchanged" as const)
          : ("changed" as const)
        : ("fresh" as const),
    };
  });
  for (const { lines, state, startsAt, facts, confirmsOpenEnd } of accepted) {
    const span = { startsAt, lengthMin: facts.lengthMin };
    if (state !== "unchanged")
      refuseAll(cells, lines, openEndIssues(span, site.timeZone, confirmsOpenEnd));
  }
  refuseOverlaps(cells, accepted, nearby);
  const good = accepted.filter(({ lines }) => cells.areGood(lines));
  if (reason === null) {
    for (const { lines, state } of good)
      if (state === "changed") cells.refuse(lines[0]!, "", "reason-missing");
  }

  const count = (state: (typeof accepted)[number]["state"]) =>
    good.filter((one) => one.state === state).length;
  return {
    fresh: count("fresh"),
    changed: count("changed"),
    unchanged: count("unchanged"),
    days: drafts.map(({ worker, date }) => ({ workerId: worker.id, date })),
    issues: cells.issues,
    store: async (entryId) => {
      const shifts = accepted
        .filter(({ state }) => state !== "unchanged")
        .map(
          ({ own, worker, date, facts, startsAt, crewName }): CheckedShift => ({
            shiftId: own?.shiftId ?? null,
            number: (own?.revision ?? 0) + 1,
            siteId: site.id,
            workerId: worker.id,
            crewId:
              own?.crewId ?? (crewName === null ? crewOf(worker.id, date) : crewIds.get(crewName)!),
            date,
            timeZone: site.timeZone,
            localStart: facts.localStart,
            lengthMin: facts.lengthMin,
            startsAt,
            unaccounted: facts.unaccounted,
            tasks: facts.tasks,
            note: facts.note,
            reason: own ? reason : null,
          }),
        );
      for (let from = 0; from < shifts.length; from += BATCH)
        await storeShifts(actor, entryId, shifts.slice(from, from + BATCH));
      return shifts.map(({ workerId, date }) => ({ workerId, date }));
    },
  };
}

function refuseAll(cells: Cells, lines: readonly CsvLine[], issues: readonly ProblemIssue[]): void {
  for (const { path, code, params } of issues) {
    const at = path[0] === "tasks" && typeof path[1] === "number" ? lines[path[1]] : lines[0];
    cells.refuseUnlessRefused(at ?? lines[0]!, columnOf(path), code, params);
  }
}

/** Stand for what is missing or refused, so that everything else of the shift is looked at all the same. */
const STAND_IN = { localStart: "00:00", lengthMin: 1439, durationMin: 1e-9 } as const;

/** Another id for each line: a task that is refused is not one that stands there twice. */
const standInTask = (place: number) =>
  `00000000-0000-4000-8000-${place.toString(16).padStart(12, "0")}`;

interface ReadShift
  extends Pick<Draft, "lines" | "confirmsWholeDay" | "confirmsOpenEnd" | "crewName"> {
  worker: ImportWorker | undefined;
  date: string | null;
  /** With stand-ins for what was refused; null where more is wrong with it. */
  facts: Draft["facts"] | null;
  /** Start and length are the file's own. */
  isTimed: boolean;
}

function readShift(
  cells: Cells,
  lines: CsvLine[],
  workers: ReadonlyMap<string, ImportWorker>,
  taskIds: ReadonlyMap<string, string>,
  crewIds: ReadonlyMap<string, string>,
): ReadShift {
  const first = lines[0]!;
  for (const line of lines.slice(1)) {
    for (const name of shiftColumns) {
      if ((line.cells.get(name) ?? "") !== (first.cells.get(name) ?? ""))
        cells.refuse(line, name, "differs-within-shift", { line: first.line });
    }
  }
  const number = cells.needed(first, "employee_number");
  const worker = number === null ? undefined : workers.get(number);
  if (number !== null && !worker) cells.refuse(first, "employee_number", "worker-unknown");
  const date = cells.date(first, "date");
  const localStart =
    cells.time(first, "start") ??
    (first.cells.get("start") ? null : cells.refuse(first, "start", "empty"));
  const lengthMin = cells.neededNumber(first, "length_min");
  const crewName = cells.text(first, "crew");
  if (crewName !== null && !crewIds.has(crewName)) cells.refuse(first, "crew", "crew-unknown");
  const hasTasks =
    lines.length > 1 || Boolean(first.cells.get("task")) || Boolean(first.cells.get("minutes"));
  const tasks = hasTasks ? lines.map((line, place) => readTask(cells, line, place, taskIds)) : [];
  const how =
    cells.choice(first, "unaccounted", ["unknown", "like-the-rest", "quiet"]) ?? "unknown";
  const quietDb = cells.number(first, "unaccounted_level_db");
  if (how === "quiet" && quietDb === null) cells.refuse(first, "unaccounted_level_db", "empty");
  if (how !== "quiet" && quietDb !== null)
    cells.refuse(first, "unaccounted_level_db", "only-where-quiet");
  const unaccounted: Unaccounted =
    how === "quiet" && quietDb !== null ? { how, levelDb: quietDb } : { how: "unknown" };
  const parsed = ShiftFacts.safeParse({
    localStart: localStart ?? STAND_IN.localStart,
    whichHour: cells.choice(first, "which_hour", ["first", "second"]),
    lengthMin: lengthMin ?? STAND_IN.lengthMin,
    unaccounted: how === "like-the-rest" ? { how } : unaccounted,
    tasks,
    note: cells.text(first, "note"),
  });
  const confirmsWholeDay = cells.choice(first, "whole_day", ["yes"]) === "yes";
  const confirmsOpenEnd = cells.choice(first, "open_end", ["yes"]) === "yes";
  const read = { lines, worker, date, confirmsWholeDay, confirmsOpenEnd, crewName };
  if (!parsed.success) {
    refuseAll(cells, lines, parsed.error.issues.map(toProblemIssue));
    return { ...read, facts: null, isTimed: false };
  }
  const shape = { value: parsed.data, issues: [] as Parameters<typeof toProblemIssue>[0][] };
  checkShiftFacts(shape);
  refuseAll(cells, lines, shape.issues.map(toProblemIssue));
  return { ...read, facts: parsed.data, isTimed: localStart !== null && lengthMin !== null };
}

/** One line's task, each of its cells looked at by itself. */
function readTask(
  cells: Cells,
  line: CsvLine,
  place: number,
  taskIds: ReadonlyMap<string, string>,
): ShiftTaskInput {
  const name = cells.needed(line, "task");
  const taskId =
    name === null ? null : (taskIds.get(name) ?? cells.refuse(line, "task", "task-unknown"));
  const parsed = ShiftTaskInput.safeParse({
    taskId: taskId ?? standInTask(place),
    durationMin: cells.neededNumber(line, "minutes") ?? STAND_IN.durationMin,
    wornPct: cells.number(line, "worn_pct"),
  });
  if (parsed.success) return parsed.data;
  for (const { path, code, params } of parsed.error.issues.map(toProblemIssue))
    cells.refuseUnlessRefused(line, columnOf(["tasks", place, ...path]), code, params);
  const { durationMin } = STAND_IN;
  return { taskId: standInTask(place), durationMin, wornPct: null, wornIsShiftWide: false };
}

async function shiftsAround(
  workerIds: readonly string[],
  dates: readonly string[],
): Promise<SavedShiftRow[]> {
  if (workerIds.length === 0) return [];
  const sorted = dates.toSorted();
  return savedShifts(
    "s.worker_id = ANY (CAST(:ids AS uuid[])) AND s.date BETWEEN CAST(:from AS date) AND CAST(:to AS date)",
    {
      ids: `{${workerIds.join(",")}}`,
      from: addDays(sorted[0]!, -2),
      to: addDays(sorted.at(-1)!, 2),
    },
  );
}

/** Against what is stored, and among the file's own shifts: in the order of their starts each is held to the longest before it. */
function refuseOverlaps(
  cells: Cells,
  accepted: readonly (Draft & { own: SavedShiftRow | null })[],
  nearby: ReadonlyMap<string, SavedShiftRow[]>,
): void {
  const endOf = ({ startsAt, lengthMin }: { startsAt: Date; lengthMin: number }) =>
    startsAt.getTime() + lengthMin * 60_000;
  for (const [workerId, ofWorker] of groupBy(accepted, ({ worker }) => worker.id)) {
    const replaced = new Set(ofWorker.map(({ own }) => own?.shiftId));
    const spans = [
      ...(nearby.get(workerId) ?? [])
        .filter(({ shiftId }) => !replaced.has(shiftId))
        .map((shift) => ({ ...shift, lines: null })),
      ...ofWorker.map(({ date, facts: { localStart, lengthMin }, startsAt, lines }) => ({
        date,
        localStart,
        lengthMin,
        startsAt,
        lines,
      })),
    ].sort((a, b) => a.startsAt.getTime() - b.startsAt.getTime());
    let longest = spans[0];
    for (const span of spans.slice(1)) {
      if (!longest) break;
      if (span.lines) refuseAll(cells, span.lines, overlapIssues(span, [longest]));
      else if (longest.lines) refuseAll(cells, longest.lines, overlapIssues(longest, [span]));
      if (endOf(span) > endOf(longest)) longest = span;
    }
  }
}
