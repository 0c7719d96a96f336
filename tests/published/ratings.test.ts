import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  hmlOfBandsDb,
  lcMinusLaOfSpectrumDb,
  levelBehindBandsDb,
} from "../../shared/acoustics/protection/octave-band";
import {
  australianClass,
  compareRatings,
  perSubjectRatings,
  pooledRatings,
  roundedUsRating,
  usRatingOfLabelDb,
} from "../../shared/acoustics/protection/ratings";
import { hmlReductionDb } from "../../shared/acoustics/protection/single-number";
import type { OctaveBandValues } from "../../shared/acoustics/types";
import { buildProtector } from "./build-day";
import "../setup/printed";

const same = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];

/** 40 CFR 211.207, figure 2: the sample data of steps 6 and 7 (read). */
const SAMPLE = {
  meanDb: [21, 22, 23, 29, 41, 43, 47, 41, 36],
  sdDb: [3.7, 3.3, 3.8, 4.7, 3.3, 3.3, 3.4, 6.1, 6.5],
};

describe("40 CFR 211.207, figure 2 (read)", () => {
  test("the sample data give 19.8 dB, printed on the label as 20", () => {
    expect(usRatingOfLabelDb(SAMPLE)).toAgreeWithPrinted("19.8");
    expect(roundedUsRating(usRatingOfLabelDb(SAMPLE))).toBe(20);
  });

  test("step 8 of the sample adds up to 85.116: 107.9 less that less 3 is 19.784, not 19.838 (computed)", () => {
    expect(usRatingOfLabelDb(SAMPLE)).toAgreeWithPrinted("19.784");
  });

  test("step 3 is the constant 107.9 dB(C): without a protector against 106.98 dB(A), less 3 dB (computed)", () => {
    const nothing = { meanDb: Array(9).fill(0), sdDb: Array(9).fill(0) };
    // 83.9, 91.4, 96.8, 100, 101.2, 101, 98.9 dB(A), added up.
    expect(usRatingOfLabelDb(nothing)).toAgreeWithPrinted("-2.085");
  });

  test.each([
    [19.5, 19],
    [20.5, 20],
    [19.51, 20],
    [19.49, 19],
  ])("step 9: %d dB goes to %d", (db, onLabel) => {
    expect(roundedUsRating(db)).toBe(onLabel);
  });

  test("it needs its own test frequencies: octave bands alone don't give it", () => {
    expect(() => usRatingOfLabelDb({ meanDb: [1, 2, 3, 4, 5, 6, 7, 8], sdDb: [] })).toThrow(
      RangeError,
    );
    const octaves = buildProtector({ usRatingDb: 20, bands: { meanDb: same(25), sdDb: same(3) } });
    expect(compareRatings(octaves).find(({ rating }) => rating === "us")).toMatchObject({
      labelDb: 20,
      recomputedDb: null,
      differenceDb: null,
      isAtOdds: false,
    });
  });
});

describe("ISO 4869-2, 1994 pooled and 2018 per subject (the later from memory)", () => {
  test("subjects who are all alike have no deviation: both editions agree", () => {
    const subject: OctaveBandValues = [12, 14, 19, 27, 33, 35, 36, 36];
    const each = perSubjectRatings([subject, subject, subject]);
    const pooled = pooledRatings({ meanDb: subject, sdDb: same(0) });
    for (const rating of ["hDb", "mDb", "lDb", "snrDb"] as const)
      expect(each[rating]).toBeCloseTo(pooled[rating], 9);
  });

  test("flat subjects of 20 and 30 dB: mean 25, deviation 7.07 of SNR and of every band alike (computed)", () => {
    const each = perSubjectRatings([same(20), same(30)]);
    const pooled = pooledRatings({ meanDb: same(25), sdDb: same(Math.sqrt(50)) });
    expect(each.snrDb - pooled.snrDb).toBeCloseTo(0, 9);
    const flat25 = pooledRatings({ meanDb: same(25), sdDb: same(0) });
    expect(flat25.snrDb - each.snrDb).toBeCloseTo(Math.sqrt(50), 9);
  });

  test("subjects good in different bands: pooling by band counts their deviations at once and gives less", () => {
    const low: OctaveBandValues = [20, 22, 25, 27, 24, 26, 28, 28];
    const high: OctaveBandValues = [12, 14, 19, 27, 32, 36, 38, 38];
    const mean = low.map((db, band) => (db! + high[band]!) / 2) as unknown as OctaveBandValues;
    const sd = low.map(
      (db, band) => Math.abs(db! - high[band]!) / Math.SQRT2,
    ) as unknown as OctaveBandValues;
    expect(perSubjectRatings([low, high]).snrDb).toBeGreaterThan(
      pooledRatings({ meanDb: mean, sdDb: sd }).snrDb,
    );
  });

  test("one subject has no deviation and no rating", () => {
    expect(() => perSubjectRatings([same(20)])).toThrow(RangeError);
  });

  test("subjects come before means and deviations", () => {
    const data = buildProtector({
      snrDb: 25,
      bands: { meanDb: same(40), sdDb: same(1) },
      subjectsDb: [same(20), same(30)],
    });
    expect(compareRatings(data).find(({ rating }) => rating === "snr")).toMatchObject({
      by: "per-subject",
      isAtOdds: true,
    });
  });
});

/** LA by band of the eight reference noises, ISO 4869-2 Table 2 (memory and verified, see hearing-protectors.test.ts). */
const REFERENCE_A: readonly (readonly number[])[] = [
  [51.4, 62.6, 70.8, 81.0, 90.4, 96.2, 94.7, 92.3],
  [59.5, 68.9, 78.3, 84.3, 92.8, 96.3, 94.0, 90.0],
  [59.8, 71.1, 80.8, 88.0, 95.0, 94.4, 94.1, 89.0],
  [65.4, 77.2, 84.5, 89.8, 95.5, 94.3, 92.5, 88.8],
  [65.3, 77.4, 86.5, 92.5, 96.4, 93.0, 90.4, 83.7],
  [70.7, 82.0, 89.3, 93.3, 95.6, 93.0, 90.1, 83.0],
  [75.6, 84.2, 90.1, 93.6, 96.2, 91.3, 87.9, 81.9],
  [77.6, 88.0, 93.4, 93.8, 94.2, 91.4, 87.9, 79.9],
];
const A = [-26.2, -16.1, -8.6, -3.2, 0, 1.2, 1.0, -1.1];
const REFERENCE = REFERENCE_A.map(
  (noise) => noise.map((db, band) => db - A[band]!) as unknown as OctaveBandValues,
);

test("property: HML and the octave bands agree to a decibel on the noises that HML was derived from", () => {
  fc.assert(
    fc.property(
      fc.double({ min: 3, max: 25, noNaN: true }),
      fc.array(fc.double({ min: 0, max: 5, noNaN: true }), { minLength: 7, maxLength: 7 }),
      (first, rises) => {
        const loss: number[] = [first];
        for (const rise of rises) loss.push(loss[loss.length - 1]! + rise);
        const lossDb = loss as unknown as OctaveBandValues;
        const { hDb, mDb, lDb } = hmlOfBandsDb(lossDb);
        for (const noise of REFERENCE) {
          const byBands = 100 - levelBehindBandsDb(noise, lossDb);
          const byHml = hmlReductionDb(hDb, mDb, lDb, lcMinusLaOfSpectrumDb(noise))!;
          expect(Math.abs(byHml - byBands)).toBeLessThan(1);
        }
      },
    ),
  );
});

describe("AS/NZS 1270 (classes from memory)", () => {
  test("SLC80 is what the label says, whatever the bands", () => {
    const bands = { meanDb: same(30), sdDb: same(5) };
    expect(compareRatings(buildProtector({ slc80Db: 24, bands })).at(-1)).toMatchObject({
      rating: "slc80",
      labelDb: 24,
      recomputedDb: null,
      isAtOdds: false,
    });
  });

  test.each([
    [9.9, null],
    [10, 1],
    [13.9, 1],
    [14, 2],
    [18, 3],
    [22, 4],
    [25.9, 4],
    [26, 5],
    [33, 5],
  ])("SLC80 of %d dB is class %s", (slc80Db, expected) => {
    expect(australianClass(slc80Db)).toBe(expected);
  });
});

describe("a label beside its own test data", () => {
  const bands = { meanDb: same(30), sdDb: same(5) };
  // Flat 25: H, M and L 25, SNR 25 and the C − A of pink noise, 1.5 dB with 63 Hz.
  const label = { hDb: 25, mDb: 25, lDb: 25, snrDb: 27, bands };

  test("agrees within rounding", () => {
    for (const { isAtOdds, rating, differenceDb } of compareRatings(buildProtector(label))) {
      expect(isAtOdds).toBe(false);
      if (rating === "us" || rating === "slc80") expect(differenceDb).toBeNull();
      else expect(Math.abs(differenceDb!)).toBeLessThan(1);
    }
  });

  test("a typing error of 10 dB stands out, and says which way", () => {
    const found = compareRatings(buildProtector({ ...label, snrDb: 37 }));
    expect(found.find(({ rating }) => rating === "snr")).toMatchObject({ isAtOdds: true });
    expect(found.find(({ rating }) => rating === "snr")!.differenceDb).toBeGreaterThan(9);
    expect(found.filter(({ isAtOdds }) => isAtOdds)).toHaveLength(1);
  });

  test("from a deviation below zero nothing is recomputed, and it is said why", () => {
    const sdDb = [5, 5, -5, 5, 5, 5, 5, 5] as unknown as OctaveBandValues;
    const usLabel = { meanDb: Array(9).fill(30), sdDb: [3, 3, 3, 3, 3, 3, 3, 3, -3] };
    const found = compareRatings(
      buildProtector({ ...label, bands: { ...bands, sdDb }, usRatingDb: 20, usLabel }),
    );
    expect(found.filter(({ reason }) => reason === "deviation-invalid")).toHaveLength(5);
    for (const one of found)
      expect(one).toMatchObject({ recomputedDb: null, by: null, isAtOdds: false });
    // Single subjects have their own.
    const bySubjects = compareRatings(
      buildProtector({ ...label, bands: { ...bands, sdDb }, subjectsDb: [same(20), same(30)] }),
    );
    expect(bySubjects.every(({ reason }) => reason === null)).toBe(true);
  });

  test("no data, nothing to compare", () => {
    for (const one of compareRatings(buildProtector({ snrDb: 27 })))
      expect(one).toMatchObject({ recomputedDb: null, differenceDb: null, by: null });
  });
});
