import type { SiteKey } from "./programme";

/** What was tried and kept, in the names of the programme. */
export const PLANS: readonly {
  site: SiteKey;
  job: string;
  name: string;
  daysAgo: number;
  changes: readonly (
    | { kind: "noise"; task: string; byDb: number }
    | { kind: "duration"; task: string; minutes: number; other: string }
    | { kind: "wearing"; task: string; wornPct: number }
  )[];
}[] = [
  {
    site: "ostmere",
    job: "Test cell hand",
    name: "Lined intake duct in the test cell",
    daysAgo: 6,
    changes: [{ kind: "noise", task: "Run-up", byDb: 5 }],
  },
  {
    site: "ostmere",
    job: "Test cell hand",
    name: "Lined duct, and soak runs watched from the control room",
    daysAgo: 5,
    changes: [
      { kind: "noise", task: "Run-up", byDb: 5 },
      { kind: "duration", task: "Soak run", minutes: 40, other: "Control room" },
    ],
  },
];

/** A timetable that was asked for and kept: people at a time by task, in slots of a quarter of an hour. */
export const TIMETABLE = {
  site: "kettle-bend",
  crew: "Plate shop days",
  name: "Hammering and cutting in turn",
  daysAgo: 4,
  startsAt: "07:00",
  slots: 32,
  tasks: [
    {
      task: "Plate hammering",
      staffing: [
        { from: 0, to: 16, people: 2 },
        { from: 18, to: 32, people: 2 },
      ],
      longestStay: 4,
    },
    { task: "Plasma cutting", staffing: [{ from: 2, to: 32, people: 1 }], longestStay: 8 },
    { task: "Welding and tacking", staffing: [{ from: 0, to: 32, people: 3 }], longestStay: null },
  ],
  rest: "Laying out",
} as const satisfies {
  site: SiteKey;
  tasks: readonly {
    task: string;
    staffing: readonly { from: number; to: number; people: number }[];
    longestStay: number | null;
  }[];
  [key: string]: unknown;
};

/** What has to be done for a plan; `isDone` and `because` say what became of it. */
export const PLAN_STEPS: readonly {
  plan: string;
  what: string;
  dueInDays: number;
  mends?: true;
  isDone?: true;
  because?: string;
}[] = [
  {
    plan: TIMETABLE.name,
    what: "Talk the timetable over with the crew and its supervisor",
    dueInDays: -2,
    isDone: true,
  },
  {
    plan: TIMETABLE.name,
    what: "Work by the timetable, the sheet hung up at the hammer",
    dueInDays: 5,
    mends: true,
  },
  {
    plan: TIMETABLE.name,
    what: "Dosimeters on two of the crew, to see what it did",
    dueInDays: 19,
  },
  {
    plan: TIMETABLE.name,
    what: "A second plasma table, so that two cut at a time",
    dueInDays: -1,
    because: "No room beside the crane runway.",
  },
];
