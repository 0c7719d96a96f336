import type { Control } from "../../shared/schemas/follow-up";
import type { SiteKey } from "./programme";

/** Trainings that were held, days before the demo's last day, and who was not there. */
export const TRAININGS: readonly {
  site: SiteKey;
  daysAgo: number;
  title: string;
  durationMin: number;
  missedBy: readonly string[];
}[] = [
  {
    site: "ostmere",
    daysAgo: 210,
    title: "Noise, hearing and how protectors are worn",
    durationMin: 45,
    missedBy: ["3425", "4133", "3402"],
  },
  {
    site: "kettle-bend",
    daysAgo: 350,
    title: "Yearly noise training",
    durationMin: 60,
    missedBy: [],
  },
];

/** What is done against the noise itself, entered with the finding that stands longest. */
export const MEASURES: readonly {
  site: SiteKey;
  control: Control;
  what: string;
  daysAgo: number;
  isDone: boolean;
}[] = [
  {
    site: "ostmere",
    control: "engineer",
    what: "Line the fettling booth's walls, damp the bench",
    daysAgo: 120,
    isDone: true,
  },
  {
    site: "ostmere",
    control: "organise",
    what: "Chipping in the first hour only, with nobody else in the bay",
    daysAgo: 30,
    isDone: false,
  },
  {
    site: "kettle-bend",
    control: "substitute",
    what: "Quieter nozzles on the blow-off stations",
    daysAgo: 45,
    isDone: false,
  },
];
