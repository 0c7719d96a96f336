import { describe, expect, test } from "vitest";
import type { OutingRow } from "../../../shared/schemas/outing";
import {
  backInstant,
  type Cell,
  cellsOf,
  enterStep,
  findBySerial,
  outInstant,
  type Phase,
  presentTime,
  readingsOf,
} from "./row-keys";

describe("Enter", () => {
  const walk = (phase: Phase, filled: readonly Cell[], presetsCount = 2) => {
    const typed = new Set(filled);
    const steps: string[] = [];
    let cell = cellsOf(phase, presetsCount)[0] as Cell;
    for (let press = 0; press < 12; press++) {
      const step = enterStep(cell, { phase, presetsCount, isEmpty: !typed.has(cell) });
      if (step.kind === "send") return [...steps, "send"];
      if (step.kind === "stamp") {
        typed.add(step.cell);
        steps.push(`stamp ${step.cell}`);
        continue;
      }
      steps.push(step.to);
      cell = step.to;
    }
    return steps;
  };

  test("in the morning goes from worker over the check to the time, stamps it, and sends", () => {
    expect(walk("out", ["who", "checkBeforeDb"])).toEqual([
      "checkBeforeDb",
      "outTime",
      "stamp outTime",
      "send",
    ]);
  });

  test("in the evening stamps the time, and goes on to the figures of each preset and the peak", () => {
    expect(walk("back", [])).toEqual([
      "stamp backTime",
      "checkAfterDb",
      "figure0",
      "figure1",
      "peakDb",
      "send",
    ]);
  });

  test("of a day gone by takes no present time, and goes from worker to peak", () => {
    expect(walk("both", [], 1)).toEqual([
      "checkBeforeDb",
      "outTime",
      "backTime",
      "checkAfterDb",
      "figure0",
      "peakDb",
      "send",
    ]);
  });

  test("leaves a time that was typed as it is", () => {
    expect(walk("back", ["backTime"], 0)).toEqual(["checkAfterDb", "peakDb", "send"]);
  });
});

describe("a serial number", () => {
  const rows = [{ serialNumber: "D-0031" }, { serialNumber: "D-0131" }, { serialNumber: "31" }];
  test.each([
    ["D-0031", "D-0031"],
    ["d0131", "D-0131"],
    [" 31 ", "31"],
    ["0031", "D-0031"],
  ])("%j is %s", (typed, serialNumber) => {
    expect(findBySerial(rows, typed)?.serialNumber).toBe(serialNumber);
  });
  test.each(["", "1", "31x"])("%j is none: nothing, several or unknown", (typed) => {
    expect(findBySerial(rows, typed)).toBeNull();
  });
});

describe("times by the site's clock", () => {
  // Europe/Berlin sets its clock back on 25 October 2026 at 03:00 and forward on 28 March 2027 at 02:00.
  const zone = "Europe/Berlin";
  test("out is on the day of the page", () => {
    expect(outInstant("2026-12-01", "06:05", zone)).toEqual({
      kind: "one",
      instant: "2026-12-01T05:05:00.000Z",
    });
  });
  test("back is the first such time after out, on the next date for a night shift", () => {
    expect(backInstant("2026-12-01T05:05:00.000Z", "14:30", zone)).toEqual({
      kind: "one",
      instant: "2026-12-01T13:30:00.000Z",
    });
    expect(backInstant("2026-12-01T21:00:00.000Z", "06:00", zone)).toEqual({
      kind: "one",
      instant: "2026-12-02T05:00:00.000Z",
    });
  });
  test("a time that came twice is asked about, unless only one of the two is after out", () => {
    expect(backInstant("2026-10-24T20:00:00.000Z", "02:30", zone)).toEqual({
      kind: "twice",
      first: "2026-10-25T00:30:00.000Z",
      second: "2026-10-25T01:30:00.000Z",
    });
    expect(backInstant("2026-10-25T00:45:00.000Z", "02:30", zone)).toEqual({
      kind: "one",
      instant: "2026-10-25T01:30:00.000Z",
    });
  });
  test("a time that never came is none", () => {
    expect(outInstant("2027-03-28", "02:30", zone)).toEqual({ kind: "skipped" });
  });
  test("a stamp is the present minute, whichever of two equal hours it is in", () => {
    expect(presentTime(new Date("2026-10-25T01:30:42Z"), zone)).toEqual({
      instant: "2026-10-25T01:30:00.000Z",
      time: "02:30",
    });
  });
});

describe("readings of a return", () => {
  const presets: OutingRow["presets"] = [
    {
      criterionLevelDb: 85,
      exchangeRateDb: 3,
      thresholdDb: null,
      weighting: "A",
      response: "slow",
    },
    { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: 80, weighting: "A", response: "slow" },
  ];
  test("stand under the settings of their preset; a row without a figure is no reading", () => {
    const readings = readingsOf(presets, [null, { kind: "dose", dosePct: 61 }], null);
    expect(readings).toMatchObject([{ settings: presets[1], dosePct: 61, averageDb: null }]);
  });
  test("a peak goes with the first of them, or stands alone", () => {
    const figures = [{ kind: "average", averageDb: 91.2 }, null] as const;
    expect(readingsOf(presets, figures, 131)).toMatchObject([
      { averageDb: 91.2, peak: { levelDb: 131, weighting: "C" } },
    ]);
    expect(readingsOf(presets, [null, null], 131)).toMatchObject([
      { settings: presets[0], averageDb: null, peak: { levelDb: 131 } },
    ]);
    expect(readingsOf(presets, [], null)).toEqual([]);
  });
});
