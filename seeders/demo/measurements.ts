import type { RISK_FACTORS, Strategy } from "../../shared/schemas/survey";
import type { SiteKey } from "./programme";

/** Where the levels come from: surveys with their samples, changes since, and what the instruments logged. */

/** Days back from the day of filling (below 0: ahead), or from the first day of the demo. */
export type When = { daysAgo: number } | { beforeFirst: number };

type RiskAnswers = Readonly<
  Record<(typeof RISK_FACTORS)[number], readonly ["yes" | "no", note?: string]>
>;

/** A sample taken by hand at a task, or a dosimeter worn for a while: then it names no task. */
export interface DemoSample {
  task: string | null;
  /** Its place in the draw, from 0. */
  drawn: number | null;
  /** Days after the survey's first. */
  day: number;
  at: string;
  durationMin: number;
  levelDb: number;
  peakDb?: number;
  instrument: string;
  place?: string;
  checks?: readonly [beforeDb: number, afterDb: number];
  doubts?: readonly ("clipped" | "under-range")[];
  keptReason?: string;
  unusual?: string;
}

export interface DemoSurvey {
  site: SiteKey;
  job: string;
  name: string;
  purpose: string;
  strategy: Strategy;
  state: "planned" | "measuring" | "done";
  from: When;
  to: When;
  drawSeed: string;
  observers: readonly string[];
  riskFactors: RiskAnswers;
  closingNote?: string;
  targets: readonly { task: string | null; samplesCount: number; sampleMin: number }[];
  /** How many are drawn by chance, with two in reserve; or who is named. */
  people: { draw: number } | { named: readonly string[] };
  reservations?: readonly { instrument: string; from: When; to: When }[];
  /** Tasks whose samples are those of the programme's table, and whose levels follow from them. */
  levels?: readonly string[];
  /** From when the levels hold; else from the first day of the demo. */
  levelsFrom?: When;
  /** By name of the task. */
  unusual?: Readonly<Record<string, string>>;
  /** A sample of one of those tasks that is kept in spite of its field checks. */
  kept?: { task: string; sample: number; checks: readonly [number, number]; reason: string };
  samples?: readonly DemoSample[];
}

export const REMEASURE_AFTER_MONTHS = 24;

/** The standard's least: three samples of five minutes, and longer ones where the work comes in turns. */
const target = (task: string, sampleMin = 10) => ({ task, samplesCount: 3, sampleMin });

const worn = (
  drawn: number,
  day: number,
  at: string,
  levelDb: number,
  more: Partial<DemoSample> = {},
): DemoSample => ({
  task: null,
  drawn,
  day,
  at,
  durationMin: 60,
  levelDb,
  instrument: "Dosimeter, amber band",
  ...more,
});

/** A shift of a layout hand; the dosimeter shows nothing below 70 dB. */
const layoutShift = (
  drawn: number,
  day: number,
  levelDb: number,
  more: Partial<DemoSample> = {},
): DemoSample =>
  worn(drawn, day, "07:00", levelDb, {
    durationMin: 480,
    instrument: "Dosimeter, silver band",
    peakDb: 116.0,
    ...more,
  });

const UNDER_RANGE = {
  doubts: ["under-range"],
  keptReason:
    "Drawing office for most of the shift: the display showed under range, and the day is below what it reads.",
} as const;

export const SURVEYS: readonly DemoSurvey[] = [
  // What the levels at Ostmere rest on.
  {
    site: "ostmere",
    job: "Casting washer",
    name: "Casting wash, by tasks",
    purpose: "First measurement of the new wash line.",
    strategy: "task",
    state: "done",
    from: { daysAgo: 806 },
    to: { daysAgo: 804 },
    drawSeed: "wash line",
    observers: ["S. Ferrand", "J. Penhallow, safety representative"],
    riskFactors: {
      impulse: ["no"],
      vibration: ["no"],
      "ototoxic-substances": ["no", "The wash is water and soap."],
      "warning-signals": ["yes", "The conveyor's horn is heard at both ends."],
    },
    closingNote: "Three samples within 1.1 dB.",
    targets: [target("Casting wash")],
    people: { draw: 2 },
    levels: ["Casting wash"],
    levelsFrom: { daysAgo: 804 },
    kept: {
      task: "Casting wash",
      sample: 2,
      checks: [94.0, 93.2],
      reason: "Calibrator wet at the second check. The sample lies within 1.1 dB of the other two.",
    },
  },
  {
    site: "ostmere",
    job: "Test cell hand",
    name: "Test cell, by tasks",
    purpose:
      "Levels and spectra of every task around the cell, to choose protectors by octave bands.",
    strategy: "task",
    state: "done",
    from: { beforeFirst: 24 },
    to: { beforeFirst: 20 },
    drawSeed: "cell in spring",
    observers: ["S. Ferrand", "B. Rowntree-Adair, supervisor"],
    riskFactors: {
      impulse: ["no", "Backfires are rare and below 131 dB(C)."],
      vibration: ["no"],
      "ototoxic-substances": [
        "yes",
        "Exhaust: carbon monoxide is measured, the alarm stands at 20 ppm.",
      ],
      "warning-signals": ["yes", "The fire alarm in the cell has a beacon."],
    },
    closingNote: "All tasks within 1.1 dB; the control room's door was shut throughout.",
    targets: [
      target("Run-up"),
      target("Soak run"),
      target("Teardown", 15),
      target("Rigging", 15),
      target("Control room", 5),
      target("Break", 5),
    ],
    people: { draw: 3 },
    levels: ["Run-up", "Soak run", "Teardown", "Rigging", "Control room", "Break"],
    unusual: { Teardown: "An air wrench of the next bay was heard now and then." },
  },
  {
    site: "ostmere",
    job: "Fettler",
    name: "Fettling shop, by tasks",
    purpose: "Levels, spectra and peaks at grinders, chipping hammers and linishers.",
    strategy: "task",
    state: "done",
    from: { beforeFirst: 17 },
    to: { beforeFirst: 15 },
    drawSeed: "fettling in spring",
    observers: ["S. Ferrand", "P. Lanyon-Orr, supervisor", "M. Trevanion, safety representative"],
    riskFactors: {
      impulse: ["yes", "Chipping hammers: peaks up to 138.6 dB(C)."],
      vibration: ["yes", "Hand-arm vibration is assessed on its own."],
      "ototoxic-substances": ["no"],
      "warning-signals": ["yes", "Crane signals: the crane stops while chipping."],
    },
    closingNote: "Chipping needs protectors chosen by peaks as well.",
    targets: [
      target("Grinding", 15),
      target("Chipping", 15),
      target("Linishing", 15),
      target("Inspection", 5),
    ],
    people: { draw: 3 },
    levels: ["Grinding", "Chipping", "Linishing", "Inspection"],
  },

  // Whether those who share a job share its noise.
  {
    site: "ostmere",
    job: "Test cell hand",
    name: "Test cell hands, by job",
    purpose: "Do all test cell hands have the same day, as the nominal day says?",
    strategy: "job",
    state: "done",
    from: { daysAgo: 64 },
    to: { daysAgo: 61 },
    drawSeed: "one job or two",
    observers: ["S. Ferrand"],
    riskFactors: {
      impulse: ["no"],
      vibration: ["no"],
      "ototoxic-substances": ["yes", "As in the survey by tasks."],
      "warning-signals": ["yes", "As in the survey by tasks."],
    },
    closingNote:
      "They do not belong together: two are at the engine nearly all the time, two rig and tear down. To be split into two jobs before anything is adopted.",
    targets: [{ task: null, samplesCount: 8, sampleMin: 60 }],
    people: { draw: 4 },
    samples: [
      worn(0, 0, "07:10", 102.9),
      worn(2, 0, "08:30", 92.4),
      worn(1, 0, "10:15", 101.7),
      worn(3, 1, "06:45", 94.0),
      worn(0, 1, "09:20", 102.1),
      worn(2, 2, "07:30", 93.6, { unusual: "Stood at the open cell door for some minutes." }),
      worn(1, 2, "11:00", 102.6),
      worn(3, 3, "08:10", 92.9),
    ],
  },

  // Under way: what the new grinder has changed.
  {
    site: "ostmere",
    job: "Fettler",
    name: "Fettlers after the new grinder",
    purpose: "The pendant grinder was exchanged: do the levels of the spring survey still hold?",
    strategy: "task",
    state: "measuring",
    from: { daysAgo: 6 },
    to: { daysAgo: -8 },
    drawSeed: "new grinder",
    observers: ["S. Ferrand", "M. Trevanion, safety representative"],
    riskFactors: {
      impulse: ["yes", "Chipping as before."],
      vibration: ["yes", "The new grinder's handle is damped; to be assessed anew."],
      "ototoxic-substances": ["no"],
      "warning-signals": ["yes", "Crane signals as before."],
    },
    targets: [target("Grinding", 15), target("Chipping", 15), target("Linishing", 15)],
    people: { draw: 3 },
    reservations: [
      { instrument: "Dosimeter, green band", from: { daysAgo: 6 }, to: { daysAgo: 0 } },
    ],
    samples: [
      {
        task: "Grinding",
        drawn: 0,
        day: 1,
        at: "09:40",
        durationMin: 20,
        levelDb: 101.2,
        peakDb: 126.4,
        instrument: "Meter, class 1",
        place: "Pendant grinder, at the ear",
        unusual: "Guard rattled for the first minutes, then tightened.",
      },
    ],
  },

  // Planned: a certificate ends before the week does, and Dinward says so.
  {
    site: "ostmere",
    job: "Test cell hand, nights",
    name: "Nights in the test cell, by tasks",
    purpose: "Nights have longer soak runs than days: are the samples by day good for them?",
    strategy: "task",
    state: "planned",
    from: { daysAgo: -5 },
    to: { daysAgo: -9 },
    drawSeed: "nights in the cell",
    observers: ["A. Winterfeldt, supervisor"],
    riskFactors: {
      impulse: ["no"],
      vibration: ["no"],
      "ototoxic-substances": ["yes", "Exhaust, as by day."],
      "warning-signals": ["yes", "The beacon in the cell."],
    },
    targets: [target("Run-up"), target("Soak run"), target("Teardown", 15), target("Rigging", 15)],
    people: { draw: 3 },
    reservations: [
      { instrument: "Meter, class 1", from: { daysAgo: -5 }, to: { daysAgo: -7 } },
      { instrument: "Dosimeter, blue band", from: { daysAgo: -5 }, to: { daysAgo: -9 } },
    ],
  },

  // Kettle Bend.
  {
    site: "kettle-bend",
    job: "Plater",
    name: "Plate shop, by tasks",
    purpose:
      "Averages of the three cutting and joining tasks under the regulation's settings, and quiet ones beside them.",
    strategy: "task",
    state: "done",
    from: { beforeFirst: 19 },
    to: { beforeFirst: 15 },
    drawSeed: "plate shop",
    observers: ["D. Calloway-Nuñez", "S. Okonedo-Park, supervisor"],
    riskFactors: {
      impulse: ["yes", "Hammer blows: peaks up to 138.9 dB(C)."],
      vibration: ["yes", "Chipping and hammering by hand."],
      "ototoxic-substances": ["no", "Primers without toluene since last year."],
      "warning-signals": ["yes", "Crane horn, with a lamp in the hammer bay."],
    },
    closingNote: "Averages of worn dosimeters; the quiet tasks with the meter on slow.",
    targets: [
      target("Plate hammering", 30),
      target("Plasma cutting", 30),
      target("Welding and tacking", 30),
      target("Laying out", 5),
      target("Lunch room", 5),
    ],
    people: { draw: 3 },
    levels: [
      "Plate hammering",
      "Plasma cutting",
      "Welding and tacking",
      "Laying out",
      "Lunch room",
    ],
  },
  {
    site: "kettle-bend",
    job: "Compressor attendant",
    name: "Compressor house, by tasks",
    purpose: "Levels along the round and at the blow-down valve.",
    strategy: "task",
    state: "done",
    from: { beforeFirst: 12 },
    to: { beforeFirst: 10 },
    drawSeed: "compressors",
    observers: ["D. Calloway-Nuñez"],
    riskFactors: {
      impulse: ["no"],
      vibration: ["no"],
      "ototoxic-substances": ["no"],
      "warning-signals": ["yes", "The low-pressure horn is heard over the machines."],
    },
    closingNote: "The valve is the loudest place of the works.",
    targets: [target("Compressor rounds"), target("Blow-down", 5), target("Compressor desk", 5)],
    people: { draw: 3 },
    levels: ["Compressor rounds", "Blow-down", "Compressor desk"],
  },
  {
    site: "kettle-bend",
    job: "Layout hand",
    name: "Layout hands, full days",
    purpose: "Whole shifts, for days that come out another way each time.",
    strategy: "full-day",
    state: "done",
    from: { beforeFirst: 40 },
    to: { beforeFirst: 33 },
    drawSeed: "layout",
    observers: ["D. Calloway-Nuñez"],
    riskFactors: {
      impulse: ["no"],
      vibration: ["no"],
      "ototoxic-substances": ["no"],
      "warning-signals": ["no"],
    },
    closingNote: "Two shifts lay below what the dosimeter reads; they count as below.",
    targets: [{ task: null, samplesCount: 8, sampleMin: 420 }],
    people: { draw: 3 },
    samples: [
      layoutShift(0, 0, 81.4),
      layoutShift(1, 1, 78.2),
      layoutShift(2, 2, 70.0, UNDER_RANGE),
      layoutShift(0, 3, 79.3),
      layoutShift(1, 4, 82.6, { unusual: "Helped at the plasma table for an hour." }),
      layoutShift(2, 5, 76.9),
      layoutShift(0, 6, 70.0, UNDER_RANGE),
      layoutShift(1, 7, 80.1),
    ],
  },
  {
    site: "kettle-bend",
    job: "Forklift driver",
    name: "Forklift drivers, full days with threshold 80",
    purpose: "The truck's data sheet gives an energy mean, which can't prove a 5 dB dose.",
    strategy: "full-day",
    state: "planned",
    from: { daysAgo: -3 },
    to: { daysAgo: -7 },
    drawSeed: "forklifts",
    observers: ["L. Whitcombe-Sayre, supervisor"],
    riskFactors: {
      impulse: ["no"],
      vibration: ["yes", "Whole-body vibration of the seat is assessed on its own."],
      "ototoxic-substances": ["no"],
      "warning-signals": ["yes", "Other trucks' horns."],
    },
    targets: [{ task: null, samplesCount: 3, sampleMin: 420 }],
    people: { named: ["2964", "2966"] },
    reservations: [
      { instrument: "Dosimeter, silver band", from: { daysAgo: -3 }, to: { daysAgo: -7 } },
    ],
  },
];

/** Machines and controls that are no longer as they were measured. Days are working days of the crew. */
export const CHANGES: readonly {
  crew: string;
  day: number;
  task: string;
  kind: "machine" | "control";
  what: string;
}[] = [
  {
    crew: "Fettling days",
    day: 9,
    task: "Grinding",
    kind: "machine",
    what: "Pendant grinder at stand 2 exchanged for a new one with a damped handle",
  },
  {
    crew: "Compressor and stores",
    day: 23,
    task: "Blow-down",
    kind: "control",
    what: "Silencer fitted on the blow-down valve",
  },
];

/** The laboratory found the white band's microphone out of tolerance. */
export const FAILED_CALIBRATION = {
  instrument: "Dosimeter, white band",
  daysAgo: 16,
  foundErrorDb: -2.3,
  note: "Microphone reads 2.3 dB low at 4 kHz; sent for repair.",
} as const;

/** Out and back on the day of filling: who wears what on Fettling days, whose day is not entered yet. */
export const TODAY = {
  out: { instrument: "Dosimeter, green band", worker: "4403", at: "06:05", checkDb: 114.0 },
  back: [
    {
      instrument: "Dosimeter, amber band",
      worker: "4419",
      at: ["06:10", "10:15"],
      checks: [114.0, 113.9],
      averageDb: 99.4,
      peakDb: 136.2,
      unusual: "Until the second break: the afternoon is another worker's.",
    },
    {
      instrument: "Dosimeter, blue band",
      worker: "4431",
      at: ["06:20", "10:25"],
      checks: [114.1, 114.0],
      averageDb: 98.8,
      peakDb: 135.7,
      unusual: null,
    },
  ],
} as const;

/** A shift that an instrument logged, of whoever of these was there and had nothing else on that day. */
export interface DemoHistory {
  site: SiteKey;
  workers: readonly string[];
  /** The last day it may be. */
  daysAgo: number;
  instrument: string;
  channels: readonly ("laeq" | "las" | "lcpeak")[];
  /** How far the shift lies from its tasks' levels. */
  deviationDb: number;
  survey?: string;
  /** Tasks whose first stretch is bracketed; all: every stretch. */
  brackets?: readonly string[] | "all";
  /** Seconds of a task during which the microphone was knocked about. */
  knocked?: { task: string; afterS: number; forS: number; reason: string };
}

const shift = (
  site: SiteKey,
  workers: readonly string[],
  daysAgo: number,
  deviationDb: number,
  more: Partial<DemoHistory> = {},
): DemoHistory => ({
  site,
  workers,
  daysAgo,
  deviationDb,
  instrument: site === "ostmere" ? "Dosimeter, green band" : "Dosimeter, silver band",
  channels: ["laeq", "las", "lcpeak"],
  ...more,
});

export const HISTORIES: readonly DemoHistory[] = [
  shift("ostmere", ["4419", "4433", "4431"], 2, 0.1, {
    survey: "Fettlers after the new grinder",
    brackets: ["Grinding", "Chipping", "Linishing"],
    knocked: {
      task: "Linishing",
      afterS: 2400,
      forS: 260,
      reason: "Microphone knocked against the rail again and again while a part was turned",
    },
  }),
  shift("ostmere", ["3340", "3352", "3388"], 3, -0.2, { brackets: "all" }),
  shift("ostmere", ["4121", "4133", "4137"], 5, 0.2, {
    brackets: "all",
    instrument: "Dosimeter, amber band",
  }),
  shift("ostmere", ["4139"], 7, 0, { channels: ["laeq"], instrument: "Dosimeter, amber band" }),
  shift("ostmere", ["4442", "4447"], 8, -0.1, { brackets: "all" }),
  shift("ostmere", ["3402", "3315"], 12, 0.3),
  shift("ostmere", ["4120", "4128", "4121"], 13, -0.3, { instrument: "Dosimeter, amber band" }),
  shift("ostmere", ["4002", "4005", "4011"], 15, 0.2, { brackets: "all" }),
  shift("ostmere", ["4433", "4431"], 22, -0.1),
  shift("kettle-bend", ["2877", "2880"], 4, 0.2, { brackets: "all" }),
  shift("kettle-bend", ["2899", "2903", "2907"], 6, 0, { brackets: "all" }),
  shift("kettle-bend", ["2891", "2893", "2896"], 10, -0.2, { brackets: "all" }),
  shift("kettle-bend", ["2951", "2954"], 16, 0.1, { brackets: "all" }),
];

/** What was recorded at a task to say how its noise spreads over the bands; the audio went once that was known. */
export const RECORDINGS = [
  {
    site: "ostmere",
    task: "Linishing",
    daysAgo: 1,
    at: "09:15",
    fileName: "linishing, belt 2.wav",
  },
  {
    site: "kettle-bend",
    task: "Compressor rounds",
    daysAgo: 2,
    at: "13:40",
    fileName: "compressor house, at the second machine.wav",
  },
] as const satisfies readonly {
  site: SiteKey;
  task: string;
  daysAgo: number;
  at: string;
  fileName: string;
}[];

/** A sample of chipping logged eight times a second. */
export const FINE_HISTORY = {
  survey: "Fettlers after the new grinder",
  task: "Chipping",
  day: 2,
  at: "10:05",
  durationMin: 30,
  levelDb: 103.8,
  instrument: "Meter, class 1",
  place: "Chipping bench, at the ear",
} as const;
