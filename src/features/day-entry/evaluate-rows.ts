import { countsAsWorn, evaluateDay, isInNoise } from "../../../shared/acoustics/index";
import type {
  DayEvaluation,
  DayInput,
  ProtectorData,
  ReadingInput,
  RuleSetVersion,
  Unaccounted,
} from "../../../shared/acoustics/types";
import { withTasks } from "../../../shared/acoustics/with-tasks";
import {
  assignmentFor,
  buildDayInput,
  type EnteredShift,
} from "../../../shared/day/build-day-input";
import { type DaySummary, summarizeDay } from "../../../shared/day/summarize-day";
import type { LevelBound } from "../../../shared/format/level";
import { ruleSetInForce, ruleSetVersion } from "../../../shared/rule-sets/index";
import type { DayGridView, GridRow, GridTask, ShiftTaskInput } from "../../../shared/schemas/shift";
import { atLocalTime, type LocalInstant } from "../../../shared/time/zone";
import { type BesideReading, besideReading } from "./beside-reading";
import { type CellFault, emptyCell, numberIn, unaccountedIn } from "./cells";
import { type CellId, taskCell, wornCell } from "./columns";
import {
  enteredReadings,
  isElsewhere,
  type RowDraft,
  type RowIssue,
  type RunSetup,
  runOf,
  settingsRows,
} from "./draft";

/** Something that keeps a row from being saved, at the cell where it can be mended. */
export type RowProblem =
  | { readonly kind: "fault"; readonly cell: CellId; readonly fault: CellFault }
  | {
      readonly kind: "does-not-add-up";
      readonly cell: CellId;
      readonly sumMin: number;
      readonly lengthMin: number;
      readonly overMin: number;
      /** The longest this worker stayed in the suspect task, where it was shorter. */
      readonly longest: { readonly taskName: string; readonly longestMin: number } | null;
    }
  | {
      readonly kind: "start-missing" | "length-missing" | "not-whole-minutes";
      readonly cell: CellId;
    }
  | { readonly kind: "length-out-of-range"; readonly cell: CellId }
  | { readonly kind: "time-skipped" | "time-twice"; readonly cell: CellId; readonly time: string }
  | { readonly kind: "whole-day"; readonly cell: CellId }
  | { readonly kind: "no-instrument"; readonly cell: CellId }
  | { readonly kind: "run-emptied"; readonly cell: CellId; readonly runId: string }
  | { readonly kind: "shift-saved"; readonly cell: CellId; readonly shiftId: string }
  | { readonly kind: "refused"; readonly cell: CellId; readonly issue: RowIssue };

/** Something unlikely, asked about and not refused: it stands once somebody says that it is right. */
export type RowQuestion =
  | {
      readonly kind: "long-stay";
      readonly key: string;
      readonly cell: CellId;
      readonly taskName: string;
      readonly durationMin: number;
      readonly longestMin: number;
    }
  | {
      readonly kind: "far-off";
      readonly key: string;
      readonly cell: CellId;
      readonly readingDb: number;
      readonly tasksDb: number;
      readonly tasksBound: LevelBound;
      /** At least that much where the tasks are only bounded. */
      readonly gapDb: number;
    };

/** A row in the words of the server. */
export interface RowValues {
  readonly localStart: string;
  readonly lengthMin: number;
  readonly tasks: readonly ShiftTaskInput[];
  readonly unaccounted: Unaccounted;
}

export interface RowProtector {
  readonly name: string;
  readonly taskNames: readonly string[];
  readonly isEverywhere: boolean;
}

export interface RowEvaluation {
  readonly row: RowDraft;
  readonly sumMin: number;
  readonly lengthMin: number | null;
  readonly unaccountedMin: number | null;
  readonly problems: readonly RowProblem[];
  readonly questions: readonly RowQuestion[];
  /** Null where something can't be read or does not add up: then nothing is worked out either, never an old number. */
  readonly values: RowValues | null;
  readonly input: DayInput | null;
  readonly evaluation: DayEvaluation | null;
  readonly summary: DaySummary | null;
  /** Null where no reading governs. */
  readonly besideReading: BesideReading | null;
  readonly protectors: readonly RowProtector[];
  /** Loud work with nothing assigned for it. */
  readonly isBare: boolean;
  /** Another shift of the same day counts into it: the day is worked out when it is saved. */
  readonly hasOtherShift: boolean;
}

export type EvaluateRow = (row: RowDraft) => RowEvaluation;

/** A reading this far from what the tasks give is asked about, dB. As the issue of this screen has it. */
export const FAR_OFF_DB = 6;
/** A stay is far beyond the usual by both: a third more than the longest of a year, and half an hour. */
const FAR_BEYOND_SHARE = 4 / 3;
const FAR_BEYOND_MIN = 30;
const SAME_MIN = 1e-6;
const WHOLE_DAY_MIN = 1440;

/** The rules that a day is judged by: those of its date. */
export function rulesOf({ settings, date }: Pick<DayGridView, "settings" | "date">): {
  governing: RuleSetVersion;
  comparison: readonly RuleSetVersion[];
} {
  const governing = ruleSetVersion(settings.governingRuleSet, settings.ruleSetVersion);
  if (!governing) throw new RangeError(`no rule set ${settings.governingRuleSet}`);
  const comparison = settings.comparisonRuleSets.flatMap((key) => ruleSetInForce(key, date) ?? []);
  return { governing, comparison };
}

/** What a run is taken to have been made with until somebody says otherwise: as the last one, row by row. */
export function usualSetup(view: DayGridView, rows: readonly RowDraft[]): RunSetup | null {
  const last = rows.findLast((row) => row.isRunTouched && row.runSetup !== null)?.runSetup;
  if (last) {
    const further = last.further.map(({ settings }) => ({
      settings,
      cell: emptyCell("typed"),
      readingId: null,
    }));
    return { ...last, further, durationMin: null, covers: "shift" };
  }
  const instrument =
    view.instruments.find(({ kind, presets }) => kind === "dosimeter" && presets.length > 0) ??
    view.instruments.find(({ presets }) => presets.length > 0);
  const [settings] = instrument?.presets ?? [];
  if (!instrument || !settings) return null;
  return {
    instrumentId: instrument.id,
    settings,
    further: [],
    durationMin: null,
    covers: "shift",
  };
}

/**
 * Evaluates rows as the server will, each once: a row that has not changed since answers from memory, so that a paste
 * costs only the rows that it changed.
 */
export function createRowEvaluator(view: DayGridView): EvaluateRow {
  const { governing, comparison } = rulesOf(view);
  const tasks = new Map(view.tasks.map((task) => [task.id, task]));
  const models = new Map<string, ProtectorData>(view.models.map((model) => [model.modelId, model]));
  const gridRows = new Map(view.rows.map((row) => [row.worker.id, row]));
  const instruments = new Map(view.instruments.map((one) => [one.id, one]));
  const { wearFromDb, creditsActivePart, usesUncertainty } = view.settings;
  const context = { tasks, models, site: { wearFromDb, creditsActivePart, usesUncertainty } };
  const known = new WeakMap<RowDraft, RowEvaluation>();

  const startOf = rememberEach((time: string) => atLocalTime(view.date, time, view.crew.timeZone));

  function evaluate(row: RowDraft): RowEvaluation {
    const gridRow = gridRows.get(row.workerId);
    if (!gridRow) throw new RangeError("a row of somebody who is not in this crew");
    const times = timesOf(row, tasks);
    const hasOtherShift = gridRow.otherShifts.length > 0;
    const protectors = once(() =>
      protectorsOf(gridRow, tasks, models, times.tasks, context.site.wearFromDb),
    );
    const nothing = (problems: readonly RowProblem[]): RowEvaluation => ({
      row,
      ...times,
      problems,
      questions: [],
      values: null,
      input: null,
      evaluation: null,
      summary: null,
      besideReading: null,
      get protectors() {
        return protectors();
      },
      isBare: false,
      hasOtherShift,
    });
    if (row.isAbsent) {
      const problems = gridRow.saved ? [shiftSaved(gridRow.saved.shiftId)] : [];
      return nothing([...problems, ...refusals(row)]);
    }
    if (isElsewhere(row, gridRow)) return nothing([]);
    const problems = problemsOf(row, gridRow, times, startOf, tasks);
    const { start, lengthMin } = times;
    if (problems.length > 0 || start === null || lengthMin === null) {
      return nothing([...problems, ...refusals(row)]);
    }
    const unaccounted = unaccountedIn(row.cells.unaccounted);
    const input = once(() => {
      const readings = readingsOf(row, gridRow, lengthMin, instruments);
      const shift: EnteredShift = {
        id: "shift",
        lengthMin,
        tasks: times.tasks,
        unaccounted,
        readings,
      };
      return buildDayInput(gridRow.worker, view.date, [shift], gridRow.assignments, context);
    });
    const evaluation = once(() => evaluateDay(input(), governing, comparison));
    const summary = once(() => summarizeDay(input(), evaluation(), governing));
    const beside = once(() => besideReading(input(), evaluation(), governing));
    return {
      row,
      ...times,
      values: { localStart: start, lengthMin, tasks: times.tasks, unaccounted },
      problems: refusals(row),
      questions: questionsOf(row, gridRow, times, beside, tasks),
      get input() {
        return input();
      },
      get evaluation() {
        return hasOtherShift ? null : evaluation();
      },
      get summary() {
        return hasOtherShift ? null : summary();
      },
      get besideReading() {
        return hasOtherShift ? null : beside();
      },
      get protectors() {
        return protectors();
      },
      get isBare() {
        return input()
          .shifts.flatMap((one) => one.tasks)
          .some((task) => task.protection === null && isInNoise(task, wearFromDb));
      },
      hasOtherShift,
    };
  }

  return (row) => {
    let found = known.get(row);
    if (!found) {
      found = evaluate(row);
      known.set(row, found);
    }
    return found;
  };
}

interface Times {
  readonly start: string | null;
  readonly tasks: readonly ShiftTaskInput[];
  readonly sumMin: number;
  readonly lengthMin: number | null;
  readonly unaccountedMin: number | null;
}

function timesOf(row: RowDraft, tasks: ReadonlyMap<string, GridTask>): Times {
  const { cells } = row;
  const shared = numberIn(cells.worn);
  const entered: ShiftTaskInput[] = [];
  for (const taskId of tasks.keys()) {
    const durationMin = numberIn(cells[taskCell(taskId)]);
    if (durationMin === null || durationMin <= 0) continue;
    const own = numberIn(cells[wornCell(taskId)]);
    entered.push({
      taskId,
      durationMin,
      wornPct: own ?? shared,
      wornIsShiftWide: own === null && shared !== null,
    });
  }
  const sumMin = entered.reduce((sum, { durationMin }) => sum + durationMin, 0);
  const lengthMin = numberIn(cells.length);
  const start = typeof cells.start?.value === "string" ? cells.start.value : null;
  return {
    start,
    tasks: entered,
    sumMin,
    lengthMin,
    unaccountedMin: lengthMin === null ? null : lengthMin - sumMin,
  };
}

/** Worked out when somebody asks, and only then: most rows of a long grid are out of sight. */
function once<T>(make: () => T): () => T {
  let made: { value: T } | null = null;
  return () => {
    made ??= { value: make() };
    return made.value;
  };
}

function rememberEach<T>(make: (key: string) => T): (key: string) => T {
  const known = new Map<string, T>();
  return (key) => {
    const value = known.get(key) ?? make(key);
    known.set(key, value);
    return value;
  };
}

const shiftSaved = (shiftId: string): RowProblem => ({
  kind: "shift-saved",
  cell: "start",
  shiftId,
});

const CELL_OF_FIELD: Readonly<Record<string, CellId>> = {
  lengthMin: "length",
  unaccounted: "unaccounted",
  run: "reading",
};

const refusals = (row: RowDraft): RowProblem[] =>
  row.refused.map((issue) => ({
    kind: "refused",
    cell: CELL_OF_FIELD[String(issue.path[0])] ?? "start",
    issue,
  }));

function problemsOf(
  row: RowDraft,
  gridRow: GridRow,
  times: Times,
  startOf: (time: string) => LocalInstant,
  tasks: ReadonlyMap<string, GridTask>,
): RowProblem[] {
  const { cells } = row;
  const problems: RowProblem[] = [];
  for (const [id, cell] of Object.entries(cells) as [
    CellId,
    NonNullable<(typeof cells)[CellId]>,
  ][]) {
    if (cell.fault) problems.push({ kind: "fault", cell: id, fault: cell.fault });
  }
  const { start, lengthMin, sumMin } = times;
  if (start === null && !cells.start?.fault)
    problems.push({ kind: "start-missing", cell: "start" });
  if (lengthMin === null && !cells.length?.fault) {
    problems.push({ kind: "length-missing", cell: "length" });
  }
  if (start !== null) {
    const local = startOf(start);
    if (local.kind === "skipped")
      problems.push({ kind: "time-skipped", cell: "start", time: start });
    if (local.kind === "twice" && row.whichHour === null) {
      problems.push({ kind: "time-twice", cell: "start", time: start });
    }
  }
  if (lengthMin !== null) {
    if (lengthMin <= 0 || lengthMin > WHOLE_DAY_MIN) {
      problems.push({ kind: "length-out-of-range", cell: "length" });
    } else if (!Number.isInteger(lengthMin)) {
      problems.push({ kind: "not-whole-minutes", cell: "length" });
    } else if (lengthMin === WHOLE_DAY_MIN && !row.confirmsWholeDay) {
      problems.push({ kind: "whole-day", cell: "length" });
    }
    if (lengthMin > 0 && lengthMin <= WHOLE_DAY_MIN && sumMin > lengthMin + SAME_MIN) {
      const suspect = suspectTask(row, gridRow, times, tasks);
      problems.push({
        kind: "does-not-add-up",
        cell: suspect.cell,
        sumMin,
        lengthMin,
        overMin: sumMin - lengthMin,
        longest: suspect.longest,
      });
    }
  }
  if (row.isRunTouched) problems.push(...runProblems(row, gridRow));
  return problems;
}

function runProblems(row: RowDraft, gridRow: GridRow): RowProblem[] {
  if (row.runSetup === null) {
    return row.cells.reading?.value == null ? [] : [{ kind: "no-instrument", cell: "reading" }];
  }
  const faults = row.runSetup.further.flatMap(({ cell: { fault } }): RowProblem[] =>
    fault ? [{ kind: "fault", cell: "reading", fault }] : [],
  );
  const [stored] = gridRow.readings;
  return stored && faults.length === 0 && enteredReadings(row, gridRow).length === 0
    ? [{ kind: "run-emptied", cell: "reading", runId: stored.runId }]
    : faults;
}

/** Which task made the sum too long: the one furthest beyond its usual, else the longest that was typed. */
function suspectTask(
  row: RowDraft,
  { longestMin }: GridRow,
  { tasks: entered }: Times,
  tasks: ReadonlyMap<string, GridTask>,
): { cell: CellId; longest: { taskName: string; longestMin: number } | null } {
  let furthest: { taskId: string; beyondMin: number; longestMin: number } | null = null;
  for (const { taskId, durationMin } of entered) {
    const usual = longestMin[taskId];
    if (usual === undefined || durationMin <= usual) continue;
    const beyondMin = durationMin - usual;
    if (!furthest || beyondMin > furthest.beyondMin) {
      furthest = { taskId, beyondMin, longestMin: usual };
    }
  }
  if (furthest) {
    const taskName = tasks.get(furthest.taskId)?.name ?? "";
    return {
      cell: taskCell(furthest.taskId),
      longest: { taskName, longestMin: furthest.longestMin },
    };
  }
  const typed = entered.filter(({ taskId }) => row.cells[taskCell(taskId)]?.mark === "typed");
  const [longest] = (typed.length > 0 ? typed : [...entered]).sort(
    (a, b) => b.durationMin - a.durationMin,
  );
  return { cell: longest ? taskCell(longest.taskId) : "length", longest: null };
}

function questionsOf(
  row: RowDraft,
  gridRow: GridRow,
  times: Times,
  beside: () => BesideReading | null,
  tasks: ReadonlyMap<string, GridTask>,
): RowQuestion[] {
  const questions: RowQuestion[] = [];
  const answered = new Set(row.answered);
  for (const { taskId, durationMin } of times.tasks) {
    const longestMin = gridRow.longestMin[taskId];
    if (longestMin === undefined || row.cells[taskCell(taskId)]?.mark === "saved") continue;
    if (durationMin < longestMin * FAR_BEYOND_SHARE || durationMin < longestMin + FAR_BEYOND_MIN) {
      continue;
    }
    const key = `long-stay ${taskId} ${durationMin}`;
    const taskName = tasks.get(taskId)?.name ?? "";
    const cell = taskCell(taskId);
    questions.push({ kind: "long-stay", key, cell, taskName, durationMin, longestMin });
  }
  if (row.isRunTouched && settingsRows(row, gridRow).some(({ cell }) => cell?.mark === "typed")) {
    const found = beside();
    if (
      found?.readingDb != null &&
      found.tasksDb !== null &&
      found.gapDb !== null &&
      Math.abs(found.gapDb) >= FAR_OFF_DB
    ) {
      questions.push({
        kind: "far-off",
        key: `far-off ${found.readingDb} ${found.tasksDb}`,
        cell: "reading",
        readingDb: found.readingDb,
        tasksDb: found.tasksDb,
        tasksBound: found.tasksBound,
        gapDb: found.gapDb,
      });
    }
  }
  return questions.filter(({ key }) => !answered.has(key));
}

/** The readings of the day as they would stand after saving. */
function readingsOf(
  row: RowDraft,
  gridRow: GridRow,
  lengthMin: number | null,
  instruments: ReadonlyMap<string, DayGridView["instruments"][number]>,
): ReadingInput[] {
  const stored = gridRow.readings.map(
    ({
      readingId,
      runId,
      instrumentClass,
      instrumentId: _,
      runRevision: __,
      countedMin,
      ...facts
    }): ReadingInput => ({
      ...facts,
      durationMin: countedMin ?? facts.durationMin,
      id: readingId,
      runId,
      instrument: instrumentClass,
    }),
  );
  const setup = row.runSetup;
  if (!row.isRunTouched || !setup || lengthMin === null) return stored;
  const entered = enteredReadings(row, gridRow);
  if (entered.length === 0) return stored;
  const [run] = runOf(gridRow.readings);
  const instrument = instrumentClassOf(instruments.get(setup.instrumentId));
  return [
    ...entered.map(
      ({ facts, stored: replaced }, at): ReadingInput => ({
        ...facts,
        id: replaced?.readingId ?? `typed ${at}`,
        runId: run?.runId ?? "typed",
        durationMin: setup.durationMin ?? lengthMin,
        // Figures that nobody changed are still the history's, and leave out what it does.
        ...(replaced?.countedMin !== undefined &&
          replaced.averageDb === facts.averageDb &&
          replaced.dosePct === facts.dosePct && {
            durationMin: replaced.countedMin,
            leftOut: replaced.leftOut,
          }),
        covers: setup.covers,
        instrument,
        keptReason: run?.keptReason ?? null,
      }),
    ),
    ...stored.filter(({ runId }) => runId !== run?.runId),
  ];
}

const instrumentClassOf = (
  instrument: DayGridView["instruments"][number] | undefined,
): ReadingInput["instrument"] => {
  if (!instrument || instrument.kind === "dosimeter") return "dosimeter";
  return instrument.class === "1" ? "class-1-meter" : "class-2-meter";
};

/** What is worn in this day's loud tasks, the device of most minutes first. */
function protectorsOf(
  gridRow: GridRow,
  tasks: ReadonlyMap<string, GridTask>,
  models: ReadonlyMap<string, ProtectorData>,
  entered: readonly ShiftTaskInput[],
  wearFromDb: number,
): RowProtector[] {
  if (gridRow.assignments.length === 0) return [];
  const found = new Map<
    string,
    { name: string; taskNames: string[]; minutes: number; isEverywhere: boolean }
  >();
  for (const { taskId, durationMin } of entered) {
    const task = tasks.get(taskId);
    const assignment = task && assignmentFor(task, gridRow.assignments);
    if (!task || !assignment) continue;
    const isLoud =
      gridRow.worker.mustWear ||
      task.zone !== "none" ||
      (task.level !== null && task.level.levelDb >= wearFromDb);
    if (!isLoud) continue;
    const names = [assignment.innerModelId, assignment.outerModelId].flatMap((id) =>
      id === null ? [] : (models.get(id)?.name ?? []),
    );
    const name = names.join(" + ");
    const one = found.get(name) ?? {
      name,
      taskNames: [],
      minutes: 0,
      isEverywhere: assignment.taskId === null && assignment.areaId === null,
    };
    one.taskNames.push(task.name);
    one.minutes += durationMin;
    found.set(name, one);
  }
  return [...found.values()]
    .sort((a, b) => Number(b.isEverywhere) - Number(a.isEverywhere) || b.minutes - a.minutes)
    .map(({ name, taskNames, isEverywhere }) => ({ name, taskNames, isEverywhere }));
}

/** Tasks of the day in which the protector counts as worn, by task id. */
export function wornTaskIds(input: DayInput | null): ReadonlySet<string> {
  const tasks = input?.shifts.flatMap((shift) => shift.tasks) ?? [];
  return new Set(
    input ? tasks.filter((task) => countsAsWorn(task, input)).map(({ taskId }) => taskId) : [],
  );
}

/**
 * What some minutes without the protector would make of the day at the ear, in the worn task that is loudest outside;
 * null where nothing is worn or its wearing time is not known.
 */
export function withoutProtector(
  found: RowEvaluation,
  view: DayGridView,
  minutes: number,
): { taskName: string; atEarDb: number; atEarBound: LevelBound } | null {
  const { input, evaluation } = found;
  if (!input || !evaluation) return null;
  const worn = evaluation.tasks.filter(({ isWorn, wornPct }) => isWorn && wornPct !== null);
  const [loudest] = [...worn].sort((a, b) => (b.outsideDb ?? 0) - (a.outsideDb ?? 0));
  const timed = input.shifts.flatMap((shift) => shift.tasks);
  const task = timed.find(({ id }) => id === loudest?.timedTaskId);
  // A task shorter than that can't be bare for so long.
  if (!task || task.wornPct === null || task.durationMin < minutes) return null;
  const wornPct = Math.max(0, task.wornPct - (100 * minutes) / task.durationMin);
  const { governing } = rulesOf(view);
  const changed = withTasks(input, (one) => (one.id === task.id ? { ...one, wornPct } : one));
  const { atEarDb, atEarBound } = evaluateDay(changed, governing, []);
  return atEarDb === null ? null : { taskName: task.name, atEarDb, atEarBound };
}
