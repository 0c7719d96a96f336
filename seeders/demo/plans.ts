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
