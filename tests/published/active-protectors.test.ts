import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import {
  activeAttenuationDb,
  bandCancellationDb,
  breakEvenHz,
  cancellationDb,
} from "../../shared/acoustics/protection/active";
import { activeChart, delayGainCurve } from "../../shared/acoustics/protection/active-chart";
import type { ActivePart, OctaveBandValues } from "../../shared/acoustics/types";
import {
  buildLevel,
  buildProtection,
  buildProtector,
  buildTask,
  dayOf,
  ruleSet,
} from "./build-day";

const same = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
const CUP = {
  meanDb: [12, 14, 18, 25, 30, 34, 36, 36] as const,
  sdDb: [2, 2, 2, 2, 2, 2, 2, 2] as const,
};
const RUMBLE: OctaveBandValues = [103, 104, 102, 94, 89, 83, 77, 71];
const part = (fields: Partial<ActivePart>): ActivePart => ({
  attenuationDb: null,
  delayS: null,
  gain: null,
  maximumDb: null,
  bandwidthHz: null,
  saturatesAboveDb: null,
  batteryMin: null,
  ...fields,
});
const phaseOf = (frequencyHz: number, delayS: number) => 2 * Math.PI * frequencyHz * delayS;

describe("common practice, no source", () => {
  test("an opposite wave a few milliseconds late does nothing useful at a few hundred hertz", () => {
    for (const delayS of [0.002, 0.003, 0.004, 0.005]) {
      for (const band of [2, 3]) expect(bandCancellationDb(band, delayS, 1)).toBeLessThan(1);
      const credited = activeAttenuationDb(part({ delayS, gain: 1 }))!;
      for (const band of [2, 3, 4]) expect(credited[band]).toBeLessThanOrEqual(0);
    }
  });

  test("and can double the pressure: half a period late it adds 6.02 dB", () => {
    // 2 ms is half a period of 250 Hz.
    expect(cancellationDb(1, phaseOf(250, 0.002))).toBeCloseTo(-20 * Math.log10(2), 9);
  });

  test("the timing error that leaves 20 dB at 200 Hz leaves nothing at several kilohertz", () => {
    const delayS = 5.732 / 360 / 200;
    expect(cancellationDb(1, phaseOf(200, delayS))).toBeCloseTo(20, 2);
    // Break-even where the phase is 60°: at 200 · 60/5.732 Hz.
    expect(breakEvenHz(delayS, 1)).toBeCloseTo(2093.5, 0);
    for (const frequencyHz of [3000, 4000, 6000])
      expect(cancellationDb(1, phaseOf(frequencyHz, delayS))).toBeLessThan(0);
  });

  test("active attenuation belongs to low noise: with any delay it falls from band to band, and is gone at 8 kHz", () => {
    fc.assert(
      fc.property(
        fc.double({ min: 5e-5, max: 5e-3, noNaN: true }),
        fc.double({ min: 0.5, max: 1.2, noNaN: true }),
        (delayS, gain) => {
          const credited = activeAttenuationDb(part({ delayS, gain }))!;
          const positive = credited.filter((db) => db! > 0);
          expect(positive).toEqual([...positive].sort((a, b) => b! - a!));
          expect(credited[7]).toBeLessThanOrEqual(0);
        },
      ),
    );
  });

  test("and to steady noise below its reach: above its saturation and against a peak it is given nothing", () => {
    const active = part({ attenuationDb: same(15), saturatesAboveDb: 105 });
    const level = buildLevel(106, { octaveBandsDb: RUMBLE });
    const inner = buildProtector({ kind: "active-earmuff", bands: CUP, active });
    const task = buildTask("run-up", 480, level, {
      protection: buildProtection({}, { inner }),
      wornPct: 100,
    });
    const [seen] = evaluateDay(dayOf(task), ruleSet("eu-2003-10-ec"), []).tasks;
    expect(seen).toMatchObject({ reason: "saturated" });
    expect(seen!.wornActiveDb).toBe(seen!.wornDb);
  });
});

test("property: a perfect canceller with no delay is bounded by its gain, in every band and in the whole level", () => {
  fc.assert(
    fc.property(fc.double({ min: 0.01, max: 0.99, noNaN: true }), (gain) => {
      const boundDb = -20 * Math.log10(1 - gain);
      const active = part({ delayS: 0, gain });
      for (const db of activeAttenuationDb(active)!) expect(db).toBeCloseTo(boundDb, 9);
      const chart = activeChart(buildLevel(100, { octaveBandsDb: RUMBLE }), CUP, active)!;
      expect(chart.passiveDb - chart.activeDb).toBeCloseTo(boundDb, 9);
    }),
  );
});

test("property: no device is given more than its maximum, or anything past its bandwidth or its break-even", () => {
  fc.assert(
    fc.property(
      fc.double({ min: 0, max: 2e-3, noNaN: true }),
      fc.double({ min: 0, max: 1.9, noNaN: true }),
      fc.double({ min: 0, max: 30, noNaN: true }),
      fc.constantFrom(200, 500, 1000, 2000),
      (delayS, gain, maximumDb, bandwidthHz) => {
        const credited = activeAttenuationDb(part({ delayS, gain, maximumDb, bandwidthHz }))!;
        const endsHz = Math.min(bandwidthHz, breakEvenHz(delayS, gain) ?? bandwidthHz);
        for (const [band, db] of credited.entries()) {
          expect(db).toBeLessThanOrEqual(maximumDb + 1e-9);
          const fromHz = 1000 * 10 ** (0.3 * (band - 4)) * 10 ** -0.15;
          if (fromHz >= endsHz) expect(db).toBeLessThanOrEqual(1e-9);
        }
      },
    ),
  );
});

describe("the chart", () => {
  const active = part({ attenuationDb: [14, 16, 14, 6, -1.5, -2, 0, 0] });
  const level = buildLevel(100, { octaveBandsDb: RUMBLE });
  const chart = activeChart(level, CUP, active)!;

  test("125 Hz by hand: 104 outside, 104 − 14 + 2 under the cup, 16 less with the active part; A-weighted 16.1 less", () => {
    expect(chart.bands[1]).toMatchObject({
      frequencyHz: 125,
      outsideDb: 104,
      passiveDb: 92,
      activeDb: 76,
      gainDb: 16,
      addsNoise: false,
    });
    expect(chart.bands[1]!.activeADb).toBeCloseTo(59.9, 9);
  });

  test("where it adds noise it says so", () => {
    expect(
      chart.bands.filter(({ addsNoise }) => addsNoise).map(({ frequencyHz }) => frequencyHz),
    ).toEqual([1000, 2000]);
    expect(chart.bands[5]!.activeDb).toBe(chart.bands[5]!.passiveDb + 2);
  });

  test("its sums are those of its bands, and what the day has", () => {
    const sum = (of: "outsideADb" | "passiveADb" | "activeADb") =>
      10 * Math.log10(chart.bands.reduce((all, one) => all + 10 ** (one[of] / 10), 0));
    expect(chart.outsideDb).toBeCloseTo(sum("outsideADb"), 9);
    expect(chart.passiveDb).toBeCloseTo(sum("passiveADb"), 9);
    expect(chart.activeDb).toBeCloseTo(sum("activeADb"), 9);
    const inner = buildProtector({ kind: "active-earmuff", bands: CUP, active });
    const task = buildTask("run-up", 480, level, {
      protection: buildProtection({}, { inner }),
      wornPct: 100,
    });
    const [seen] = evaluateDay(dayOf(task), ruleSet("eu-2003-10-ec"), []).tasks;
    expect(seen!.wornDb! - seen!.wornActiveDb!).toBeCloseTo(chart.passiveDb - chart.activeDb, 9);
  });

  test("saturated, on is off; without a spectrum or an active part there is none; without 63 Hz it starts at 125", () => {
    const saturated = activeChart(level, CUP, { ...active, saturatesAboveDb: 99 })!;
    expect(saturated).toMatchObject({ isSaturated: true, activeDb: saturated.passiveDb });
    expect(activeChart(buildLevel(100), CUP, active)).toBeNull();
    expect(activeChart(level, CUP, part({}))).toBeNull();
    const [, ...rest] = RUMBLE;
    const without = buildLevel(100, { octaveBandsDb: [null, ...rest] });
    expect(activeChart(without, CUP, active)!.bands[0]!.frequencyHz).toBe(125);
  });
});

describe("the curve of delay and gain", () => {
  test("is the closed form at each frequency, and its bands are the credited ones", () => {
    const curve = delayGainCurve(120e-6, 0.95, { maximumDb: 20, bandwidthHz: 1000 });
    for (const { frequencyHz, attenuationDb } of curve.points)
      expect(attenuationDb).toBe(cancellationDb(0.95, phaseOf(frequencyHz, 120e-6)));
    expect(curve.points[0]!.frequencyHz).toBe(50);
    expect(curve.points.at(-1)!.frequencyHz).toBeCloseTo(8000, 9);
    expect(curve.bands.map(({ attenuationDb }) => attenuationDb)).toEqual(
      activeAttenuationDb(part({ delayS: 120e-6, gain: 0.95, maximumDb: 20, bandwidthHz: 1000 })),
    );
    // cos φ = g/2: φ = 61.64°, at 61.64/360/120 µs.
    expect(curve.breakEvenHz).toBeCloseTo(1426.9, 0);
  });

  test("a perfect one leaves nothing and never breaks even", () => {
    const curve = delayGainCurve(0, 1);
    expect(curve.breakEvenHz).toBeNull();
    expect(curve.points[0]!.attenuationDb).toBe(Number.POSITIVE_INFINITY);
  });
});

test("property: mixing shares of the day is monotonic: more time under the louder of two never lowers it", () => {
  fc.assert(
    fc.property(
      fc.integer({ min: 1, max: 478 }),
      fc.integer({ min: 1, max: 478 }),
      fc.double({ min: 85, max: 115, noNaN: true }),
      fc.double({ min: 85, max: 115, noNaN: true }),
      (one, other, a, b) => {
        const [loud, soft] = [Math.max(a, b), Math.min(a, b)];
        const atEar = (loudMin: number) =>
          evaluateDay(
            dayOf(
              buildTask("loud", loudMin, buildLevel(loud, { lcMinusLaDb: 0 }), {
                protection: buildProtection({ snrDb: 20 }),
                wornPct: 100,
              }),
              buildTask("soft", 480 - loudMin, buildLevel(soft, { lcMinusLaDb: 0 }), {
                protection: buildProtection({ snrDb: 20 }),
                wornPct: 100,
              }),
            ),
            ruleSet("eu-2003-10-ec"),
            [],
          ).atEarDb!;
        expect(atEar(Math.max(one, other))).toBeGreaterThanOrEqual(
          atEar(Math.min(one, other)) - 1e-9,
        );
      },
    ),
  );
});
