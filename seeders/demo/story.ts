import type { MeterSettings, Unaccounted } from "../../shared/acoustics/types";
import type { FindingKind, FindingStepInput } from "../../shared/schemas/finding";
import {
  ENERGY_MEAN,
  RECOMMENDED_DOSE,
  type SiteKey,
  THRESHOLD_80,
  THRESHOLD_90,
} from "./programme";
import { type DemoProtector, WORN_MARSH_CAP } from "./protectors";

/**
 * What departs from the usual, as chapters: each gives one or more findings a reason. Days are working days before the
 * day of filling, counted on the calendar of the crew concerned: 0 is today, 1 the working day before. A chapter that
 * begins before the first day of the demo is left out as a whole.
 */
export interface Chapter {
  title: string;
  departures?: readonly Departure[];
  steps?: readonly Step[];
}

/** Working days before today, or after the first day of the demo. */
export type Day = number | { readonly in: number };

/** A shift that was not as usual. */
export interface Departure {
  worker: string;
  /** One day, or the days from the first to the last. */
  day: number | readonly [from: number, to: number];
  /** Works with this crew on loan, with this job's tasks. */
  onLoan?: { crew: string; job: string };
  isAbsent?: boolean;
  minutes?: Readonly<Record<string, number>>;
  /** Minutes of the shift that nobody can say anything about. */
  leavesOutMin?: number;
  /** Share worn by task, percent; null: not known. Of all tasks in noise where a plain value stands. */
  worn?: Readonly<Record<string, number>> | null;
  note?: string;
  run?: DemoRun;
}

export interface DemoRun {
  instrument: string;
  checks: readonly [beforeDb: number, afterDb: number | null];
  /** Why it counts in spite of what speaks against it. */
  keptReason?: string;
  unusual?: string;
  readings: readonly {
    settings: MeterSettings;
    averageDb?: number;
    dosePct?: number;
    lceqDb?: number;
    lasMaxDb?: number;
    peakDb?: number;
  }[];
}

/** The finding of a worker or of a job; without a criterion the only one of its kind. */
export interface About {
  worker?: string;
  job?: string;
  kind: FindingKind;
  criterion?: string;
}

type Stepping = FindingStepInput | { kind: "take-in-hand"; dueInDays: number };

export type Deed =
  | {
      assign: {
        workers: readonly string[];
        inner: string;
        outer?: string;
        task?: string;
        area?: string;
        toDay?: number;
      };
    }
  | {
      protectorData: {
        model: string;
        data: DemoProtector["data"] | "as at first";
        fromDay: number;
        reason: string;
      };
    }
  | {
      measureAnew: {
        task: string;
        job: string;
        survey: string;
        samplesDb: readonly number[];
        reason: string;
      };
    }
  | { rules: { site: SiteKey; governing: string; comparison: readonly string[]; reason: string } }
  | { finding: About; step: Stepping }
  | {
      closeAll: { site: SiteKey; criterionOf: string; except: readonly FindingKind[] };
      reason: string;
    }
  | {
      correct: {
        worker: string;
        day: number;
        minutes?: Readonly<Record<string, number>>;
        unaccounted?: Unaccounted;
        reason: string;
      };
    }
  | { voidShift: { worker: string; day: number; reason: string } }
  | { loan: { worker: string; crew: string; toDay: number } }
  | { report: { worker: string; text: string } };

export type Step = Deed & {
  /** On whose calendar the day counts. */
  crew: string;
  day: Day;
  at: string;
  /** Who does it, as in the list of people. */
  by: string;
};

const step = (crew: string, by: string, day: Day, at: string, deed: Deed): Step => ({
  ...deed,
  crew,
  by,
  day,
  at,
});
const fettling = (day: Day, at: string, deed: Deed, by = "s.ferrand") =>
  step("Fettling days", by, day, at, deed);
const lates = (day: Day, at: string, deed: Deed, by = "s.ferrand") =>
  step("Fettling lates", by, day, at, deed);
const cell = (day: Day, at: string, deed: Deed, by = "s.ferrand") =>
  step("Test cell days", by, day, at, deed);
const nights = (day: Day, at: string, deed: Deed, by = "s.ferrand") =>
  step("Test cell nights", by, day, at, deed);
const plate = (day: Day, at: string, deed: Deed, by = "d.calloway") =>
  step("Plate shop days", by, day, at, deed);
const stores = (day: Day, at: string, deed: Deed, by = "d.calloway") =>
  step("Compressor and stores", by, day, at, deed);

/** A dosimeter at Ostmere: one energy mean with its C-weighted peak. */
const energyRun = (
  averageDb: number,
  peakDb: number,
  instrument = "Dosimeter, green band",
): DemoRun => ({
  instrument,
  checks: [114.0, 113.9],
  readings: [{ settings: ENERGY_MEAN, averageDb, peakDb }],
});

/** A hammer hand's dosimeter in the trial week: the recommendation's dose beside the regulation's two. */
const trialRun = (dosePct: number): DemoRun => ({
  instrument: "Dosimeter, red band",
  checks: [114.0, 114.1],
  readings: [
    { settings: RECOMMENDED_DOSE, dosePct, lasMaxDb: 112.8, peakDb: 138.2 },
    { settings: THRESHOLD_90, dosePct: 131 },
    { settings: THRESHOLD_80, dosePct: 158 },
  ],
});

export const STORY: readonly Chapter[] = [
  {
    title: "R. Szabó has no protector since today: the agency's loan of plugs ended yesterday",
    departures: [
      {
        worker: "3425",
        day: 0,
        minutes: {
          Rigging: 40,
          "Run-up": 120,
          "Soak run": 90,
          Teardown: 130,
          "Control room": 70,
          Break: 30,
        },
      },
    ],
  },
  {
    title: "Y. Tanaka-Bell is absent today",
    departures: [{ worker: "3411", day: 0, isAbsent: true }],
  },
  {
    title:
      "D. Tavernor gave the muff to be cleaned and wore a Sedge band at the chipping hammer: over the limit yesterday",
    departures: [
      {
        worker: "4417",
        day: 1,
        minutes: { Grinding: 150, Chipping: 120, Linishing: 110, Break: 30 },
        note: "Muff away for cleaning, Sedge band from the box.",
      },
    ],
    steps: [
      fettling(1, "05:50", { assign: { workers: ["4417"], inner: "Sedge band" } }),
      fettling(0, "08:20", {
        finding: { worker: "4417", kind: "over-limit-at-ear" },
        step: { kind: "take-in-hand", dueInDays: 1 },
      }),
    ],
  },
  {
    title: "M. Dąbrowik takes the muff off at the grinder: closed once, and back",
    departures: [
      {
        worker: "4403",
        day: 33,
        minutes: { Grinding: 160, Chipping: 80, Linishing: 110, Break: 30 },
        worn: { Grinding: 95 },
      },
      {
        worker: "4403",
        day: 1,
        minutes: { Grinding: 160, Chipping: 70, Linishing: 110, Break: 30 },
        worn: { Grinding: 95 },
        note: "Off for eight minutes at the grinder, between parts.",
      },
    ],
    steps: [
      fettling(32, "09:00", {
        finding: { worker: "4403", kind: "not-worn-long-enough" },
        step: { kind: "take-in-hand", dueInDays: 3 },
      }),
      fettling(
        31,
        "13:30",
        {
          finding: { worker: "4403", kind: "not-worn-long-enough" },
          step: { kind: "mark-done", text: "Talked it through at the grinder." },
        },
        "p.lanyon",
      ),
      fettling(29, "10:15", {
        finding: { worker: "4403", kind: "not-worn-long-enough" },
        step: { kind: "close", text: "Worn throughout on the three days since." },
      }),
    ],
  },
  {
    title: "H. Lindqvist has the Fenmuff on in teardown as well, where it takes far too much",
    steps: [
      cell(6, "05:45", { assign: { workers: ["3367"], inner: "Fenmuff", task: "Teardown" } }),
    ],
  },
  {
    title: "V. Ostrowicki was given a muff for the casting wash: too much, back to the band",
    steps: [
      fettling(36, "06:05", { assign: { workers: ["4442"], inner: "Fenmuff low" } }),
      fettling(34, "15:00", {
        finding: { worker: "4442", kind: "protects-too-much" },
        step: { kind: "take-in-hand", dueInDays: 7 },
      }),
      fettling(31, "06:00", { assign: { workers: ["4442"], inner: "Sedge band" } }),
      fettling(30, "15:00", {
        finding: { worker: "4442", kind: "protects-too-much" },
        step: {
          kind: "close",
          text: "Sedge band again: 75 at the ear in the casting wash, and calls are heard.",
        },
      }),
    ],
  },
  {
    title:
      "J. Castellow and K. Haldorsen wear Tern active: fine with its active part on, too little without",
    steps: [
      cell(30, "05:40", { assign: { workers: ["3318"], inner: "Tern active" } }),
      cell(28, "11:00", {
        finding: { worker: "3318", kind: "protects-too-little" },
        step: { kind: "take-in-hand", dueInDays: 60 },
      }),
      cell(28, "11:05", {
        finding: { worker: "3318", kind: "protects-too-little" },
        step: {
          kind: "comment",
          text: "With the active part on 78 at the ear in Run-up. It counts once the check of the active part on the worker is passed; until then 93 stands.",
        },
      }),
      nights(16, "18:30", { assign: { workers: ["3982"], inner: "Tern active" } }),
      nights(14, "11:10", {
        finding: { worker: "3982", kind: "protects-too-little" },
        step: { kind: "take-in-hand", dueInDays: 45 },
      }),
    ],
  },
  {
    title:
      "N. Okwuosa and L. Ferreira-Quist wear Wren active in the soak run: just enough without the active part, good with it",
    steps: [
      cell(38, "05:40", { assign: { workers: ["3352"], inner: "Wren active", task: "Soak run" } }),
      nights(19, "18:30", {
        assign: { workers: ["3991"], inner: "Wren active", task: "Soak run" },
      }),
    ],
  },
  {
    title:
      "C. Marchetti wears foam under a muff for the runs: the regulation wants a test of the two together, and there is none",
    steps: [
      cell(9, "05:40", {
        assign: { workers: ["3390"], inner: "Alder foam", outer: "Fenmuff", task: "Run-up" },
      }),
    ],
  },
  {
    title:
      "A week with hard cushions: four Marsh cap sets measured on the wearers, new cushions, data as at first",
    steps: [
      fettling(20, "14:10", {
        protectorData: {
          model: "Marsh cap",
          data: WORN_MARSH_CAP,
          fromDay: 24,
          reason: "Cushions gone hard: measured on three wearers on Friday, worn so since Monday",
        },
      }),
      ...["4419", "4425"].map((worker) =>
        fettling(20, "15:20", {
          finding: { worker, kind: "over-limit-at-ear" },
          step: { kind: "take-in-hand", dueInDays: 2 },
        }),
      ),
      lates(20, "15:22", {
        finding: { worker: "4126", kind: "over-limit-at-ear" },
        step: { kind: "take-in-hand", dueInDays: 2 },
      }),
      fettling(19, "05:30", {
        protectorData: {
          model: "Marsh cap",
          data: "as at first",
          fromDay: 19,
          reason: "New cushions on all four sets",
        },
      }),
      ...["4419", "4425"].map((worker) =>
        fettling(
          18,
          "13:45",
          {
            finding: { worker, kind: "over-limit-at-ear" },
            step: { kind: "mark-done", text: "New cushions fitted and looked at." },
          },
          "p.lanyon",
        ),
      ),
      lates(
        18,
        "21:00",
        {
          finding: { worker: "4126", kind: "over-limit-at-ear" },
          step: { kind: "mark-done", text: "New cushions fitted." },
        },
        "m.trevanion",
      ),
      ...["4419", "4425"].flatMap((worker) =>
        (["over-limit-at-ear", "protects-too-little"] as const).map((kind) =>
          fettling(15, "09:30", {
            finding: { worker, kind },
            step: {
              kind: "close",
              text: "New cushions: 81 at the ear in chipping on every day since.",
            },
          }),
        ),
      ),
      ...(["over-limit-at-ear", "protects-too-little"] as const).map((kind) =>
        lates(15, "09:40", {
          finding: { worker: "4126", kind },
          step: {
            kind: "close",
            text: "New cushions: 81 at the ear in chipping on every day since.",
          },
        }),
      ),
    ],
  },
  {
    title:
      "K. Nwosu-Ray needs no more than 80 at the ear: a trial of Willow plug was too little for her",
    steps: [
      fettling(13, "05:50", { assign: { workers: ["4408"], inner: "Willow plug" } }),
      fettling(12, "15:10", {
        finding: { worker: "4408", kind: "protects-too-little" },
        step: { kind: "take-in-hand", dueInDays: 1 },
      }),
      fettling(11, "05:50", { assign: { workers: ["4408"], inner: "Fenmuff low" } }),
      fettling(9, "10:00", {
        finding: { worker: "4408", kind: "protects-too-little" },
        step: { kind: "close", text: "Back to Fenmuff low, which holds her 80 in chipping." },
      }),
    ],
  },
  {
    title:
      "I. Brânzaru is new from the agency: on the first days nobody asked how long the plugs were worn",
    departures: [{ worker: "4440", day: [7, 5], worn: null }],
    steps: [
      fettling(4, "08:40", {
        finding: { worker: "4440", kind: "wearing-unknown" },
        step: { kind: "take-in-hand", dueInDays: 2 },
      }),
      fettling(
        2,
        "13:50",
        {
          finding: { worker: "4440", kind: "wearing-unknown" },
          step: {
            kind: "mark-done",
            text: "Asked: worn throughout, and it stands in the entry since.",
          },
        },
        "p.lanyon",
      ),
    ],
  },
  {
    title: "L. Grzelak's wearing time was left blank: what the round of the week before saw counts",
    departures: [{ worker: "4422", day: [4, 2], worn: null }],
    steps: [],
  },
  {
    title: "L. Mbeki-Stroud's dosimeter says far more than the tasks do",
    departures: [
      {
        worker: "4120",
        day: 4,
        minutes: { Grinding: 60, Chipping: 20, Linishing: 60, Inspection: 310, Break: 30 },
        run: energyRun(101.9, 137.4),
      },
    ],
    steps: [
      lates(3, "15:30", {
        finding: { worker: "4120", kind: "reading-gap" },
        step: { kind: "take-in-hand", dueInDays: 7 },
      }),
    ],
  },
  {
    title:
      "C. Dubois-Hale's slip was misread: chipping was 150 minutes, and the corrected shift agrees with the dosimeter",
    departures: [
      {
        worker: "4425",
        day: 27,
        minutes: { Grinding: 60, Chipping: 15, Linishing: 60, Inspection: 315, Break: 30 },
        run: energyRun(101.2, 137.9),
      },
    ],
    steps: [
      fettling(26, "09:20", {
        correct: {
          worker: "4425",
          day: 27,
          minutes: { Grinding: 120, Chipping: 150, Linishing: 110, Inspection: 70, Break: 30 },
          reason: "The slip says 150 minutes of chipping, not 15",
        },
      }),
    ],
  },
  {
    title:
      "N. Petrosyan-Cole's dosimeter drifted by 0.8 dB over the shift; the run is kept, and says so",
    departures: [
      {
        worker: "4130",
        day: 6,
        minutes: { Grinding: 160, Chipping: 80, Linishing: 110, Inspection: 100, Break: 30 },
        run: {
          ...energyRun(99.6, 137.2),
          checks: [114.0, 113.2],
          keptReason:
            "Calibrator cold from the yard at the second check; at noon the next day it read 114.0 again.",
        },
      },
    ],
  },
  {
    title: "E. Kvarnberg: an hour of which nobody knows",
    departures: [{ worker: "4128", day: 2, leavesOutMin: 60 }],
  },
  {
    title: "B. Tremayne: 45 minutes not accounted for, found to be first-aid training",
    departures: [{ worker: "3371", day: 27, leavesOutMin: 45 }],
    steps: [
      cell(26, "10:30", {
        correct: {
          worker: "3371",
          day: 27,
          unaccounted: { how: "quiet", levelDb: 62 },
          reason: "First-aid training in the canteen, as the list of those present shows",
        },
      }),
    ],
  },
  {
    title: "T. Rasmussel's shift was entered for a day of leave, and voided",
    steps: [
      lates(14, "15:40", {
        voidShift: { worker: "4126", day: 16, reason: "Entered for the wrong day: was on leave" },
      }),
    ],
  },
  {
    title: "L. Grzelak on loan to the test cell for two weeks, with foam for the cell",
    departures: [
      { worker: "4422", day: [18, 9], onLoan: { crew: "Test cell days", job: "Test cell hand" } },
    ],
    steps: [
      fettling(18, "05:30", { loan: { worker: "4422", crew: "Test cell days", toDay: 9 } }),
      fettling(18, "05:35", {
        assign: { workers: ["4422"], inner: "Alder foam", area: "Engine test cell", toDay: 9 },
      }),
      fettling(18, "05:36", {
        assign: { workers: ["4422"], inner: "Sedge band", task: "Teardown", toDay: 9 },
      }),
    ],
  },
  {
    title: "R. Hollenkamp reports that the headband presses on the spectacles",
    steps: [
      lates(
        2,
        "21:40",
        {
          report: {
            worker: "4133",
            text: "Der Bügel drückt auf die Brille. Beim Putzen nehme ich den Gehörschützer deshalb ab.",
          },
        },
        "r.hollenkamp",
      ),
    ],
  },

  {
    title: "Chipping hammers: peaks past the upper action value, for the whole group",
    steps: [
      fettling({ in: 2 }, "11:00", {
        finding: {
          job: "Fettler",
          kind: "peak-or-ceiling",
          criterion: "uk-2005:upper-action-peak",
        },
        step: { kind: "take-in-hand", dueInDays: 600 },
      }),
      fettling(24, "11:05", {
        finding: {
          job: "Fettler",
          kind: "peak-or-ceiling",
          criterion: "uk-2005:upper-action-peak",
        },
        step: { kind: "comment", text: "Hammers with a damped chisel are ordered for trial." },
      }),
    ],
  },
  {
    title: "A hammer blow past the peak: P. Iwanek's dosimeter",
    departures: [
      {
        worker: "2875",
        day: 3,
        run: {
          instrument: "Dosimeter, red band",
          checks: [114.0, 113.8],
          unusual: "One blow on the empty anvil at 10:42.",
          readings: [
            { settings: THRESHOLD_90, dosePct: 126, lasMaxDb: 112.9, peakDb: 141.6 },
            { settings: THRESHOLD_80, dosePct: 152 },
            { settings: RECOMMENDED_DOSE, dosePct: 2870 },
          ],
        },
      },
    ],
  },
  {
    title:
      "N. Castellan-Ruiz stood at the blow-down valve above the ceiling; a silencer was fitted",
    departures: [
      {
        worker: "2953",
        day: 29,
        run: {
          instrument: "Dosimeter, red band",
          checks: [114.0, 114.0],
          readings: [
            { settings: THRESHOLD_80, dosePct: 61, lasMaxDb: 116.8, peakDb: 127.0 },
            { settings: THRESHOLD_90, dosePct: 48 },
          ],
        },
      },
    ],
    steps: [
      stores(28, "09:15", {
        finding: {
          worker: "2953",
          kind: "peak-or-ceiling",
          criterion: "us-general-industry:ceiling",
        },
        step: { kind: "take-in-hand", dueInDays: 7 },
      }),
      stores(22, "14:00", {
        finding: {
          worker: "2953",
          kind: "peak-or-ceiling",
          criterion: "us-general-industry:ceiling",
        },
        step: {
          kind: "close",
          text: "Silencer fitted on the valve: 106 on slow at the same place.",
        },
      }),
    ],
  },
  {
    title: "Hammer hands over the limit without protection: controls are owed, and on their way",
    steps: ["2875", "2877", "2880", "2884"].flatMap((worker) => [
      plate({ in: 1 }, "10:00", {
        finding: { worker, kind: "over-limit-outside", criterion: "us-general-industry:limit" },
        step: { kind: "take-in-hand", dueInDays: 90 },
      }),
      plate(
        39,
        "14:20",
        {
          finding: { worker, kind: "over-limit-outside", criterion: "us-general-industry:limit" },
          step: { kind: "mark-done", text: "Two hands take turns at the hammer." },
        },
        "s.okonedo",
      ),
      plate(38, "10:00", {
        finding: { worker, kind: "over-limit-outside", criterion: "us-general-industry:limit" },
        step: { kind: "take-in-hand", dueInDays: 120 },
      }),
      plate(38, "10:05", {
        finding: { worker, kind: "over-limit-outside", criterion: "us-general-industry:limit" },
        step: {
          kind: "comment",
          text: "Turns are not enough: still over. A damped bench for the hammer bay is ordered.",
        },
      }),
    ]),
  },
  {
    title: "Forklift drivers: only an energy mean, which can't prove a 5 dB dose",
    steps: [
      stores({ in: 2 }, "11:00", {
        finding: { job: "Forklift driver", kind: "reading-missing" },
        step: { kind: "take-in-hand", dueInDays: 600 },
      }),
      stores(37, "11:05", {
        finding: { job: "Forklift driver", kind: "reading-missing" },
        step: {
          kind: "comment",
          text: "A run with threshold 80 on both drivers as soon as the red dosimeter is back from the plate shop.",
        },
      }),
    ],
  },
  {
    title: "Three days judged by the recommendation, to see who would need two protectors",
    departures: [
      { worker: "2875", day: 26, run: trialRun(3720) },
      { worker: "2877", day: 25, run: trialRun(3540) },
      { worker: "2884", day: 24, run: trialRun(3960) },
    ],
    steps: [
      plate(26, "06:30", {
        rules: {
          site: "kettle-bend",
          governing: "niosh-rel",
          comparison: ["us-general-industry"],
          reason: "Trial of three days: who would need two protectors by the recommendation?",
        },
      }),
      plate(23, "06:30", {
        rules: {
          site: "kettle-bend",
          governing: "us-general-industry",
          comparison: ["niosh-rel"],
          reason: "End of the trial: the regulation governs again",
        },
      }),
      plate(23, "09:00", {
        closeAll: { site: "kettle-bend", criterionOf: "niosh-rel", except: ["dual-protection"] },
        reason:
          "Trial days: the recommendation is there for comparison. Two protectors at the hammer are kept.",
      }),
      ...["2875", "2877", "2884"].map((worker) =>
        plate(23, "09:30", {
          finding: { worker, kind: "dual-protection" },
          step: { kind: "take-in-hand", dueInDays: 30 },
        }),
      ),
      plate(21, "06:40", {
        assign: {
          workers: ["2875", "2877"],
          inner: "Alder foam",
          outer: "Fenmuff",
          area: "Hammer bay",
        },
      }),
      plate(
        20,
        "13:00",
        {
          finding: { worker: "2875", kind: "dual-protection" },
          step: { kind: "mark-done", text: "Foam under the muff, shown and tried." },
        },
        "s.okonedo",
      ),
      plate(
        17,
        "13:10",
        {
          finding: { worker: "2877", kind: "dual-protection" },
          step: { kind: "mark-done", text: "Foam under the muff since Monday." },
        },
        "s.okonedo",
      ),
      plate(16, "10:00", {
        finding: { worker: "2875", kind: "dual-protection" },
        step: { kind: "close", text: "Seen at the hammer on three days with both on." },
      }),
      plate(
        15,
        "11:20",
        {
          finding: { worker: "2884", kind: "dual-protection" },
          step: { kind: "cannot", text: "Foam makes the ears sore; another size is ordered." },
        },
        "s.okonedo",
      ),
    ],
  },
  {
    title: "V. Arcenault reported a cracked band, which was replaced",
    steps: [
      stores(
        21,
        "12:15",
        { report: { worker: "2964", text: "The band is cracked and one pod falls off." } },
        "v.arcenault",
      ),
      stores(20, "08:30", {
        finding: { worker: "2964", kind: "problem-reported" },
        step: { kind: "close", text: "New band given out on the same day." },
      }),
    ],
  },

  // Longer ago.
  {
    title: "A new extraction hood at the linishers: the task was measured again",
    steps: [
      fettling(110, "15:00", {
        measureAnew: {
          task: "Linishing",
          job: "Fettler",
          survey: "Linishers after the new extraction hood",
          samplesDb: [95.5, 96.6, 95.5],
          reason: "New extraction hood, measured again",
        },
      }),
    ],
  },
  {
    title: "D. Achterberg's first protector was too little for the run-up",
    steps: [
      nights(180, "18:20", { assign: { workers: ["3985"], inner: "Rush level" } }),
      nights(178, "09:00", {
        finding: { worker: "3985", kind: "protects-too-little" },
        step: { kind: "take-in-hand", dueInDays: 2 },
      }),
      nights(176, "18:20", { assign: { workers: ["3985"], inner: "Alder foam" } }),
      nights(174, "09:10", {
        finding: { worker: "3985", kind: "protects-too-little" },
        step: { kind: "close", text: "Foam holds the low end: 80 at the ear in Run-up." },
      }),
    ],
  },
];
