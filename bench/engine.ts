import { evaluateDay } from "../shared/acoustics/day";
import type { DayInput, TimedTask } from "../shared/acoustics/types";
import { buildWorking } from "../shared/acoustics/working";
import { ruleSetInForce } from "../shared/rule-sets";
import { title } from "./lib/measure";

/** Four tasks, three rule sets: what a row of a day's entry is evaluated with on every key. */
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

function dayOf(index: number): DayInput {
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
      protection: {
        assignmentId: null,
        inner: muff,
        outer: null,
        combinationBands: null,
        ownFitDb: null,
        activeCheckPassed: false,
      },
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
        unaccounted: { how: "unknown" },
        readings: [],
      },
    ],
  };
}

const days = Array.from({ length: 500 }, (_, index) => dayOf(index));
const ruleSets = [governing, ...comparison];
/** One power per task and criterion outside, as many at the ear, and a logarithm per line: nothing can do with less. */
const criteria = ruleSets
  .flatMap((ruleSet) => ruleSet.criteria)
  .filter(({ quantity }) => quantity === "lex-8h" || quantity === "dose");

let sink = 0;
function bare(day: DayInput): void {
  for (const { exchangeRateDb, thresholdDb } of criteria) {
    const slope = exchangeRateDb === null ? 10 : exchangeRateDb / Math.log10(2);
    let [outside, atEar] = [0, 0];
    for (const { durationMin, level } of day.shifts[0]!.tasks) {
      const levelDb = level!.levelDb;
      if (thresholdDb === null || levelDb >= thresholdDb)
        outside += durationMin * 10 ** (levelDb / slope);
      const worn = 10 ** ((levelDb - 20) / slope);
      atEar += durationMin * (0.95 * worn + 0.05 * 10 ** (levelDb / slope));
    }
    sink += slope * Math.log10(outside / 480) + slope * Math.log10(atEar / 480);
  }
}

function perSecond(work: (day: DayInput) => void): number {
  const forMs = 1500;
  for (const day of days) work(day);
  let done = 0;
  const began = performance.now();
  while (performance.now() - began < forMs) {
    for (const day of days) work(day);
    done += days.length;
  }
  return (1000 * done) / (performance.now() - began);
}

title("Engine: a day of four tasks under three rule sets");
const loop = perSecond(bare);
const core = perSecond((day) => {
  sink += evaluateDay(day, governing, comparison).outsideDb ?? 0;
});
const whole = perSecond((day) => {
  const evaluation = evaluateDay(day, governing, comparison);
  sink += buildWorking(day, governing, comparison, evaluation) ? 1 : 0;
});
if (Number.isNaN(sink)) throw new Error("a level is no number");
const figure = (rate: number) => `${Math.round(rate).toLocaleString("en")}/s`;
console.log(
  `  bare loop of the same powers and logarithms (${criteria.length} criteria): ${figure(loop)}`,
);
console.log(
  `  the engine, with verdicts, protector and reasons: ${figure(core)}; × ${(loop / core).toFixed(1)} of the loop  (goal 3 for its numeric core)`,
);
console.log(`  with workings built: ${figure(whole)}; × ${(loop / whole).toFixed(1)} of the loop`);
