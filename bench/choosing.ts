import type { ExchangeLaw } from "../shared/acoustics/exchange-law";
import { lawOf } from "../shared/acoustics/exchange-law";
import { outsideCriterion } from "../shared/acoustics/outside-criterion";
import {
  type Offer,
  ProtectorChoice,
  type Wearer,
} from "../shared/acoustics/protection/choose-protector";
import type {
  AttenuationMethod,
  OctaveBandValues,
  RuleSetVersion,
  TaskLevel,
} from "../shared/acoustics/types";
import { ruleSetInForce } from "../shared/rule-sets";
import { title } from "./lib/measure";

/** Choosing for a large works: each worker's two noises under each model by each method that can govern. */
const WORKERS = 10_000;
const MODELS = 60;

const date = "2026-03-02";
const uk = ruleSetInForce("uk-2005", date)!;
const us = ruleSetInForce("us-general-industry", date)!;
const METHODS: readonly (readonly [AttenuationMethod, RuleSetVersion])[] = [
  ["octave-band", uk],
  ["hml", uk],
  ["snr", uk],
  ["slc80", uk],
  ["percentile", uk],
  ["us-single-number", us],
];

const bandsAt = (index: number, from: number): OctaveBandValues =>
  [0, 1, 2, 3, 4, 5, 6, 7].map(
    (band) => from + band * 2.5 + (index % 7),
  ) as unknown as OctaveBandValues;

const offers: Offer[] = Array.from({ length: MODELS }, (_, index) => ({
  inner: {
    modelId: `m${index}`,
    revisionId: null,
    name: `Model ${index}`,
    kind: index % 2 === 0 ? "earmuff" : "foam-plug",
    usRatingDb: 20 + (index % 12),
    snrDb: 22 + (index % 13),
    hDb: 28 + (index % 8),
    mDb: 22 + (index % 8),
    lDb: 14 + (index % 8),
    slc80Db: 20 + (index % 9),
    percentile: { mostDb: 18 + (index % 10), fewDb: 26 + (index % 10) },
    bands: {
      meanDb: bandsAt(index, 12),
      sdDb: [4, 4, 3, 3, 3, 3, 3, 4],
    },
    active: null,
  },
  outer: null,
  combinationBands: null,
  name: `Model ${index}`,
  worksWith: { helmet: null, glasses: index % 5 === 0 ? false : null, respirator: null },
  isArchived: false,
  stock: index % 3,
}));

const noise = (levelDb: number): TaskLevel => ({
  revisionId: null,
  metric: { kind: "steady" },
  levelDb,
  lcMinusLaDb: 2,
  octaveBandsDb: bandsAt(0, levelDb - 14),
  lasMaxDb: null,
  peak: null,
  samplesDb: [],
  instrument: null,
  grade: "task-level",
});

const wearers: Wearer[] = Array.from({ length: WORKERS }, (_, index) => ({
  noises: [
    { name: "Loud", level: noise(90 + (index % 15)), durationMin: 120 },
    { name: "Less loud", level: noise(86 + (index % 9)), durationMin: 300 },
  ],
  personalTargetDb: null,
  wornGear: index % 4 === 0 ? ["glasses"] : [],
  wornMin: 420,
  fits: new Map(),
}));

let sink = 0;

function choose(method: AttenuationMethod, ruleSet: RuleSetVersion): void {
  const rule = { ...ruleSet.protection, methods: [method] };
  const law: ExchangeLaw = { ...lawOf(outsideCriterion(ruleSet)), table: null, thresholdDb: null };
  const choice = new ProtectorChoice(offers, rule, law);
  for (const wearer of wearers) sink += choice.for(wearer)[0]!.wornDb ?? 0;
}

const A_DB = [-26.2, -16.1, -8.6, -3.2, 0, 1.2, 1, -1.1];
const lossOf = (alpha: number) =>
  offers.map(({ inner }) =>
    Float64Array.from(
      inner.bands!.meanDb,
      (meanDb, band) => 10 ** (-(meanDb! - alpha * inner.bands!.sdDb[band]!) / 10),
    ),
  );

/** The level at the ear, and the one with lower confidence, for each worker, noise and model; and the best of them. */
function addUp(method: AttenuationMethod): void {
  const [loss, lowLoss] = [lossOf(1), lossOf(1.64)];
  for (const { noises } of wearers) {
    const powers = noises.map(({ level }) =>
      Float64Array.from(
        level.octaveBandsDb!,
        (bandDb, band) => 10 ** ((bandDb! + A_DB[band]!) / 10),
      ),
    );
    let bestDb = Number.POSITIVE_INFINITY;
    for (let model = 0; model < MODELS; model += 1) {
      const { inner } = offers[model]!;
      let worstDb = Number.NEGATIVE_INFINITY;
      let sum = 0;
      for (const [place, { level, durationMin }] of noises.entries()) {
        if (method === "octave-band") {
          let atEar = 0;
          let low = 0;
          for (let band = 0; band < 8; band += 1) {
            const power = powers[place]![band]!;
            atEar += power * loss[model]![band]!;
            low += power * lowLoss[model]![band]!;
          }
          worstDb = Math.max(worstDb, 10 * Math.log10(atEar));
          sink += 10 * Math.log10(low);
        } else if (method === "us-single-number") {
          sum += durationMin * 2 ** ((level.levelDb - (inner.usRatingDb! - 7) - 90) / 5);
        } else {
          const reductionDb =
            method === "hml"
              ? inner.mDb! - ((inner.hDb! - inner.mDb!) / 4) * (level.lcMinusLaDb! - 2)
              : method === "snr"
                ? inner.snrDb! - level.lcMinusLaDb!
                : method === "slc80"
                  ? inner.slc80Db! - level.lcMinusLaDb!
                  : inner.percentile!.mostDb;
          worstDb = Math.max(worstDb, level.levelDb - reductionDb);
        }
      }
      if (method === "us-single-number") worstDb = 90 + 16.61 * Math.log10(sum / 480);
      bestDb = Math.min(bestDb, worstDb);
    }
    sink += bestDb;
  }
}

const seconds = (work: () => void): number => {
  const began = performance.now();
  work();
  return (performance.now() - began) / 1000;
};

title(`Choosing for ${WORKERS.toLocaleString("en")} workers among ${MODELS} models`);
let [oursAll, bareAll] = [0, 0];
for (const [method, ruleSet] of METHODS) {
  let [ours, bare] = [Number.POSITIVE_INFINITY, Number.POSITIVE_INFINITY];
  for (let round = 0; round < 3; round += 1) {
    ours = Math.min(
      ours,
      seconds(() => choose(method, ruleSet)),
    );
    bare = Math.min(
      bare,
      seconds(() => addUp(method)),
    );
  }
  oursAll += ours;
  bareAll += bare;
  console.log(
    `  ${method}: ${ours.toFixed(2)} s, every model ranked with its reason; bare loop of the same sums: ${bare.toFixed(2)} s; × ${(ours / bare).toFixed(1)}`,
  );
}
console.log(`  All methods: × ${(oursAll / bareAll).toFixed(1)}  (goal 3)`);
if (Number.isNaN(sink)) throw new Error("a level is no number");
