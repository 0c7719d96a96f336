import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { ENERGY_LAW, type ExchangeLaw, lawOf } from "../../shared/acoustics/exchange-law";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { governingMethod } from "../../shared/acoustics/protection/at-ear";
import {
  lcMinusLaDb,
  methodResult,
  reductions,
} from "../../shared/acoustics/protection/attenuation";
import {
  type Offer,
  ProtectorChoice,
  type Wearer,
} from "../../shared/acoustics/protection/choose-protector";
import type { ActivePart, OctaveBandValues, ProtectorData } from "../../shared/acoustics/types";
import { besideScaleDb, RULE_SETS } from "../../shared/rule-sets";
import { buildLevel, buildProtector, lavg5, ruleSet, STEADY } from "./build-day";

const EU = ruleSet("eu-2003-10-ec").protection;
const US = ruleSet("us-general-industry");
const US_LAW: ExchangeLaw = { ...lawOf(outsideCriterion(US)), thresholdDb: null, table: null };
const ANY_GEAR = { helmet: null, glasses: null, respirator: null };

function offer(modelId: string, data: Partial<ProtectorData>, fields: Partial<Offer> = {}): Offer {
  return {
    inner: buildProtector({ modelId, ...data }),
    outer: null,
    combinationBands: null,
    name: modelId,
    worksWith: ANY_GEAR,
    isArchived: false,
    stock: 5,
    ...fields,
  };
}

function wearer(levelDb: number, fields: Partial<Wearer> = {}): Wearer {
  return {
    noises: [{ name: "Mill", level: buildLevel(levelDb, { lcMinusLaDb: 0 }), durationMin: 480 }],
    personalTargetDb: null,
    wornGear: [],
    wornMin: 480,
    fits: new Map(),
    ...fields,
  };
}

const order = (offers: Offer[], who: Wearer) =>
  new ProtectorChoice(offers, EU, ENERGY_LAW)
    .for(who)
    .map(({ modelId, decidedBy }) => [modelId, decidedBy]);

/** EN 458 against 85 (memory): 100 dB asks for 15 to 30, and 20 to 25 is good. */
describe("the order, one comparison after the other", () => {
  test("adequacy: good before just enough and strong, then too much, then too little", () => {
    const found = order(
      [
        offer("little", { snrDb: 12 }),
        offer("much", { snrDb: 33 }),
        offer("just", { snrDb: 17 }),
        offer("good", { snrDb: 22 }),
      ],
      wearer(100),
    );
    expect(found).toEqual([
      ["good", "first"],
      ["just", "adequacy"],
      ["much", "adequacy"],
      ["little", "adequacy"],
    ]);
  });

  test("what gear, the archive or missing data exclude comes last and says why", () => {
    const noHelmet = { worksWith: { ...ANY_GEAR, helmet: false } };
    const found = new ProtectorChoice(
      [
        offer("muff", { snrDb: 22 }, noHelmet),
        offer("old", { snrDb: 22 }, { isArchived: true }),
        offer("bare", {}),
        offer("plug", { snrDb: 12 }),
      ],
      EU,
      ENERGY_LAW,
    ).for(wearer(100, { wornGear: ["glasses", "helmet"] }));
    expect(found[0]).toMatchObject({ modelId: "plug", word: "too-little", excludedBy: null });
    expect(found[1]).toMatchObject({ decidedBy: "compatibility" });
    expect(
      Object.fromEntries(found.map(({ modelId, excludedBy }) => [modelId, excludedBy])),
    ).toEqual({
      plug: null,
      muff: { code: "gear", gear: "helmet" },
      old: { code: "archived", gear: null },
      bare: { code: "no-data", gear: null },
    });
  });

  test("margin, not rounded; where all are too much the least of it", () => {
    expect(order([offer("a", { snrDb: 21 }), offer("b", { snrDb: 24 })], wearer(100))).toEqual([
      ["b", "first"],
      ["a", "margin"],
    ]);
    expect(order([offer("a", { snrDb: 37 }), offer("b", { snrDb: 32 })], wearer(100))).toEqual([
      ["b", "first"],
      ["a", "least-margin"],
    ]);
    expect(order([offer("a", { snrDb: 22.2 }), offer("b", { snrDb: 22.7 })], wearer(100))).toEqual([
      ["b", "first"],
      ["a", "margin"],
    ]);
  });

  test("the margin is that of lower confidence: mean − 1.64 deviations", () => {
    const flat = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
    const noises = [
      { name: "Mill", level: buildLevel(100, { octaveBandsDb: flat(90) }), durationMin: 480 },
    ];
    const found = new ProtectorChoice(
      [
        offer("wide", { bands: { meanDb: flat(30), sdDb: flat(8) } }),
        offer("narrow", { bands: { meanDb: flat(24), sdDb: flat(2) } }),
      ],
      EU,
      ENERGY_LAW,
    ).for(wearer(100, { noises }));
    // Both take 22 dB off by the rule; 95 % of users get 16.88 and 20.72.
    expect(found.map(({ modelId }) => modelId)).toEqual(["narrow", "wide"]);
    expect(found[0]!.marginDb).toBeCloseTo(5.72, 9);
    expect(found[1]!.marginDb).toBeCloseTo(1.88, 9);
    expect(found[1]!.decidedBy).toBe("margin");
  });

  test("an own fit is compared with labels for the same share of users", () => {
    const flat = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
    const noises = [
      { name: "Mill", level: buildLevel(100, { octaveBandsDb: flat(90) }), durationMin: 480 },
    ];
    const banded = offer("banded", { bands: { meanDb: flat(24), sdDb: flat(2) } });
    // A mean of 26 with u = 4 is 22 for 84 %, and 26 − 1.645 · 4 = 19.42 for 95 %; the label is 20.72 for 95 %.
    const own = { parDb: 22, atRuleShareDb: 22, atLowerShareDb: 19.42 };
    const fits = new Map([
      ["own", { ...own, hasPassed: true, needDb: 15, testedOn: "2026-01-05" }],
    ]);
    const inBands = new ProtectorChoice([banded, offer("own", { snrDb: 30 })], EU, ENERGY_LAW).for(
      wearer(100, { noises, fits }),
    );
    expect(inBands.map(({ modelId, decidedBy }) => [modelId, decidedBy])).toEqual([
      ["banded", "first"],
      ["own", "margin"],
    ]);
    expect(inBands[1]!.marginDb).toBeCloseTo(85 - (100 - 19.42), 9);
    expect(inBands[1]!.marginSharePct).toBe(95);
    expect(inBands[1]!.lastFit).toEqual({
      parDb: 22,
      hasPassed: true,
      needDb: 15,
      testedOn: "2026-01-05",
    });

    // Stated for 95 %: behind a single number, which is for 84 %, it is not put because of that.
    const strict = { parDb: 20, atRuleShareDb: 23, atLowerShareDb: 20 };
    const byNumber = new ProtectorChoice(
      [offer("single", { snrDb: 22 }), offer("own", { snrDb: 30 })],
      EU,
      ENERGY_LAW,
    ).for(
      wearer(100, {
        fits: new Map([["own", { ...strict, hasPassed: true, needDb: 15, testedOn: "" }]]),
      }),
    );
    expect(byNumber.map(({ modelId }) => modelId)).toEqual(["own", "single"]);
    expect(byNumber[0]!.marginDb).toBeCloseTo(8, 9);
    expect(byNumber[0]!.marginSharePct).toBeNull();
  });

  test("own fit, then battery, stock and name", () => {
    const active = (batteryMin: number | null): ActivePart => ({
      attenuationDb: null,
      delayS: null,
      gain: null,
      maximumDb: null,
      bandwidthHz: null,
      saturatesAboveDb: null,
      batteryMin,
    });
    const fits = new Map([
      ["failed", { parDb: 22, hasPassed: false, needDb: 15, testedOn: "2026-01-05" }],
      ["passed", { parDb: 22, hasPassed: true, needDb: 15, testedOn: "2026-01-05" }],
    ]);
    const found = order(
      [
        offer("failed", { snrDb: 22 }),
        offer("z", { snrDb: 22 }),
        offer("none-left", { snrDb: 22 }, { stock: 0 }),
        offer("not-counted", { snrDb: 22 }, { stock: null }),
        offer("short", { snrDb: 22, active: active(300) }),
        offer("unknown", { snrDb: 22, active: active(null) }),
        offer("lasts", { snrDb: 22, active: active(600) }),
        offer("passed", { snrDb: 22 }),
      ],
      wearer(100, { fits }),
    );
    expect(found).toEqual([
      ["passed", "first"],
      ["lasts", "fit"],
      ["z", "name"],
      ["not-counted", "stock"],
      ["none-left", "stock"],
      ["unknown", "battery"],
      ["short", "battery"],
      ["failed", "fit"],
    ]);
  });
});

/** EN 458 against 85 (memory): 16 − 4 dB leave 88, and the active part takes another 10 off in every band. */
describe("an active part", () => {
  const flat = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
  const active: ActivePart = {
    attenuationDb: flat(10),
    delayS: null,
    gain: null,
    maximumDb: null,
    bandwidthHz: null,
    saturatesAboveDb: null,
    batteryMin: null,
  };
  const level = buildLevel(100, { lcMinusLaDb: 0, octaveBandsDb: flat(93) });
  const noises = [{ name: "Mill", level, durationMin: 480 }];
  const bands = (meanDb: number) => ({ meanDb: flat(meanDb), sdDb: flat(4) });
  const offers = [
    offer("active", { bands: bands(16), active }),
    offer("passive", { bands: bands(20) }),
  ];
  const ranked = (creditedModelIds?: ReadonlySet<string>) =>
    new ProtectorChoice(offers, EU, ENERGY_LAW).for(wearer(100, { noises, creditedModelIds }));

  test("is shown beside, and nothing rests on it, where it isn't credited on its wearer", () => {
    const found = ranked();
    expect(found.map(({ modelId, word }) => [modelId, word])).toEqual([
      ["passive", "just-enough"],
      ["active", "too-little"],
    ]);
    expect(found[1]).toMatchObject({ isActiveCredited: false });
    expect(found[1]!.wornDb).toBeCloseTo(88, 9);
    expect(found[1]!.wornActiveDb).toBeCloseTo(78, 9);
    expect(found[1]!.marginDb).toBeCloseTo(85 - (100 - (16 - 1.64 * 4)), 9);
    expect(found[0]!.wornActiveDb).toBeNull();
  });

  test("decides where it is, as in the day's verdict; the level with it off stays beside", () => {
    const found = ranked(new Set(["active"]));
    expect(found.map(({ modelId, word }) => [modelId, word])).toEqual([
      ["active", "good"],
      ["passive", "just-enough"],
    ]);
    expect(found[0]).toMatchObject({ isActiveCredited: true });
    expect(found[0]!.wornDb).toBeCloseTo(88, 9);
    expect(found[0]!.wornActiveDb).toBeCloseTo(78, 9);
    expect(found[0]!.marginDb).toBeCloseTo(85 - (100 - (16 - 1.64 * 4) - 10), 9);
  });

  test("never decides Appendix B's word, which is of the part off", () => {
    const muff = offer("active", { usRatingDb: 19, bands: bands(16), active });
    const [found] = new ProtectorChoice([muff], US.protection, US_LAW).for(
      wearer(100, { noises, creditedModelIds: new Set(["active"]) }),
    );
    expect(found).toMatchObject({ isActiveCredited: false, word: "enough" });
    // The rating off the C-weighted level, which is 100 too.
    expect(found!.twaDb).toBeCloseTo(81, 9);
    expect(found!.wornActiveDb).toBeCloseTo(71, 9);
  });
});

describe("several noises", () => {
  const noises = [100, 88].map((db) => ({
    name: `${db}`,
    level: buildLevel(db, { lcMinusLaDb: 0 }),
    durationMin: 240,
  }));

  test("EN 458: too little somewhere before too much somewhere, and the margin of the worst", () => {
    const [found] = new ProtectorChoice([offer("a", { snrDb: 22 })], EU, ENERGY_LAW).for(
      wearer(0, { noises }),
    );
    // 78 in one, 66 in the other: too much there.
    expect(found).toMatchObject({ word: "too-much", wornDb: 66, wornIn: "88", twaDb: null });
    expect(found!.marginDb).toBeCloseTo(7, 9);
  });

  test("Appendix B: the TWA of them all under the protector (computed)", () => {
    const steady = noises.map(({ name, level, durationMin }) => ({
      name,
      level: { ...level, metric: STEADY, lcMinusLaDb: null },
      durationMin,
    }));
    const [found] = new ProtectorChoice(
      [offer("a", { usRatingDb: 19 })],
      US.protection,
      US_LAW,
    ).for(wearer(0, { noises: steady }));
    const twa = 5 * Math.log2(0.5 * 2 ** (88 / 5) + 0.5 * 2 ** (76 / 5));
    expect(found!.twaDb).toBeCloseTo(twa, 9);
    // While worn in the louder one: 100 − (19 − 7).
    expect(found).toMatchObject({ word: "enough", wornDb: 88, wornIn: "100" });
    expect(found).toMatchObject({ isWornMost: false, isTwaMost: false });
    expect(found!.marginDb).toBeCloseTo(90 - twa, 9);
  });

  test("of what is too much somewhere the one that may be too little elsewhere comes last", () => {
    const flat = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
    const spectra = [
      { name: "Loud", level: buildLevel(107, { octaveBandsDb: flat(100) }), durationMin: 60 },
      { name: "Quiet", level: buildLevel(92, { octaveBandsDb: flat(85) }), durationMin: 60 },
    ];
    const banded = (name: string, meanDb: number, sdDb: number) =>
      offer(name, { bands: { meanDb: flat(meanDb), sdDb: flat(sdDb) } });
    // Flat bands of 100 dB are 107.0 dB(A): 24 off leaves 83, and 22.1 off with lower confidence 84.9; the wide one
    // leaves 83 by the rule as well, and 86.2 with lower confidence.
    const found = new ProtectorChoice(
      [banded("a wide", 29, 5), banded("narrow", 27, 3), banded("far", 36, 2)],
      EU,
      ENERGY_LAW,
    ).for(wearer(0, { noises: spectra }));
    expect(found.map(({ name, word }) => [name, word])).toEqual([
      ["narrow", "too-much"],
      ["far", "too-much"],
      ["a wide", "too-much"],
    ]);
    expect(found[0]!.marginDb).toBeGreaterThanOrEqual(0);
    expect(found[2]!.marginDb).toBeLessThan(0);
  });

  test("none that asks for one: nothing to say, and nothing that its data would have to say", () => {
    const [found] = new ProtectorChoice([offer("a", { snrDb: 22 })], EU, ENERGY_LAW).for(
      wearer(0, { noises: [] }),
    );
    expect(found).toMatchObject({ word: null, wornDb: null, excludedBy: null });
    const [inHelmet] = new ProtectorChoice(
      [
        offer(
          "a",
          { snrDb: 22 },
          { worksWith: { helmet: false, glasses: null, respirator: null } },
        ),
      ],
      EU,
      ENERGY_LAW,
    ).for(wearer(0, { noises: [], wornGear: ["helmet"] }));
    expect(inHelmet).toMatchObject({ excludedBy: { code: "gear", gear: "helmet" } });
  });
});

test("two together are offered by their test data, and say which outer one", () => {
  const flat = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
  const two = offer(
    "plug",
    { snrDb: 20 },
    {
      outer: buildProtector({ modelId: "muff", snrDb: 20 }),
      combinationBands: { meanDb: flat(34), sdDb: flat(2) },
      name: "plug and muff",
    },
  );
  const noises = [
    { name: "Mill", level: buildLevel(112, { octaveBandsDb: flat(102) }), durationMin: 60 },
  ];
  const choice = new ProtectorChoice([two, offer("plug", { snrDb: 20 })], EU, ENERGY_LAW);
  const found = choice.for(wearer(0, { noises }));
  expect(found[0]).toMatchObject({ modelId: "plug", outerModelId: "muff", word: "good" });
  expect(found[0]!.wornDb).toBeCloseTo(80, 9);
});

test("property: every level is the one that the day's engine has, for any data and any rule", () => {
  const db = fc.double({ min: 8, max: 40, noNaN: true });
  const band = fc.tuple(db, db, db, db, db, db, db, db);
  const sd = fc.double({ min: 1, max: 6, noNaN: true });
  const sds = fc.tuple(sd, sd, sd, sd, sd, sd, sd, sd);
  const maybe = <T>(of: fc.Arbitrary<T>) => fc.option(of, { nil: null });
  fc.assert(
    fc.property(
      fc.record({
        levelDb: fc.double({ min: 86, max: 115, noNaN: true }),
        lcMinusLaDb: maybe(fc.double({ min: -3, max: 11, noNaN: true })),
        octaveBandsDb: maybe(
          fc.tuple(
            maybe(fc.double({ min: 60, max: 110, noNaN: true })),
            ...Array.from({ length: 7 }, () => fc.double({ min: 60, max: 110, noNaN: true })),
          ) as unknown as fc.Arbitrary<OctaveBandValues>,
        ),
      }),
      fc.record({
        bands: maybe(fc.record({ meanDb: band, sdDb: sds })),
        snrDb: maybe(db),
        usRatingDb: maybe(fc.integer({ min: 5, max: 33 })),
        slc80Db: maybe(db),
        hml: maybe(fc.tuple(db, db, db)),
      }),
      maybe(db),
      maybe(fc.record({ meanDb: band, sdDb: sds })),
      fc.boolean(),
      fc.constantFrom(...RULE_SETS),
      (noise, { hml, ...label }, parDb, combinationBands, isDouble, { protection: rule }) => {
        const level = buildLevel(noise.levelDb, noise);
        const [hDb, mDb, lDb] = hml ?? [null, null, null];
        const inner = buildProtector({ modelId: "a", ...label, hDb, mDb, lDb });
        const outer = isDouble ? buildProtector({ modelId: "b", usRatingDb: 20 }) : null;
        const fits = new Map(
          parDb === null
            ? []
            : [["a", { parDb, hasPassed: null, needDb: 15, testedOn: "2026-01-05" }]],
        );
        const [found] = new ProtectorChoice(
          [offer("a", {}, { inner, outer, combinationBands })],
          rule,
          rule.adequacy === "appendix-b" ? US_LAW : ENERGY_LAW,
        ).for(wearer(0, { noises: [{ name: "Mill", level, durationMin: 480 }], fits }));
        const protection = {
          assignmentId: null,
          inner,
          outer,
          combinationBands,
          ownFitDb: parDb,
          activeCheckPassed: false,
        };
        const { atEarDb } = governingMethod(
          reductions(level, protection, rule).map((one) => methodResult(level.levelDb, one)),
          rule,
          lcMinusLaDb(level),
        );
        if (atEarDb === null) expect(found!.excludedBy?.code).toBe("no-data");
        else expect(found!.wornDb).toBeCloseTo(atEarDb, 9);
      },
    ),
    { numRuns: 1000 },
  );
});

// An average that left out what lay under 90 dB: each minute may weigh as much as one at 90 more (1910.95 App. A: 5 dB halve
// the time), so 97 may have been 5 log2(2^(97/5) + 2^(90/5)) = 99.3. The number less 7 takes 18 off.
test("of a noise known as a bound the shift is the most that it can be", () => {
  const level = buildLevel(97, { metric: lavg5(90) });
  const [found] = new ProtectorChoice(
    [offer("r25", { usRatingDb: 25 })],
    US.protection,
    US_LAW,
  ).for({ ...wearer(97), noises: [{ name: "Mill", level, durationMin: 480 }] });
  expect(found!.twaDb).toBeCloseTo(5 * Math.log2(2 ** (97 / 5) + 2 ** (90 / 5)) - 18, 9);
  expect(found!.twaDb).toBeCloseTo(81.3, 1);
  expect(found!.marginDb).toBeCloseTo(90 - found!.twaDb!, 9);
  // Over eight hours the one task while worn is the shift.
  expect(found!.wornDb).toBeCloseTo(found!.twaDb!, 9);
  expect(found).toMatchObject({ isWornMost: true, isTwaMost: true });
});

describe("a rule that has no word for too much: EN 458's stands beside it", () => {
  // 95 dB for the shift; the US number less 7 comes off: 24 leaves 78, 31 leaves 71, 33 leaves 69 and 35 leaves 67. By
  // EN 458 against the action value of 85 what is less than 70 is too much (memory).
  const offers = [24, 31, 33, 35].map((usRatingDb) => offer(`r${usRatingDb}`, { usRatingDb }));
  const noises = [{ name: "Mill", level: buildLevel(95), durationMin: 480 }];
  const ranked = (these: Offer[], scaleDb: number | null) =>
    new ProtectorChoice(these, US.protection, US_LAW, scaleDb)
      .for({ ...wearer(95), noises })
      .map(({ modelId, word, scaleWord, decidedBy }) => [modelId, word, scaleWord, decidedBy]);

  test("among what is enough, what is too much by it comes after what is not, the least of it first", () => {
    expect(besideScaleDb(US)).toBe(85);
    expect(ranked(offers, besideScaleDb(US))).toEqual([
      ["r31", "enough", "strong-side", "first"],
      ["r24", "enough", "good", "margin"],
      ["r33", "enough", "too-much", "overprotection"],
      ["r35", "enough", "too-much", "least-margin"],
    ]);
  });

  test("the label's number less 7 stands beside where Appendix B governs, and nowhere else", () => {
    const beside = (rule: typeof US) =>
      new ProtectorChoice(
        [offer("r24", { usRatingDb: 24 }), offer("r5", { usRatingDb: 5 })],
        rule.protection,
        US_LAW,
      )
        .for({ ...wearer(95), noises })
        .map(({ modelId, labelLess7Db }) => [modelId, labelLess7Db]);
    expect(beside(US).toSorted()).toEqual([
      ["r24", 17],
      ["r5", 0],
    ]);
    expect(
      beside({ ...US, protection: { ...US.protection, adequacy: "en-458" } }).map(([, db]) => db),
    ).toEqual([null, null]);
  });

  // 104 dB for an hour: the US number less 7 leaves 86 with 25, which EN 458 calls too little over 85; with 31 80.
  // By Appendix B both are enough: a TWA of 90 may reach the ear (29 CFR 1910.95 App. B). The desk is bare, and below the
  // threshold of 80 it adds nothing to the shift; the packing at 82 does: 60 min of 80 and 240 of 82 are 80.1.
  test("too little in one task comes after what is not; what is bare is not worn, and adds to the shift", () => {
    const loud = { name: "Blow-down", level: buildLevel(104), durationMin: 60 };
    const bare = { name: "Packing", level: buildLevel(82), durationMin: 240, isBare: true };
    const found = new ProtectorChoice(
      [offer("r25", { usRatingDb: 25 }), offer("r31", { usRatingDb: 31 })],
      US.protection,
      US_LAW,
      85,
    ).for({ ...wearer(104), noises: [loud, bare] });
    expect(
      found.map(({ modelId, word, scaleWord, scaleIn, decidedBy }) => [
        modelId,
        word,
        scaleWord,
        scaleIn,
        decidedBy,
      ]),
    ).toEqual([
      ["r31", "enough", "good", "Blow-down", "first"],
      ["r25", "enough", "too-little", "Blow-down", "underprotection"],
    ]);
    const dose = (60 * 2 ** ((80 - 90) / 5) + 240 * 2 ** ((82 - 90) / 5)) / 480;
    // 16.61 as the rule prints it is 5 / lg 2, rounded.
    expect(found[0]?.twaDb).toBeCloseTo(90 + (5 / Math.log10(2)) * Math.log10(dose), 9);
  });

  test("too little stays behind all of them", () => {
    const weak = offer("r9", { usRatingDb: 9 });
    expect(ranked([weak, ...offers.slice(2)], 85).at(-1)).toEqual([
      "r9",
      "too-little",
      "too-little",
      "adequacy",
    ]);
  });

  test("a rule that has the scale, or no word at all, asks for none", () => {
    for (const key of ["eu-2003-10-ec", "uk-2005", "niosh-rel"] as const)
      expect(besideScaleDb(ruleSet(key))).toBeNull();
    expect(ranked(offers, null)[0]).toEqual(["r35", "enough", null, "first"]);
  });
});
