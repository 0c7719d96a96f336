import { groupBy } from "../../server/lib/group-by";
import { addDays } from "../../shared/time/zone";
import { WORKERS } from "../demo/people";
import type { SiteKey } from "../demo/programme";
import { CREWS } from "../demo/programme";
import { type Day, type Departure, STORY, type Step } from "../demo/story";
import type { Demo } from "./programme";

export type DatedStep = Step & { date: string; site: SiteKey };

/** What a chapter's first step is about was seen in the days before it. */
const SEEN_BEFORE_DAYS = 7;

interface Span {
  readonly from: string;
  readonly to: string;
}

/** The story with its working days put on the calendar. */
export interface DatedStory {
  /** By employee number and date. */
  departures: ReadonlyMap<string, Departure>;
  /** By employee number the dates between which a chapter tells of somebody: on leave then, nothing of it would happen. */
  told: ReadonlyMap<string, readonly Span[]>;
  /** In order of time. */
  steps: readonly DatedStep[];
}

export const departureKey = (number: string, date: string) => `${number} ${date}`;

const crewOf = (name: string) => {
  const crew = CREWS.find((one) => one.name === name);
  if (!crew) throw new Error(`the story names the crew «${name}», which is not there`);
  return crew;
};

/** Whom a step is about, by employee number. */
function workersOf(step: Step): readonly string[] {
  if ("assign" in step) return step.assign.workers;
  if ("finding" in step) return step.finding.worker ? [step.finding.worker] : [];
  if ("correct" in step) return [step.correct.worker];
  if ("voidShift" in step) return [step.voidShift.worker];
  if ("loan" in step) return [step.loan.worker];
  if ("report" in step) return [step.report.worker];
  return [];
}

/** Whether a chapter tells of somebody on a date. */
export const isToldOf = ({ told }: DatedStory, number: string, date: string): boolean =>
  (told.get(number) ?? []).some(({ from, to }) => date >= from && date <= to);

export function dateStory(demo: Demo): DatedStory {
  const dateOf = (crewName: string, day: Day) => {
    const crew = crewOf(crewName);
    const calendar = demo.calendar(crew.site);
    return typeof day === "number"
      ? calendar.workdayAgo(crew, day)
      : calendar.workdayIn(crew, day.in);
  };
  const departures = new Map<string, Departure>();
  const told = new Map<string, Span[]>();
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
    const about = [
      ...dated.map(({ departure, date }) => ({ number: departure.worker, date: date! })),
      ...taken.flatMap(({ step, date }) =>
        workersOf(step).map((number) => ({ number, date: date! })),
      ),
    ];
    for (const [number, times] of groupBy(about, (one) => one.number)) {
      const dates = times.map(({ date }) => date).sort();
      const from = addDays(dates[0]!, -SEEN_BEFORE_DAYS);
      told.set(number, [...(told.get(number) ?? []), { from, to: dates.at(-1)! }]);
    }
    for (const { step, date } of taken)
      steps.push({ ...step, date: date!, site: crewOf(step.crew).site });
  }
  steps.sort((a, b) =>
    a.date + a.at < b.date + b.at ? -1 : a.date + a.at > b.date + b.at ? 1 : 0,
  );
  return { departures, told, steps };
}
