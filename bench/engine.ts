import { evaluateDay } from "../shared/acoustics/day";
import type { DayInput, TimedTask } from "../shared/acoustics/types";
import { buildWorking } from "../shared/acoustics/working";
import { ruleSetInForce } from "../shared/rule-sets";
import { title } from "./lib/measure";

/**
 * Four tasks, three rule sets: what a row of a day's entry is evaluated with on every key. Run as one bundle, as the
 * client has it.
 */
const date = "2026-03-02";
const governing = ruleSetInForce("eu-2003-10-ec", date)!;
const comparison = ["us-general-industry", "niosh-rel"].map((key) => ruleSetInForce(key, date)!);
const muff = {
  modelId: "m",
  revisionId: "r",
  name: "Plain muff",
  kind: "earmuff",
  usRatingDb: 23,
  snrDb: 28,
  hDb: 32,
  mDb: 26,
  lDb: 18,
  slc80Db: 24,
  bands: null,
  active: null,
} as const;

function dayOf(index: number, isProtected: boolean): DayInput {
  const tasks = [96, 91, 84, 72].map(
    (levelDb, place): TimedTask => ({
      id: `${place}`,
      taskId: `${place}`,
      name: "Task",
      durationMin: 100 + ((index + place) % 20),
      zone: "none",
      wornPct: 95,
      wornIsShiftWide: false,
      level: {
        revisionId: null,
        metric: { kind: "steady" },
        levelDb: levelDb + (index % 10) / 10,
        lcMinusLaDb: 2,
        octaveBandsDb: null,
        lasMaxDb: null,
        peak: null,
        samplesDb: [],
        instrument: null,
        grade: "task-level",
      },
      protection: isProtected
        ? {
            assignmentId: null,
            inner: muff,
            outer: null,
            combinationBands: null,
            ownFitDb: null,
            activeCheckPassed: false,
          }
        : null,
    }),
  );
  return {
    workerId: "w",
    date,
    mustWear: false,
    personalTargetDb: null,
    site: { wearFromDb: 85, creditsActivePart: false, usesUncertainty: false },
    shifts: [
      {
        id: "s",
        revisionId: null,
        lengthMin: 480,
        tasks,
        unaccounted: { how: "like-the-rest" },
        readings: [],
      },
    ],
  };
}

const daysOf = (isProtected: boolean) =>
  Array.from({ length: 500 }, (_, index) => dayOf(index, isProtected));
const ruleSets = [governing, ...comparison];
const criteria = ruleSets
  .flatMap((ruleSet) => ruleSet.criteria)
  .filter(({ quantity }) => quantity === "lex-8h" || quantity === "dose");

let sink = 0;
/** A power for each task under each criterion, and a logarithm for each of their levels. */
function addUp(day: DayInput): void {
  for (const { exchangeRateDb, thresholdDb } of criteria) {
    const slope = exchangeRateDb === null ? 10 : exchangeRateDb / Math.log10(2);
    let outside = 0;
    for (const { durationMin, level } of day.shifts[0]!.tasks) {
      const { levelDb } = level!;
      if (thresholdDb === null || levelDb >= thresholdDb)
        outside += durationMin * 10 ** (levelDb / slope);
    }
    sink += slope * Math.log10(outside / 480);
  }
}

/** The same again for what a protector leaves, and for the part of the time that it is worn. */
function addUpAtEar(day: DayInput): void {
  addUp(day);
  for (const { exchangeRateDb } of criteria) {
    const slope = exchangeRateDb === null ? 10 : exchangeRateDb / Math.log10(2);
    let atEar = 0;
    for (const { durationMin, level, wornPct } of day.shifts[0]!.tasks) {
      const { levelDb } = level!;
      const worn = wornPct! / 100;
      const whileWorn = 10 ** ((levelDb - 20) / slope);
      atEar += durationMin * (worn * whileWorn + (1 - worn) * 10 ** (levelDb / slope));
    }
    sink += slope * Math.log10(atEar / 480);
  }
}

/** The best of several short runs of each in turn, so that whatever else the machine does falls on all alike. */
function perSecond(works: readonly ((day: DayInput) => void)[], days: readonly DayInput[]) {
  const best = works.map(() => 0);
  for (let round = 0; round < 6; round += 1) {
    for (const [place, work] of works.entries()) {
      let done = 0;
      const began = performance.now();
      while (performance.now() - began < 250) {
        for (const day of days) work(day);
        done += days.length;
      }
      best[place] = Math.max(best[place]!, (1000 * done) / (performance.now() - began));
    }
  }
  return best as [number, number, number];
}

const evaluate = (day: DayInput): void => {
  sink += evaluateDay(day, governing, comparison).outsideDb ?? 0;
};
const evaluateWithWorking = (day: DayInput): void => {
  const evaluation = evaluateDay(day, governing, comparison);
  sink += buildWorking(day, governing, comparison, evaluation) ? 1 : 0;
};

const figure = (rate: number) => `${Math.round(rate).toLocaleString("en")}/s`;
function compare(name: string, bare: (day: DayInput) => void, days: DayInput[], goal = ""): void {
  const [loop, core, whole] = perSecond([bare, evaluate, evaluateWithWorking], days);
  console.log(
    `  ${name}: ${figure(core)}; bare loop of the same powers and logarithms: ${figure(loop)}; × ${(loop / core).toFixed(1)}${goal}; with workings built: ${figure(whole)}, × ${(loop / whole).toFixed(1)}`,
  );
}

title(`Engine: a day of four tasks under three rule sets (${criteria.length} criteria)`);
compare("Numeric core, no protectors", addUp, daysOf(false), "  (goal 3)");
compare("Whole days, a protector in every task", addUpAtEar, daysOf(true));
if (Number.isNaN(sink)) throw new Error("a level is no number");
