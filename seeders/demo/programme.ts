import type { z } from "zod";
import { lcMinusLaOfSpectrumDb } from "../../shared/acoustics/protection/octave-band";
import type { LevelMetric, MeterSettings, OctaveBandValues } from "../../shared/acoustics/types";
import type { SiteInput, SiteSettingsInput } from "../../shared/schemas/site";

/** An engine works with two sites, invented throughout. Levels are dB(A) unless a name says otherwise. */
export const ORGANIZATION = "Ostmere Engines";

export type SiteKey = "ostmere" | "kettle-bend";

export const SITES: Record<
  SiteKey,
  SiteInput & {
    rules: Pick<
      z.input<typeof SiteSettingsInput>,
      "governingRuleSet" | "comparisonRuleSets" | "usesUncertainty"
    >;
  }
> = {
  ostmere: {
    name: "Ostmere works",
    timeZone: "Europe/London",
    language: "en",
    noticeDelayMin: 15,
    rules: {
      governingRuleSet: "uk-2005",
      comparisonRuleSets: ["eu-2003-10-ec"],
      usesUncertainty: true,
    },
  },
  "kettle-bend": {
    name: "Kettle Bend works",
    timeZone: "America/Chicago",
    language: "en",
    noticeDelayMin: 15,
    rules: {
      governingRuleSet: "us-general-industry",
      comparisonRuleSets: ["niosh-rel"],
      usesUncertainty: false,
    },
  },
};

export const AREAS: readonly { site: SiteKey; name: string; zone: "none" | "single" | "double" }[] =
  [
    { site: "ostmere", name: "Engine test cell", zone: "single" },
    { site: "ostmere", name: "Rigging bay and control room", zone: "none" },
    { site: "ostmere", name: "Fettling shop", zone: "single" },
    { site: "ostmere", name: "Inspection", zone: "none" },
    { site: "ostmere", name: "Core shop", zone: "none" },
    { site: "kettle-bend", name: "Plate shop", zone: "single" },
    { site: "kettle-bend", name: "Hammer bay", zone: "double" },
    { site: "kettle-bend", name: "Compressor house", zone: "single" },
    { site: "kettle-bend", name: "Stores and yard", zone: "none" },
  ];

const LAEQ: LevelMetric = { kind: "laeq" };
const STEADY: LevelMetric = { kind: "steady" };
export const THRESHOLD_80: MeterSettings = {
  criterionLevelDb: 90,
  exchangeRateDb: 5,
  thresholdDb: 80,
  weighting: "A",
  response: "slow",
};
export const THRESHOLD_90: MeterSettings = {
  criterionLevelDb: 90,
  exchangeRateDb: 5,
  thresholdDb: 90,
  weighting: "A",
  response: "slow",
};
export const ENERGY_MEAN: MeterSettings = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "slow",
};
export const RECOMMENDED_DOSE: MeterSettings = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: 80,
  weighting: "A",
  response: "slow",
};

export interface DemoTask {
  site: SiteKey;
  area: string | null;
  name: string;
  metric: LevelMetric;
  levelDb: number;
  /** Unweighted, 63 Hz to 8 kHz. */
  octaveBandsDb: OctaveBandValues | null;
  lcMinusLaDb: number | null;
  lasMaxDb: number | null;
  /** C-weighted. */
  peakDb: number;
  /** Of the survey that its level rests on (seeders/demo/measurements.ts); none: it was taken over from somewhere. */
  samplesDb: readonly number[];
  sourceNote: string;
  /** From when its level holds, where that is not the first day. */
  sinceDaysAgo?: number;
}

/** At Ostmere a class 1 meter took three samples of each task with its spectrum; the level is their energy mean. */
const sampled = (
  area: string | null,
  name: string,
  levelDb: number,
  octaveBandsDb: OctaveBandValues,
  peakDb: number,
  samplesDb: readonly number[],
): DemoTask => ({
  site: "ostmere",
  area,
  name,
  metric: LAEQ,
  levelDb,
  octaveBandsDb,
  lcMinusLaDb: lcMinusLaOfSpectrumDb(octaveBandsDb),
  lasMaxDb: null,
  peakDb,
  samplesDb,
  sourceNote: "",
});

/** At Kettle Bend: a level that hardly moves, or the average of a dosimeter worn during the task. */
const american = (
  area: string | null,
  name: string,
  metric: LevelMetric,
  levelDb: number,
  octaveBandsDb: OctaveBandValues,
  lasMaxDb: number,
  peakDb: number,
  samplesDb: readonly number[],
  sourceNote: string,
): DemoTask => ({
  site: "kettle-bend",
  area,
  name,
  metric,
  levelDb,
  octaveBandsDb,
  lcMinusLaDb: lcMinusLaOfSpectrumDb(octaveBandsDb),
  lasMaxDb,
  peakDb,
  samplesDb,
  sourceNote,
});

export const TASKS: readonly DemoTask[] = [
  // An engine on the brake: nearly everything lies below 500 Hz, where a cup takes little off.
  sampled(
    "Engine test cell",
    "Run-up",
    102.6,
    [111.6, 109.6, 105.6, 100.7, 94.6, 90.6, 85.6, 79.6],
    131.0,
    [102.2, 103.3, 102.2],
  ),
  sampled(
    "Engine test cell",
    "Soak run",
    98.7,
    [105.4, 106.4, 102.5, 96.4, 90.4, 85.4, 80.4, 74.4],
    126.5,
    [98.3, 99.4, 98.3],
  ),
  sampled(
    "Engine test cell",
    "Teardown",
    90.5,
    [82.5, 83.5, 84.5, 84.5, 85.5, 84.5, 81.5, 76.5],
    124.0,
    [90.1, 91.2, 90.1],
  ),
  sampled(
    "Rigging bay and control room",
    "Rigging",
    84.2,
    [74.2, 76.2, 77.2, 78.2, 79.2, 78.3, 75.2, 70.2],
    119.0,
    [83.8, 84.9, 83.8],
  ),
  sampled(
    "Rigging bay and control room",
    "Control room",
    71.5,
    [84.7, 80.7, 73.6, 67.7, 63.7, 60.7, 56.7, 50.7],
    104.0,
    [71.1, 72.2, 71.1],
  ),
  // Grinders and chipping hammers: all of it above 500 Hz, and the hammers with peaks past the upper action value.
  sampled(
    "Fettling shop",
    "Grinding",
    101.5,
    [78.0, 80.0, 84.0, 90.0, 95.0, 97.0, 94.0, 89.0],
    128.0,
    [101.1, 102.2, 101.1],
  ),
  sampled(
    "Fettling shop",
    "Chipping",
    104.0,
    [82.1, 85.1, 91.1, 97.1, 100.1, 98.1, 94.1, 88.1],
    138.6,
    [103.6, 104.7, 103.6],
  ),
  sampled(
    "Fettling shop",
    "Linishing",
    95.5,
    [76.4, 78.4, 81.4, 85.4, 89.4, 90.4, 88.4, 83.4],
    121.0,
    [95.1, 96.2, 95.1],
  ),
  sampled(
    "Fettling shop",
    "Casting wash",
    86.5,
    [80.4, 80.4, 80.4, 80.4, 79.4, 80.4, 79.4, 76.4],
    112.0,
    [86.1, 87.2, 86.1],
  ),
  sampled(
    "Inspection",
    "Inspection",
    72.0,
    [65.9, 65.9, 66.9, 66.9, 66.9, 65.8, 62.9, 56.9],
    110.0,
    [71.6, 72.7, 71.6],
  ),
  sampled(
    null,
    "Break",
    66.1,
    [62.0, 63.0, 63.0, 63.0, 61.1, 59.0, 55.0, 49.0],
    105.0,
    [65.7, 66.8, 65.7],
  ),

  // New since last week: the level is that of the machine's data sheet, and nobody has measured it yet.
  {
    site: "ostmere",
    area: "Core shop",
    name: "Core making",
    metric: LAEQ,
    levelDb: 78.6,
    octaveBandsDb: [70.5, 71.5, 72.5, 73.5, 73.5, 72.5, 69.5, 64.5],
    lcMinusLaDb: 1.8,
    lasMaxDb: null,
    peakDb: 112.0,
    samplesDb: [],
    sourceNote: "Data sheet of the core shooter",
    sinceDaysAgo: 9,
  },

  american(
    "Hammer bay",
    "Plate hammering",
    { kind: "lavg", settings: THRESHOLD_90 },
    98.0,
    [83.6, 85.1, 88.6, 93.1, 93.6, 91.6, 88.6, 83.6],
    112.4,
    138.9,
    [97.6, 98.4, 98.0],
    "Dosimeter worn at the hammer",
  ),
  american(
    "Plate shop",
    "Plasma cutting",
    { kind: "lavg", settings: THRESHOLD_90 },
    93.5,
    [76.2, 78.2, 80.2, 82.2, 84.2, 86.2, 88.2, 88.2],
    101.5,
    122.0,
    [93.9, 93.2, 93.4],
    "Dosimeter worn at the table",
  ),
  american(
    "Plate shop",
    "Welding and tacking",
    { kind: "lavg", settings: THRESHOLD_80 },
    86.0,
    [75.8, 76.8, 76.8, 77.8, 78.8, 79.8, 79.8, 76.8],
    95.2,
    127.5,
    [85.5, 86.6, 85.9],
    "Dosimeter worn at the bench",
  ),
  american(
    null,
    "Laying out",
    STEADY,
    76.5,
    [74.5, 74.5, 73.5, 72.5, 71.5, 69.5, 66.5, 61.5],
    79.0,
    111.0,
    [76.8, 76.3, 76.4],
    "Sound level meter on slow",
  ),
  american(
    "Compressor house",
    "Compressor rounds",
    STEADY,
    94.0,
    [88.4, 91.8, 92.2, 91.6, 89.0, 86.0, 82.0, 76.0],
    95.5,
    112.0,
    [93.8, 94.3, 93.9],
    "Sound level meter on slow, along the round",
  ),
  american(
    "Compressor house",
    "Blow-down",
    STEADY,
    104.0,
    [79.5, 81.5, 85.5, 90.5, 95.5, 98.5, 98.5, 95.5],
    106.5,
    121.0,
    [103.7, 104.4, 103.9],
    "Sound level meter on slow, at the valve",
  ),
  american(
    null,
    "Compressor desk",
    STEADY,
    71.0,
    [78.0, 76.0, 72.0, 68.0, 65.0, 62.0, 58.0, 52.0],
    73.0,
    98.0,
    [70.8, 71.1, 71.1],
    "Sound level meter on slow",
  ),
  // What the stores have was taken over from elsewhere: nobody has measured these groups.
  american(
    "Stores and yard",
    "Picking",
    STEADY,
    74.0,
    [72.1, 72.1, 71.1, 70.1, 69.1, 67.1, 63.1, 57.1],
    82.0,
    108.0,
    [],
    "Read off a sound level meter in passing, no samples on record",
  ),
  // Only an energy mean: under a 5 dB rule that is an upper estimate.
  american(
    "Stores and yard",
    "Forklift",
    LAEQ,
    88.6,
    [93.7, 91.7, 87.7, 84.7, 83.7, 80.7, 76.7, 70.7],
    97.5,
    118.0,
    [],
    "Taken over from the truck's data sheet, an energy mean with its spectrum",
  ),
  american(
    null,
    "Lunch room",
    STEADY,
    65.0,
    [60.2, 61.2, 61.2, 61.2, 60.2, 58.2, 54.2, 48.2],
    70.0,
    100.0,
    [64.7, 65.2, 65.1],
    "Sound level meter on slow",
  ),
];

/** Nominal days, minutes. `rest` is the task that takes up what the others leave of the shift. */
export const JOBS: readonly {
  site: SiteKey;
  name: string;
  rest: string;
  tasks: Readonly<Record<string, number>>;
}[] = [
  {
    site: "ostmere",
    name: "Test cell hand",
    rest: "Control room",
    tasks: {
      Rigging: 60,
      "Run-up": 100,
      "Soak run": 110,
      Teardown: 100,
      "Control room": 80,
      Break: 30,
    },
  },
  {
    site: "ostmere",
    name: "Test cell technician",
    rest: "Control room",
    tasks: { Rigging: 90, "Run-up": 45, "Soak run": 60, "Control room": 255, Break: 30 },
  },
  {
    site: "ostmere",
    name: "Test cell hand, nights",
    rest: "Control room",
    tasks: {
      Rigging: 60,
      "Run-up": 130,
      "Soak run": 260,
      Teardown: 90,
      "Control room": 140,
      Break: 40,
    },
  },
  {
    site: "ostmere",
    name: "Test cell technician, nights",
    rest: "Control room",
    tasks: { Rigging: 90, "Run-up": 45, "Soak run": 60, "Control room": 485, Break: 40 },
  },
  {
    site: "ostmere",
    name: "Fettler",
    rest: "Inspection",
    tasks: { Grinding: 160, Chipping: 80, Linishing: 110, Inspection: 100, Break: 30 },
  },
  {
    site: "ostmere",
    name: "Casting washer",
    rest: "Inspection",
    tasks: { "Casting wash": 270, Inspection: 180, Break: 30 },
  },
  {
    site: "ostmere",
    name: "Inspector",
    rest: "Inspection",
    tasks: { Linishing: 30, Inspection: 420, Break: 30 },
  },
  {
    site: "ostmere",
    name: "Core maker",
    rest: "Inspection",
    tasks: { "Core making": 390, Inspection: 60, Break: 30 },
  },
  {
    site: "kettle-bend",
    name: "Hammer hand",
    rest: "Laying out",
    tasks: {
      "Plate hammering": 150,
      "Plasma cutting": 90,
      "Welding and tacking": 120,
      "Laying out": 90,
      "Lunch room": 30,
    },
  },
  {
    site: "kettle-bend",
    name: "Plater",
    rest: "Laying out",
    tasks: {
      "Plate hammering": 20,
      "Plasma cutting": 80,
      "Welding and tacking": 210,
      "Laying out": 140,
      "Lunch room": 30,
    },
  },
  {
    site: "kettle-bend",
    name: "Layout hand",
    rest: "Laying out",
    tasks: { "Plasma cutting": 15, "Welding and tacking": 40, "Laying out": 395, "Lunch room": 30 },
  },
  {
    site: "kettle-bend",
    name: "Compressor attendant",
    rest: "Compressor desk",
    tasks: { "Compressor rounds": 75, "Blow-down": 8, "Compressor desk": 367, "Lunch room": 30 },
  },
  {
    site: "kettle-bend",
    name: "Stores hand",
    rest: "Picking",
    tasks: { Picking: 390, Forklift: 60, "Lunch room": 30 },
  },
  {
    site: "kettle-bend",
    name: "Forklift driver",
    rest: "Picking",
    tasks: { Picking: 120, Forklift: 330, "Lunch room": 30 },
  },
];

export interface DemoCrew {
  site: SiteKey;
  name: string;
  usualStart: string;
  usualLengthMin: number;
  /** `weekdays`, or four nights on and four off. */
  pattern: "weekdays" | "four-on-four-off";
  /** When its day is entered, local, on the day itself (nights: the morning after). */
  enteredAt: string;
}

export const CREWS: readonly DemoCrew[] = [
  {
    site: "ostmere",
    name: "Test cell days",
    usualStart: "06:00",
    usualLengthMin: 480,
    pattern: "weekdays",
    enteredAt: "14:20",
  },
  {
    site: "ostmere",
    name: "Test cell nights",
    usualStart: "19:00",
    usualLengthMin: 720,
    pattern: "four-on-four-off",
    enteredAt: "08:05",
  },
  {
    site: "ostmere",
    name: "Fettling days",
    usualStart: "06:00",
    usualLengthMin: 480,
    pattern: "weekdays",
    enteredAt: "14:40",
  },
  {
    site: "ostmere",
    name: "Fettling lates",
    usualStart: "14:00",
    usualLengthMin: 480,
    pattern: "weekdays",
    enteredAt: "22:15",
  },
  {
    site: "kettle-bend",
    name: "Plate shop days",
    usualStart: "07:00",
    usualLengthMin: 480,
    pattern: "weekdays",
    enteredAt: "15:30",
  },
  {
    site: "kettle-bend",
    name: "Compressor and stores",
    usualStart: "08:00",
    usualLengthMin: 480,
    pattern: "weekdays",
    enteredAt: "16:25",
  },
];

export interface DemoInstrument {
  site: SiteKey;
  kind: "dosimeter" | "sound-level-meter" | "calibrator";
  class: "1" | "2";
  name: string;
  serialNumber: string;
  presets: readonly MeterSettings[];
  calibrationDueInDays: number;
}

export const INSTRUMENTS: readonly DemoInstrument[] = [
  {
    site: "ostmere",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, green band",
    serialNumber: "OD 40117",
    presets: [ENERGY_MEAN],
    calibrationDueInDays: 210,
  },
  {
    site: "ostmere",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, blue band",
    serialNumber: "OD 40118",
    presets: [ENERGY_MEAN],
    calibrationDueInDays: 4,
  },
  {
    site: "ostmere",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, amber band",
    serialNumber: "OD 40121",
    presets: [ENERGY_MEAN],
    calibrationDueInDays: 143,
  },
  {
    site: "ostmere",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, grey band",
    serialNumber: "OD 40125",
    presets: [ENERGY_MEAN],
    calibrationDueInDays: 298,
  },
  {
    site: "ostmere",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, white band",
    serialNumber: "OD 39870",
    presets: [ENERGY_MEAN],
    calibrationDueInDays: 41,
  },
  {
    site: "ostmere",
    kind: "sound-level-meter",
    class: "1",
    name: "Meter, class 1",
    serialNumber: "OM 2203",
    presets: [ENERGY_MEAN],
    calibrationDueInDays: 96,
  },
  {
    site: "ostmere",
    kind: "calibrator",
    class: "1",
    name: "Calibrator, Ostmere",
    serialNumber: "OC 518",
    presets: [],
    calibrationDueInDays: 96,
  },
  {
    site: "kettle-bend",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, red band",
    serialNumber: "KD 7731",
    presets: [THRESHOLD_80, THRESHOLD_90, RECOMMENDED_DOSE],
    calibrationDueInDays: 133,
  },
  {
    site: "kettle-bend",
    kind: "dosimeter",
    class: "2",
    name: "Dosimeter, silver band",
    serialNumber: "KD 7744",
    presets: [THRESHOLD_80, THRESHOLD_90, RECOMMENDED_DOSE],
    calibrationDueInDays: 171,
  },
  {
    site: "kettle-bend",
    kind: "sound-level-meter",
    class: "2",
    name: "Meter, class 2",
    serialNumber: "KM 904",
    presets: [],
    calibrationDueInDays: 61,
  },
  {
    site: "kettle-bend",
    kind: "calibrator",
    class: "1",
    name: "Calibrator, Kettle Bend",
    serialNumber: "KC 611",
    presets: [],
    calibrationDueInDays: 61,
  },
];
