import { groupBy } from "../../server/lib/group-by";
import type { MeterSettings } from "../../shared/acoustics/types";
import type { ShiftTaskInput } from "../../shared/schemas/shift";
import { type DemoWorker, WORKERS } from "../demo/people";
import {
  AREAS,
  CREWS,
  type DemoCrew,
  type DemoTask,
  ENERGY_MEAN,
  JOBS,
  RECOMMENDED_DOSE,
  type SiteKey,
  TASKS,
  THRESHOLD_80,
  THRESHOLD_90,
} from "../demo/programme";
import type { DemoRun, Departure } from "../demo/story";
import { daysBetween, isAway, WORKDAYS_A_WEEK, workweek } from "./calendar";
import { chance } from "./chance";
import { type Demo, known, taskKey } from "./programme";
import { type DatedStory, departureKey, isToldOf } from "./story";

export type PlannedTask = ShiftTaskInput & { name: string };

export interface PlannedShift {
  worker: DemoWorker;
  workerId: string;
  crew: DemoCrew;
  date: string;
  /** Of its crew; 0 is today. */
  workdaysAgo: number;
  lengthMin: number;
  tasks: PlannedTask[];
  note: string | null;
  run: DemoRun | null;
  /** The story tells of it. */
  isTold: boolean;
}

export interface PlannedDay {
  shifts: PlannedShift[];
  absent: { worker: DemoWorker; workerId: string; crew: DemoCrew; date: string }[];
}

const STEP_MIN = 5;
const toStep = (minutes: number) => Math.max(STEP_MIN, Math.round(minutes / STEP_MIN) * STEP_MIN);

/** What the crews of a site did on a date: the usual with small differences, and where the story says so another thing. */
export function planDay(demo: Demo, story: DatedStory, site: SiteKey, date: string): PlannedDay {
  const calendar = demo.calendar(site);
  const ago = daysBetween(date, calendar.today);
  const day: PlannedDay = { shifts: [], absent: [] };
  for (const worker of WORKERS) {
    const own = CREWS.find(({ name }) => name === worker.crew)!;
    if (own.site !== site || !isEmployed(demo, worker, date)) continue;
    const departure = story.departures.get(departureKey(worker.number, date));
    const crew = departure?.onLoan
      ? CREWS.find(({ name }) => name === departure.onLoan!.crew)!
      : own;
    if (!calendar.works(crew, date)) continue;
    const workerId = known(demo.workers, worker.number).id;
    const workdaysAgo = calendar.workdaysAgo(crew, date);
    const isOff =
      !departure &&
      !isToldOf(story, worker.number, date) &&
      isAway(worker.number, date, workdaysAgo);
    if (departure?.isAbsent || isOff) day.absent.push({ worker, workerId, crew, date });
    else day.shifts.push(planShift(demo, { worker, workerId, crew, date, workdaysAgo }, departure));
  }
  addRoutineRuns(day, ago);
  return day;
}

function isEmployed(demo: Demo, { number }: DemoWorker, date: string): boolean {
  const { hiredOn, leftOn } = known(demo.workers, number);
  return date >= hiredOn && (leftOn === null || date <= leftOn);
}

function planShift(
  demo: Demo,
  at: Pick<PlannedShift, "worker" | "workerId" | "crew" | "date" | "workdaysAgo">,
  departure: Departure | undefined,
): PlannedShift {
  const { worker, crew, workdaysAgo } = at;
  const job = JOBS.find(({ name }) => name === (departure?.onLoan?.job ?? worker.job))!;
  const isLonger =
    departure?.minutes === undefined && chance(worker.number, "longer", workdaysAgo) < 0.04;
  const lengthMin = crew.usualLengthMin + (isLonger ? 60 : 0);
  const minutes = departure?.minutes
    ? filledUp(job, lengthMin, departure.minutes)
    : varied(job, lengthMin, worker.number, workdaysAgo);
  const rest = departure?.leavesOutMin ?? 0;
  const tasks = Object.entries(minutes).map(([name, given]) => {
    const durationMin = name === job.rest ? given - rest : given;
    return {
      name,
      taskId: known(demo.tasks, taskKey(crew.site, name)).id,
      durationMin,
      wornPct: worn(crew.site, name, worker.number, workdaysAgo, departure),
      wornIsShiftWide: false,
    };
  });
  return {
    ...at,
    lengthMin,
    tasks,
    note: departure?.note ?? null,
    run: departure?.run ?? null,
    isTold: departure !== undefined,
  };
}

/** The nominal day with each task up to a tenth shorter or longer; what is left goes to the job's quiet task. */
function varied(
  job: (typeof JOBS)[number],
  lengthMin: number,
  number: string,
  workdaysAgo: number,
): Record<string, number> {
  const minutes: Record<string, number> = {};
  let left = lengthMin;
  for (const [name, nominal] of Object.entries(job.tasks)) {
    if (name === job.rest) continue;
    const isShort = nominal < 30;
    minutes[name] = isShort
      ? nominal
      : toStep(nominal * (0.9 + 0.2 * chance(number, name, workdaysAgo)));
    left -= minutes[name];
  }
  return Object.fromEntries(
    Object.keys(job.tasks).map((name) => [name, name === job.rest ? left : minutes[name]!]),
  );
}

/** What the story gives, with the job's quiet task for the rest of the shift. */
function filledUp(
  { rest }: (typeof JOBS)[number],
  lengthMin: number,
  given: Readonly<Record<string, number>>,
): Record<string, number> {
  const left = lengthMin - Object.values(given).reduce((sum, minutes) => sum + minutes, 0);
  return left > 0 ? { ...given, [rest]: left } : given;
}

const tasksByKey = new Map(TASKS.map((task) => [taskKey(task.site, task.name), task]));
const taskOf = (site: SiteKey, name: string): DemoTask => known(tasksByKey, taskKey(site, name));
const isInNoise = ({ levelDb, area }: DemoTask) =>
  levelDb >= 85 || AREAS.some(({ name, zone }) => name === area && zone !== "none");

/** Worn throughout where it is loudest; elsewhere now and then off for a minute. Nobody is asked about quiet tasks. */
function worn(
  site: SiteKey,
  name: string,
  number: string,
  workdaysAgo: number,
  departure: Departure | undefined,
): number | null {
  const task = taskOf(site, name);
  if (!isInNoise(task) || departure?.worn === null) return null;
  const told = departure?.worn?.[name];
  if (told !== undefined) return told;
  return task.levelDb >= 95 ? 100 : 100 - Math.floor(3 * chance(number, "worn", name, workdaysAgo));
}

/** A run a week and crew, on somebody of whom the story has nothing else to tell. */
function addRoutineRuns({ shifts }: PlannedDay, ago: number): void {
  if (ago < 2) return;
  for (const [crew, ofCrew] of groupBy(shifts, ({ crew: { name } }) => name)) {
    const { workdaysAgo } = ofCrew[0]!;
    const week = workweek(workdaysAgo);
    if (workdaysAgo % WORKDAYS_A_WEEK !== Math.floor(WORKDAYS_A_WEEK * chance(crew, "run", week)))
      continue;
    const able = ofCrew.filter((shift) => !shift.isTold);
    const chosen = able[Math.floor(able.length * chance(crew, "wearer", week))];
    if (chosen) chosen.run = routineRun(chosen, ago);
  }
}

/**
 * The lates wear the dosimeter with the white band, and nobody checks it when it comes back: that is what its failed
 * calibration casts doubt on.
 */
const UNCHECKED = {
  crew: "Fettling lates",
  instrument: "Dosimeter, white band",
  fromDaysAgo: 54,
  toDaysAgo: 18,
};

function routineRun(shift: PlannedShift, ago: number): DemoRun {
  const { site, name } = shift.crew;
  const isUnchecked =
    name === UNCHECKED.crew && ago <= UNCHECKED.fromDaysAgo && ago >= UNCHECKED.toDaysAgo;
  const drift = Math.round(3 * chance(shift.worker.number, "drift", shift.workdaysAgo)) / 10;
  const deviationDb = 2 * chance(shift.worker.number, "reading", shift.workdaysAgo) - 1;
  return {
    instrument: isUnchecked
      ? UNCHECKED.instrument
      : site === "ostmere"
        ? "Dosimeter, blue band"
        : "Dosimeter, red band",
    checks: [114.0, isUnchecked ? null : 114.0 - drift],
    readings:
      site === "ostmere"
        ? [{ settings: ENERGY_MEAN, ...measured(shift, ENERGY_MEAN, deviationDb) }]
        : [THRESHOLD_80, THRESHOLD_90, RECOMMENDED_DOSE].map((settings) => ({
            settings,
            ...measured(shift, settings, deviationDb),
          })),
  };
}

/** An energy mean of blows and bursts lies above the 5 dB mean of the same minutes, which lies below that of a truck. */
export const UNSTEADY_DB = 3;

/** What a dosimeter shows that has been through these tasks, a little off as instruments and days are. */
function measured(
  shift: PlannedShift,
  settings: MeterSettings,
  deviationDb: number,
): { averageDb?: number; dosePct?: number; lasMaxDb?: number; peakDb?: number } {
  const isEnergy = settings.exchangeRateDb === 3;
  const named = shift.tasks.map(({ name, durationMin }) => ({
    durationMin,
    task: taskOf(shift.crew.site, name),
  }));
  const loudest = Math.max(...named.map(({ task }) => task.peakDb));
  let sum = 0;
  for (const { durationMin, task } of named) {
    const offset =
      task.metric.kind === "lavg" && isEnergy
        ? UNSTEADY_DB
        : task.metric.kind === "laeq" && !isEnergy
          ? -UNSTEADY_DB
          : 0;
    const levelDb = task.levelDb + offset + deviationDb;
    if (settings.thresholdDb !== null && levelDb < settings.thresholdDb) continue;
    sum +=
      durationMin * (isEnergy ? 10 ** (levelDb / 10) : 2 ** (levelDb / settings.exchangeRateDb));
  }
  const tenth = (value: number) => Math.round(value * 10) / 10;
  if (settings.thresholdDb === null) {
    return {
      averageDb: tenth(10 * Math.log10(sum / shift.lengthMin)),
      peakDb: tenth(loudest - 2 * Math.abs(deviationDb)),
    };
  }
  const allowed = isEnergy
    ? 10 ** (settings.criterionLevelDb / 10)
    : 2 ** (settings.criterionLevelDb / settings.exchangeRateDb);
  const slowest = Math.max(...named.map(({ task }) => task.lasMaxDb ?? task.levelDb));
  return {
    dosePct: tenth((100 * sum) / (480 * allowed)),
    lasMaxDb: tenth(slowest - Math.abs(deviationDb)),
    peakDb: tenth(loudest - 2 * Math.abs(deviationDb)),
  };
}
