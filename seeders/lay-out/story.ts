import { WORKERS } from "../demo/people";
import type { SiteKey } from "../demo/programme";
import { CREWS } from "../demo/programme";
import { type Day, type Departure, STORY, type Step } from "../demo/story";
import type { Demo } from "./programme";

export type DatedStep = Step & { date: string; site: SiteKey };

/** The story with its working days put on the calendar. */
export interface DatedStory {
  /** By employee number and date. */
  departures: ReadonlyMap<string, Departure>;
  /** In order of time. */
  steps: readonly DatedStep[];
}

export const departureKey = (number: string, date: string) => `${number} ${date}`;

const crewOf = (name: string) => {
  const crew = CREWS.find((one) => one.name === name);
  if (!crew) throw new Error(`the story names the crew «${name}», which is not there`);
  return crew;
};

export function dateStory(demo: Demo): DatedStory {
  const dateOf = (crewName: string, day: Day) => {
    const crew = crewOf(crewName);
    const calendar = demo.calendar(crew.site);
    return typeof day === "number"
      ? calendar.workdayAgo(crew, day)
      : calendar.workdayIn(crew, day.in);
  };
  const departures = new Map<string, Departure>();
  const steps: DatedStep[] = [];
  for (const chapter of STORY) {
    const dated = (chapter.departures ?? []).flatMap((departure) => {
      const own = WORKERS.find(({ number }) => number === departure.worker)!.crew;
      const crew = departure.onLoan?.crew ?? own;
      const [from, to] =
        typeof departure.day === "number" ? [departure.day, departure.day] : departure.day;
      return Array.from({ length: from - to + 1 }, (_, index) => ({
        departure,
        date: dateOf(crew, from - index),
      }));
    });
    const taken = (chapter.steps ?? []).map((step) => ({
      step,
      date: dateOf(step.crew, step.day),
    }));
    if ([...dated, ...taken].some(({ date }) => date === null)) continue;
    for (const { departure, date } of dated) {
      const key = departureKey(departure.worker, date!);
      if (departures.has(key)) throw new Error(`two departures of ${key}`);
      departures.set(key, departure);
    }
    for (const { step, date } of taken)
      steps.push({ ...step, date: date!, site: crewOf(step.crew).site });
  }
  steps.sort((a, b) =>
    a.date + a.at < b.date + b.at ? -1 : a.date + a.at > b.date + b.at ? 1 : 0,
  );
  return { departures, steps };
}
