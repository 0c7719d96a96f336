import type { OctaveBandValues, ProtectorData, TaskLevel } from "../../../shared/acoustics/types";
import { DayGridView, type GridRow } from "../../../shared/schemas/shift";

/** For tests: a crew in a test cell under the UK rules, as the server would send it. */
const id = (number: number) => `00000000-0000-4000-8000-${String(number).padStart(12, "0")}`;

export const TASK = {
  rigging: id(1),
  runUp: id(2),
  teardown: id(3),
  control: id(4),
  stores: id(5),
} as const;
export const INSTRUMENT = id(30);
export const workerId = (number: number) => id(100 + number);
export const shiftId = (number: number) => id(10_000 + number);

const level = (levelDb: number, bands: OctaveBandValues | null = null): TaskLevel => ({
  revisionId: null,
  metric: { kind: "steady" },
  levelDb,
  lcMinusLaDb: 2,
  octaveBandsDb: bands,
  lasMaxDb: null,
  peak: null,
  samplesDb: [],
  instrument: null,
  grade: "task-level",
});

const muff: ProtectorData = {
  modelId: id(20),
  revisionId: null,
  name: "Fenmuff",
  kind: "earmuff",
  usRatingDb: 25,
  snrDb: 28,
  hDb: 30,
  mDb: 26,
  lDb: 18,
  slc80Db: 24,
  bands: null,
  active: null,
};

export function gridRow(number: number, more: Partial<GridRow> = {}): GridRow {
  return {
    worker: {
      id: workerId(number),
      name: `Worker ${number}`,
      employeeNumber: String(3300 + number),
      mustWear: false,
      personalTargetDb: null,
      hiredOn: "2020-01-01",
      leftOn: null,
    },
    isLoan: false,
    isAbsent: false,
    nominal: [
      { taskId: TASK.rigging, durationMin: 60 },
      { taskId: TASK.runUp, durationMin: 120 },
      { taskId: TASK.control, durationMin: 300 },
    ],
    assignments: [
      {
        id: id(40),
        taskId: null,
        areaId: null,
        innerModelId: id(20),
        outerModelId: null,
        ownFitDb: null,
        activeCheckPassed: false,
        combinationBands: null,
        audioDb: null,
      },
    ],
    lastWorn: { [TASK.runUp]: 100 },
    longestMin: {},
    saved: null,
    otherShifts: [],
    readings: [],
    lastShift: {
      date: "2026-11-27",
      localStart: "07:00",
      lengthMin: 420,
      unaccounted: { how: "unknown" },
      tasks: [
        { taskId: TASK.runUp, durationMin: 90, wornPct: 95, wornIsShiftWide: true },
        { taskId: TASK.control, durationMin: 330, wornPct: 95, wornIsShiftWide: true },
      ],
    },
    figures: null,
    ...more,
  };
}

const task = (taskId: string, name: string, levelDb: number, isColumn = true) => ({
  id: taskId,
  name,
  areaId: null,
  zone: "none",
  level: level(levelDb),
  isColumn,
});

/** `rows`: how many workers, or their rows. */
export function testDay(rows: number | readonly GridRow[] = 3, more: object = {}): DayGridView {
  return DayGridView.parse({
    crew: {
      id: id(50),
      name: "Test cell days",
      siteId: id(51),
      siteName: "Ostmere works",
      usualStart: "06:00",
      usualLengthMin: 480,
      timeZone: "Europe/London",
    },
    date: "2026-11-30",
    today: "2026-12-01",
    settings: {
      governingRuleSet: "uk-2005",
      ruleSetVersion: 1,
      comparisonRuleSets: [],
      wearFromDb: 85,
      creditsActivePart: false,
      usesUncertainty: false,
    },
    tasks: [
      task(TASK.rigging, "Rigging", 84),
      task(TASK.runUp, "Run-up", 100),
      task(TASK.teardown, "Teardown", 92),
      task(TASK.control, "Control room", 70),
      task(TASK.stores, "Stores", 68, false),
    ],
    models: [muff],
    instruments: [
      {
        id: INSTRUMENT,
        name: "Dosimeter one",
        serialNumber: "one",
        class: "2",
        kind: "dosimeter",
        presets: [
          {
            criterionLevelDb: 85,
            exchangeRateDb: 3,
            thresholdDb: null,
            weighting: "A",
            response: "slow",
          },
        ],
      },
    ],
    rows:
      typeof rows === "number" ? Array.from({ length: rows }, (_, at) => gridRow(at + 1)) : rows,
    notices: null,
    ...more,
  });
}

export const savedShift = (number: number, revision = 1): NonNullable<GridRow["saved"]> => ({
  shiftId: shiftId(number),
  revision,
  localStart: "06:00",
  whichHour: null,
  lengthMin: 480,
  unaccounted: { how: "unknown" },
  tasks: [
    { taskId: TASK.runUp, durationMin: 120, wornPct: 100, wornIsShiftWide: true },
    { taskId: TASK.control, durationMin: 360, wornPct: 100, wornIsShiftWide: true },
  ],
  note: null,
  authorName: "S. Ferrand",
  savedAt: "2026-12-01T06:00:00.000Z",
});
