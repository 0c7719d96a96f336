import { solveTimetable } from "../server/timetables/solve-timetable";
import { brokenBy, demandsOf, type TimetableProblem } from "../shared/planning/timetable";
import { title } from "./lib/measure";

/** A shift of 8 h for a large shop: a day's limit of 87 dB, tasks from quiet to far above it. */
const PEOPLE = 40;
const SLOTS = 32;
const LEVELS_DB = [101, 98, 96, 95, 93, 92, 90, 88, 86, 84, 80, 76];
const PLACES = [3, 4, 3, 4, 3, 4, 3, 4, 3, 2, 2, 2];
const REST_DB = 70;
const LIMIT_DB = 87;
/** What the issue asks for, s. */
const GOAL_S = 10;

const slotShare = (levelDb: number) => (1 / SLOTS) * 10 ** ((levelDb - LIMIT_DB) / 10);

/** Numbers from 0 to 1, the same in every run. */
function dice(seed: number): () => number {
  let state = seed;
  return () => {
    state = (Math.imul(state, 1103515245) + 12345) >>> 0;
    return (state >>> 8) / 0x1000000;
  };
}

function shop(seed: number): TimetableProblem {
  const roll = dice(seed);
  return {
    slots: SLOTS,
    mostShare: 1,
    restShare: new Array<number>(PEOPLE).fill(slotShare(REST_DB)),
    share: Array.from({ length: PEOPLE }, () => {
      const taken = 11 + 2 * Math.floor(roll() * 4);
      return LEVELS_DB.map((levelDb) => slotShare(levelDb - (levelDb >= 85 ? taken : 0)));
    }),
    tasks: PLACES.map((people, task) => ({
      staffing:
        task % 4 === 3
          ? [
              { from: 0, to: 16, people },
              { from: 20, to: SLOTS, people },
            ]
          : [{ from: 0, to: SLOTS, people }],
      isQualified: Array.from({ length: PEOPLE }, () => roll() < 0.6),
      longestStay: task < 4 ? 4 : task < 8 ? 8 : null,
      longestTotal: task < 2 ? 8 : null,
    })),
  };
}

title(`Timetable for ${PEOPLE} people × ${LEVELS_DB.length} tasks × ${SLOTS} slots`);
const pct = (share: number) => `${(100 * share).toFixed(2)} %`;
const seconds = (spentMs: number) => `${(spentMs / 1000).toFixed(1)} s`;
for (const seed of [1, 2, 3]) {
  const problem = shop(seed);
  const began = performance.now();
  const answer = await solveTimetable(problem);
  const spentMs = performance.now() - began;
  if (answer.kind !== "timetable") throw new Error(`shop ${seed}: ${answer.kind}`);
  if (brokenBy(problem, answer.table, demandsOf(problem)).length > 0)
    throw new Error(`shop ${seed}: the table breaks what was asked`);
  const gap = answer.largest / answer.bound - 1;
  console.log(
    `  shop ${seed}: ${seconds(spentMs)}, ${(spentMs / 1000 / GOAL_S).toFixed(2)} of the ${GOAL_S} s that it may take; largest dose ${pct(answer.largest)}, none can be below ${pct(answer.bound)}: gap ${pct(gap)}`,
  );
}
const tooMuch = { ...shop(1), mostShare: 0.1 };
const began = performance.now();
const answer = await solveTimetable(tooMuch);
console.log(
  `  a limit that can't be kept to: ${answer.kind} in ${seconds(performance.now() - began)}${
    answer.kind === "contradiction"
      ? `, ${answer.demands.length} of ${demandsOf(tooMuch).length} demands, ${answer.isSmallest ? "each needed" : "not proved that each is needed"}`
      : ""
  }`,
);
