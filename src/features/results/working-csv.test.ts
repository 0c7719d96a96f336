import { parse } from "csv-parse/sync";
import { expect, test } from "vitest";
import type { DayInput } from "../../../shared/acoustics/types";
import { buildWorking } from "../../../shared/acoustics/working";
import { ruleSetVersion } from "../../../shared/rule-sets";
import { testI18n } from "../../lib/test-i18n";
import { workingCsv } from "./working-csv";

const level = (levelDb: number) => ({
  revisionId: null,
  metric: { kind: "steady" as const },
  levelDb,
  lcMinusLaDb: null,
  octaveBandsDb: null,
  lasMaxDb: null,
  peak: null,
  samplesDb: [],
  instrument: null,
  grade: "task-level" as const,
});
const task = (id: string, name: string, levelDb: number, durationMin: number) => ({
  id,
  taskId: id,
  name,
  durationMin,
  level: level(levelDb),
  zone: "none" as const,
  protection: null,
  wornPct: null,
  wornIsShiftWide: false,
});
const input: DayInput = {
  workerId: "w",
  date: "2026-11-30",
  shifts: [
    {
      id: "s",
      revisionId: "r",
      lengthMin: 480,
      tasks: [task("a", '=HYPERLINK("x")', 100, 120), task("b", "Control room", 70, 360)],
      unaccounted: { how: "unknown" },
      readings: [],
    },
  ],
  site: { wearFromDb: 85, creditsActivePart: false, usesUncertainty: false },
  personalTargetDb: null,
  mustWear: false,
};

function lines(day = input, ruleSet = "uk-2005"): string[][] {
  const working = buildWorking(day, ruleSetVersion(ruleSet, 1)!, []);
  return parse(workingCsv(testI18n(), "en", working, "0a1b2c3d"), { relax_column_count: false });
}

test("numbers stand unrounded with their unit: LEX,8h = 10 lg(2/8·10^10 + 6/8·10^7), by hand 93.9924 dB", () => {
  const found = lines().find(
    ([, step, title, part]) => step === "0" && title === "Without protection" && part === "level",
  );
  expect(Number(found?.[6])).toBeCloseTo(93.9924, 4);
  expect(String(found?.[6]).length).toBeGreaterThan(8);
  expect(found?.[7]).toBe("dB");
});

test("a level of a table that is only a bound has its side in the line after it: 93.5 from 90 dB counts as 96.96, less 24", () => {
  const metric = {
    kind: "lavg",
    settings: {
      criterionLevelDb: 90,
      exchangeRateDb: 5,
      thresholdDb: 90,
      weighting: "A",
      response: "slow",
    },
  } as const;
  const inner = {
    modelId: "m",
    revisionId: null,
    name: "Plain muff",
    kind: "earmuff",
    usRatingDb: 25,
    snrDb: null,
    hDb: null,
    mDb: null,
    lDb: null,
    slc80Db: null,
    bands: null,
    active: null,
  } as const;
  const cutting = {
    ...task("c", "Cutting", 93.5, 480),
    level: { ...level(93.5), metric, lcMinusLaDb: 1 },
    protection: {
      assignmentId: null,
      inner,
      outer: null,
      combinationBands: null,
      ownFitDb: null,
      activeCheckPassed: false,
    },
    wornPct: 100,
  };
  const day = { ...input, shifts: [{ ...input.shifts[0]!, tasks: [cutting] }] };
  const all = lines(day, "us-general-industry");
  const at = all.findIndex(
    ([, , , part, row, column]) => part === "table" && row === "Cutting" && column === "While worn",
  );
  expect(Number(all[at]?.[6])).toBeCloseTo(72.96, 2);
  expect(all[at + 1]?.slice(3, 7)).toEqual(["bound", "Cutting", "While worn", "upper"]);
});

test("a name that looks like a formula is marked as text, and the last line counts the others", () => {
  const all = lines();
  expect(all.some((line) => line[4] === `'=HYPERLINK("x")`)).toBe(true);
  expect(all.every((line) => !line.some((field) => field.startsWith("=")))).toBe(true);
  const [last] = all.slice(-1);
  expect(last?.slice(3, 7)).toEqual(["lines", "", "", String(all.length - 2)]);
});
