import {
  type ChannelKind,
  type DoseSettings,
  evaluateHistory,
  type HistoryChannel,
  runningDose,
} from "../shared/acoustics/history";
import { title } from "./lib/measure";

/** A shift of one value a second under twelve settings, against a bare loop of the same powers and logarithms. */
const COUNT = 28_800;
const settings: DoseSettings[] = [3, 4, 5].flatMap((exchangeRateDb) =>
  [null, 80, 85, 90].map((thresholdDb) => ({ criterionLevelDb: 90, exchangeRateDb, thresholdDb })),
);

/** Machine noise with quiet in between, the same in every run. */
const levelsDb = Float64Array.from({ length: COUNT }, (_, second) => {
  const swing = 8 * Math.sin(second / 7) + 4 * Math.sin(second / 1.3);
  return (second % 1_800 < 1_300 ? 91 : 72) + swing;
});
const channel = (kind: ChannelKind): HistoryChannel => ({
  kind,
  levels: Int16Array.from(levelsDb, (db) => Math.round(100 * db)),
});

let sink = 0;
function bareLoop(): void {
  for (const { criterionLevelDb, exchangeRateDb, thresholdDb } of settings) {
    // A dose by energy goes by tens, as 2 to the power of its level over 10 lg 2.
    const isEnergy = exchangeRateDb === 3 && thresholdDb === null;
    const rateDb = isEnergy ? 10 * Math.log10(2) : exchangeRateDb;
    let sum = 0;
    for (let index = 0; index < COUNT; index++) {
      const level = levelsDb[index]!;
      if (thresholdDb === null || level >= thresholdDb)
        sum += 2 ** ((level - criterionLevelDb) / rateDb);
    }
    sink += Math.log10(sum);
  }
}

const slow = [channel("las"), channel("laeq")];
const means = [channel("laeq")];
const tasks = Array.from({ length: 8 }, (_, place) => ({
  id: `${place}`,
  kind: "task" as const,
  fromIndex: place * 3_600,
  toIndex: (place + 1) * 3_600,
}));
const works: readonly (readonly [string, () => void])[] = [
  ["bare loop", bareLoop],
  ["exact, from slow levels and LAeq", () => take(evaluateHistory(slow, 1, [], settings))],
  ["the same with eight tasks", () => take(evaluateHistory(slow, 1, tasks, settings))],
  ["upper bounds from LAeq alone", () => take(evaluateHistory(means, 1, [], settings))],
  [
    "running dose, exact, 1,000 points",
    () => {
      sink += runningDose(slow, 1, [], settings, 1_000).endsS[0]!;
    },
  ],
];

function take(evaluation: ReturnType<typeof evaluateHistory>): void {
  sink += evaluation.counted.doses[0]?.dosePct ?? 0;
}

/** The best of several rounds of each in turn, so that whatever else the machine does falls on all alike. */
const best = works.map(() => Number.POSITIVE_INFINITY);
for (let round = 0; round < 25; round++) {
  for (const [place, [, work]] of works.entries()) {
    const began = performance.now();
    work();
    best[place] = Math.min(best[place]!, performance.now() - began);
  }
}

title("A time history of 28,800 values under twelve settings (goal: within × 3 of the bare loop)");
for (const [place, [name]] of works.entries())
  console.log(
    `  ${name}: ${best[place]!.toFixed(2)} ms, × ${(best[place]! / best[0]!).toFixed(2)}`,
  );
if (!Number.isFinite(sink)) throw new Error("Nothing was measured");
