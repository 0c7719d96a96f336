import { describe, expect, test } from "vitest";
import { everyMethod, LARGE_SPREAD_DB } from "../../shared/acoustics/protection/every-method";
import type { OctaveBandValues, Protection } from "../../shared/acoustics/types";
import { buildLevel, buildProtection, buildProtector, ruleSet } from "./build-day";

const FLAT: OctaveBandValues = [90, 90, 90, 90, 90, 90, 90, 90];
const same = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
const ALL = {
  hDb: 30,
  mDb: 24,
  lDb: 16,
  snrDb: 26,
  usRatingDb: 25,
  slc80Db: 24,
  percentile: { mostDb: 20, fewDb: 30 },
  bands: { meanDb: same(30), sdDb: same(5) },
} as const;
const EU = ruleSet("eu-2003-10-ec").protection;
const UK = ruleSet("uk-2005").protection;
const US = ruleSet("us-general-industry").protection;
const NOISE = buildLevel(100, { lcMinusLaDb: 2, octaveBandsDb: FLAT });
const levelsOf = (protection: Protection, rule = EU, noise = NOISE) =>
  everyMethod(noise, protection, rule).methods.map(
    ({ method, protectedPct, derating, reachedBy, atEarDb }) =>
      [`${method}${protectedPct ?? derating ?? reachedBy ?? ""}`, atEarDb] as const,
  );

test("100 dB(A) with LC − LA of 2 behind one muff, every method by hand (computed)", () => {
  const found = Object.fromEntries(levelsOf(buildProtection(ALL, { ownFitDb: 15 })));
  const byHand = {
    // A flat attenuation of 30 − 5α takes as much off any spectrum; α from ISO 4869-2.
    "octave-band80": 100 - 30 + 0.84 * 5,
    "octave-band84": 75,
    "octave-band95": 100 - 30 + 1.64 * 5,
    "octave-band98": 80,
    hml: 76,
    snr: 100 + 2 - 26,
    // All off the C-weighted level of 102, as the rule's own way is: 25, half of it, and 0.75 of it for a muff.
    "us-single-numbernone": 102 - 25,
    "us-single-numberhalf": 102 - 12.5,
    "us-single-numberby-type": 102 - 18.75,
    percentilemost: 80,
    percentilefew: 70,
    slc80: 78,
    "own-fit": 85,
  };
  expect(Object.keys(found)).toEqual(Object.keys(byHand));
  for (const [name, db] of Object.entries(byHand)) expect(found[name]).toBeCloseTo(db, 9);
});

test("a national allowance comes off every label, never off an own fit, and off no derating in its place", () => {
  const protection = buildProtection(ALL, { ownFitDb: 15 });
  const plain = levelsOf(protection);
  const bare = ["own-fit", "us-single-numberhalf", "us-single-numberby-type"];
  for (const [index, [name, db]] of levelsOf(protection, UK).entries())
    expect(db).toBeCloseTo(plain[index]![1]! + (bare.includes(name) ? 0 : 4), 9);
  // A rule that has both says so, and its own way keeps both: 102 − 12.5 + 4, off LA for it is derated: (25 − 7)/2.
  const both = levelsOf(protection, { ...UK, derating: "half" });
  expect(Object.fromEntries(both)["us-single-numberhalf"]).toBeCloseTo(100 - 9 + 4, 9);
});

describe("the US number comes off one level in all its ways, and each row says which", () => {
  const usRows = (rule: typeof US, noise = NOISE) =>
    everyMethod(noise, buildProtection(ALL), rule)
      .methods.filter(({ method }) => method === "us-single-number")
      .map(({ derating, startsFrom, atEarDb }) => [derating, startsFrom, atEarDb]);

  test("off the C-weighted level where it is stated and the rule derates nothing", () => {
    expect(usRows(US)).toEqual([
      ["none", "lc", 77],
      ["half", "lc", 89.5],
      ["by-type", "lc", 83.25],
    ]);
  });

  // 25 − 7, half of it, and 0.75 · 25 − 7 off 100.
  const offA = [
    ["none", "la", 82],
    ["half", "la", 91],
    ["by-type", "la", 88.25],
  ];
  test("off the A-weighted level without a C-weighted one, or where the rule derates", () => {
    expect(usRows(US, buildLevel(100))).toEqual(offA);
    expect(usRows({ ...US, derating: "by-type" })).toEqual(offA);
  });

  test("the other methods say theirs", () => {
    const { methods } = everyMethod(NOISE, buildProtection(ALL), EU);
    expect(
      Object.fromEntries(methods.map(({ method, startsFrom }) => [method, startsFrom])),
    ).toEqual({
      "octave-band": "bands",
      hml: "la",
      snr: "lc",
      "us-single-number": "lc",
      percentile: "la",
      slc80: "lc",
      "own-fit": "la",
    });
  });
});

describe("which one governs", () => {
  const governing = (protection: Protection, rule = EU) =>
    everyMethod(NOISE, protection, rule)
      .methods.filter(({ governs }) => governs)
      .map(({ method, protectedPct, derating }) => [method, protectedPct, derating]);

  test("the rule's first method in the rule's own way, and only that", () => {
    expect(governing(buildProtection(ALL))).toEqual([["octave-band", 84, null]]);
    expect(governing(buildProtection({ ...ALL, bands: null }))).toEqual([["hml", null, null]]);
    expect(governing(buildProtection(ALL), US)).toEqual([["us-single-number", null, "none"]]);
    expect(governing(buildProtection(ALL), { ...US, derating: "half" })).toEqual([
      ["us-single-number", null, "half"],
    ]);
  });

  test("an own fit where it replaces; none where the data allow none", () => {
    expect(governing(buildProtection(ALL, { ownFitDb: 15 }))).toEqual([["own-fit", null, null]]);
    expect(governing(buildProtection({}))).toEqual([]);
  });

  // ISO 4869-2 7: M is what comes off at LC − LA = 2 dB, less in a deeper noise; that an own fit is held against it too is common practice, no source.
  test("in a noise past LC − LA of 2 an own fit that would replace only lowers", () => {
    const at = (lcMinusLaDb: number, ownFitDb: number, data = {}) =>
      everyMethod(
        buildLevel(100, { lcMinusLaDb }),
        buildProtection({ hDb: 30, mDb: 24, lDb: 16, ...data }, { ownFitDb }),
        EU,
      ).methods.find(({ governs }) => governs);
    expect(at(2, 27)).toMatchObject({ method: "own-fit", atEarDb: 73 });
    expect(at(2.1, 27)).toMatchObject({ method: "hml" });
    // M − (M − L)/8 × (LC − LA − 2) = 24 − 6.
    expect(at(8, 27)?.atEarDb).toBeCloseTo(82, 9);
    expect(at(8, 12)).toMatchObject({ method: "own-fit", atEarDb: 88 });
    // Without a label that says something of it, by how much less is not known.
    expect(at(8, 27, { hDb: null })).toBeUndefined();
    // Of a noise whose LC is not known nothing is held against it.
    const unknown = everyMethod(buildLevel(100), buildProtection(ALL, { ownFitDb: 27 }), EU);
    expect(unknown.methods.find(({ governs }) => governs)?.method).toBe("own-fit");
  });
});

describe("what can't be said has its reason", () => {
  const reasons = (protection: Protection, noise = NOISE) =>
    Object.fromEntries(
      everyMethod(noise, protection, EU).methods.map(({ method, reason }) => [method, reason]),
    );

  test("no data, no spectrum, no C-weighted level, past the range of HML", () => {
    expect(new Set(Object.values(reasons(buildProtection({}))))).toEqual(
      new Set(["no-attenuation-data"]),
    );
    expect(reasons(buildProtection(ALL), buildLevel(100))).toMatchObject({
      "octave-band": "no-spectrum",
      hml: "no-c-weighted-level",
      snr: "no-c-weighted-level",
      percentile: null,
    });
    expect(reasons(buildProtection(ALL), buildLevel(100, { lcMinusLaDb: 11 })).hml).toBe(
      "lc-la-out-of-range",
    );
  });

  test("two together without test data", () => {
    const two = buildProtection(ALL, { outer: buildProtector(ALL), ownFitDb: 20 });
    expect(reasons(two)).toMatchObject({
      "octave-band": "combination-not-tested",
      snr: "combination-not-tested",
      percentile: "combination-not-tested",
      "own-fit": "combination-not-tested",
    });
  });
});

test("the spread is that of the methods as the rule computes them; past 5 dB it is large (common practice, no source)", () => {
  // HML and SNR 76, US 77, SLC80 78, percentile 80, bands 75.
  expect(everyMethod(NOISE, buildProtection(ALL), EU).spreadDb).toBeCloseTo(5, 9);
  const own = everyMethod(NOISE, buildProtection(ALL, { ownFitDb: 15 }), EU);
  expect(own.spreadDb).toBeCloseTo(10, 9);
  expect(own.isSpreadLarge).toBe(true);
  const two = everyMethod(NOISE, buildProtection({ snrDb: 26, slc80Db: 24 }), EU);
  expect(two).toMatchObject({ spreadDb: 2, isSpreadLarge: false });
  expect(everyMethod(NOISE, buildProtection({ snrDb: 26 }), EU).spreadDb).toBeNull();
  expect(LARGE_SPREAD_DB).toBe(5);
});
