import type { OctaveBandValues } from "../../shared/acoustics/types";
import type { SiteKey } from "./programme";

/** What came in for a site, days before the demo's last day. */
export const STOCK: readonly {
  site: SiteKey;
  model: string;
  part?: "cushions" | "tips";
  moves: readonly { kind: "received" | "lost" | "damaged"; quantity: number; daysAgo: number }[];
}[] = [
  { site: "ostmere", model: "Fenmuff", moves: [received(20, 300), lost(1, 44)] },
  { site: "ostmere", model: "Fenmuff low", moves: [received(24, 300), damaged(2, 90)] },
  { site: "ostmere", model: "Marsh cap", moves: [received(10, 300)] },
  { site: "ostmere", model: "Alder foam", moves: [received(2000, 60)] },
  { site: "ostmere", model: "Willow plug", moves: [received(30, 200), lost(4, 20)] },
  { site: "ostmere", model: "Sedge band", moves: [received(40, 300)] },
  { site: "ostmere", model: "Rush level", moves: [received(6, 200)] },
  { site: "ostmere", model: "Curlew headset", moves: [received(3, 200)] },
  { site: "ostmere", model: "Tern active", moves: [received(2, 40), damaged(1, 6)] },
  { site: "ostmere", model: "Wren active", moves: [received(4, 45)] },
  { site: "ostmere", model: "Fenmuff low", part: "cushions", moves: [received(40, 300)] },
  { site: "ostmere", model: "Marsh cap", part: "cushions", moves: [received(12, 30)] },
  { site: "kettle-bend", model: "Fenmuff", moves: [received(12, 300)] },
  { site: "kettle-bend", model: "Fenmuff low", moves: [received(12, 300)] },
  { site: "kettle-bend", model: "Willow plug", moves: [received(40, 200)] },
  { site: "kettle-bend", model: "Sedge band", moves: [received(30, 300)] },
  { site: "kettle-bend", model: "Teal visitor plug", moves: [received(50, 150), lost(50, 3)] },
];

function received(quantity: number, daysAgo: number) {
  return { kind: "received", quantity, daysAgo } as const;
}
function lost(quantity: number, daysAgo: number) {
  return { kind: "lost", quantity, daysAgo } as const;
}
function damaged(quantity: number, daysAgo: number) {
  return { kind: "damaged", quantity, daysAgo } as const;
}

/** Handed out again, of the same model as before: whoever got one late has its cushions not due yet. */
export const ISSUES: readonly {
  worker: string;
  model: string;
  daysAgo: number;
  isAcknowledged: boolean;
}[] = [
  { worker: "4403", model: "Fenmuff low", daysAgo: 196, isAcknowledged: true },
  { worker: "4120", model: "Fenmuff low", daysAgo: 170, isAcknowledged: true },
  { worker: "4121", model: "Fenmuff low", daysAgo: 30, isAcknowledged: true },
  { worker: "4419", model: "Marsh cap", daysAgo: 12, isAcknowledged: true },
  { worker: "4433", model: "Curlew headset", daysAgo: 8, isAcknowledged: false },
  { worker: "2951", model: "Fenmuff low", daysAgo: 188, isAcknowledged: true },
];

/** Rounds through the shop: how often each was seen wearing it, and how often seen at all. */
export const ROUNDS: readonly {
  site: SiteKey;
  daysAgo: number;
  note: string;
  looks: readonly { worker: string; task: string; worn: number; seen: number }[];
}[] = [
  {
    site: "ostmere",
    daysAgo: 13,
    note: "Before the break, both ends of the shop",
    looks: [
      { worker: "4403", task: "Grinding", worn: 5, seen: 5 },
      { worker: "4419", task: "Grinding", worn: 4, seen: 5 },
      { worker: "4422", task: "Grinding", worn: 5, seen: 5 },
      { worker: "4422", task: "Chipping", worn: 4, seen: 4 },
      { worker: "4422", task: "Linishing", worn: 5, seen: 5 },
      { worker: "4425", task: "Chipping", worn: 5, seen: 5 },
      { worker: "4431", task: "Chipping", worn: 3, seen: 5 },
    ],
  },
  {
    site: "ostmere",
    daysAgo: 5,
    note: "",
    looks: [
      { worker: "4403", task: "Grinding", worn: 6, seen: 6 },
      { worker: "4431", task: "Chipping", worn: 6, seen: 6 },
      { worker: "4433", task: "Linishing", worn: 4, seen: 4 },
    ],
  },
  {
    site: "kettle-bend",
    daysAgo: 6,
    note: "At the valves, while the lines were blown down",
    looks: [
      { worker: "2951", task: "Compressor rounds", worn: 4, seen: 4 },
      { worker: "2953", task: "Blow-down", worn: 3, seen: 4 },
    ],
  },
];

/** What has to be heard, unweighted at the worker's place, 63 Hz to 8 kHz. */
export const SIGNALS: readonly {
  site: SiteKey;
  area: string | null;
  name: string;
  meaning: string;
  octaveBandsDb: OctaveBandValues;
}[] = [
  {
    site: "ostmere",
    area: "Engine test cell",
    name: "Cell horn",
    meaning: "Leave the cell: the engine is about to be run up",
    octaveBandsDb: [62, 70, 92, 109, 106, 98, 88, 74],
  },
  {
    site: "ostmere",
    area: "Engine test cell",
    name: "Gas warning buzzer",
    meaning: "Leave the cell: fuel vapour",
    octaveBandsDb: [40, 44, 50, 58, 70, 88, 92, 84],
  },
  {
    site: "ostmere",
    area: "Fettling shop",
    name: "Crane bell",
    meaning: "A load is moved overhead",
    octaveBandsDb: [46, 52, 60, 72, 94, 101, 96, 82],
  },
  {
    site: "kettle-bend",
    area: null,
    name: "Works siren",
    meaning: "Leave the building by the nearest way",
    octaveBandsDb: [60, 74, 96, 108, 102, 92, 82, 70],
  },
];

/** Foam under the muff, tested together once: less than the two would add up to. */
export const TESTED_TOGETHER = {
  inner: "Alder foam",
  outer: "Fenmuff low",
  daysAgo: 120,
  bands: {
    meanDb: [37, 36, 38, 42, 41, 40, 46, 46] as OctaveBandValues,
    sdDb: [6, 5.8, 5.5, 5, 4, 3.8, 4.2, 4.6] as OctaveBandValues,
  },
} as const;

/** A radio in the headset, at the ear while worn, dB(A). */
export const HEADSET_AUDIO_DB = 72;

/**
 * Octave bands off a meter with one microphone outside J. Castellow's cups in turn and one inside, in the run-up: the
 * active part does what its test report says.
 */
export const ACTIVE_CHECK = {
  worker: "3318",
  model: "Tern active",
  task: "Run-up",
  daysAgo: 2,
  outsideDb: [106, 104, 100, 96, 93, 90, 86, 80] as OctaveBandValues,
  /** By ear the noise reduction with the active part off, and what it takes off more, dB. */
  ears: [
    {
      ear: "left",
      reductionDb: [10, 9, 13, 21, 28, 30, 34, 32],
      activeDb: [9, 16, 19, 14, 4, -2, 0, 0],
    },
    {
      ear: "right",
      reductionDb: [11, 10, 14, 21, 29, 30, 33, 33],
      activeDb: [9, 15, 19, 13, 4, -1, 0, 0],
    },
  ],
} as const;
