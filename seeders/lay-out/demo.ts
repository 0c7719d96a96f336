import type { DayKey } from "../../server/queries/day-inputs";
import { rows } from "../../server/lib/db";
import { addDays } from "../../shared/time/zone";
import { PEOPLE } from "../demo/people";
import { ORGANIZATION, SITES, type SiteKey } from "../demo/programme";
import { daysBetween } from "./calendar";
import { computeDays, enterDay, staleDays, storeDay } from "./days";
import { markSent, tellInThePast } from "./notices";
import { writePeopleFile } from "./people-file";
import { Demo, layOutProgramme } from "./programme";
import { comesFirst, takeStep } from "./steps";
import { dateStory } from "./story";

const DAYS_A_MONTH = 30.4;
/** Further back than this, days are computed a week at a time. */
const DAILY_FROM_DAYS_AGO = 21;

export interface Filling {
  months: number;
  now: Date;
  dataFolder: string;
  publicUrl: string;
}

const siteKeys = Object.keys(SITES) as SiteKey[];

/**
 * Fills an empty database with the demo, in order of time: each day's changes to the programme, its shifts, what they
 * show, and what people did about it.
 *
 * @returns a summary to print
 */
export async function layOutDemo({ months, now, dataFolder, publicUrl }: Filling): Promise<string> {
  const demo = new Demo(now, Math.round(months * DAYS_A_MONTH));
  await layOutProgramme(demo);
  const story = dateStory(demo);

  let pending: DayKey[] = [];
  const first = siteKeys.map((site) => demo.calendar(site).first).sort()[0]!;
  const last = siteKeys.map((site) => demo.calendar(site).today).sort().at(-1)!;
  for (let date = first; date <= last; date = addDays(date, 1)) {
    const steps = story.steps.filter((step) => step.date === date);
    for (const step of steps.filter(comesFirst)) await takeStep(demo, step, now);
    for (const site of siteKeys) {
      const calendar = demo.calendar(site);
      const ago = daysBetween(date, calendar.today);
      if (ago > 1) { const t0=Date.now(); pending.push(...(await storeDay(demo, story, site, date))); (globalThis as any).tStore=((globalThis as any).tStore??0)+Date.now()-t0; }
      else if (ago >= 0) await enterDay(demo, story, site, date, now);
    }
    const later = steps.filter((step) => !comesFirst(step));
    const isWeekEnd = new Date(`${date}T00:00:00Z`).getUTCDay() === 0;
    if (later.length === 0 && !isWeekEnd && daysBetween(date, last) > DAILY_FROM_DAYS_AGO) continue;
    const eveningOf = () => new Date(Math.min(demo.calendar("ostmere").instant(date, "23:30").getTime(), now.getTime() - 60_000));
    const compute = async (keys: readonly DayKey[]) => { const t0=Date.now(); const o=await computeDays(demo, keys, eveningOf()); const t1=Date.now(); await tellInThePast(demo, o, eveningOf(), publicUrl); (globalThis as any).tC=((globalThis as any).tC??0)+t1-t0;(globalThis as any).tT=((globalThis as any).tT??0)+Date.now()-t1; };
    await compute(pending);
    pending = [];
    for (const step of later) {
      await takeStep(demo, step, now);
      await compute(await staleDays(demo));
    }
  }
  await markSent(demo, now, publicUrl);
  console.log((globalThis as any).tStore,(globalThis as any).tC,(globalThis as any).tT);
  const file = writePeopleFile(demo, dataFolder);
  return summarize(demo, file);
}

async function summarize(demo: Demo, file: string): Promise<string> {
  const [counts] = await demo.at(new Date(), () => rows<{ shifts: number; results: number; findings: number; open: number }>(
    `SELECT (SELECT count(*)::int FROM shifts) AS shifts, (SELECT count(*)::int FROM day_results) AS results,
       (SELECT count(*)::int FROM findings) AS findings, (SELECT count(*)::int FROM findings WHERE state <> 'closed') AS open`,
  ));
  const { shifts = 0, results = 0, findings = 0, open = 0 } = counts ?? {};
  return [
    `${ORGANIZATION}: ${Object.values(SITES).map(({ name }) => name).join(" and ")}, from ${demo.calendar("ostmere").first} to ${demo.calendar("ostmere").today}`,
    `${shifts} shifts, ${results} results, ${findings} findings, ${open} of them open`,
    `${PEOPLE.length} people for the local sign-in in ${file}`,
  ].join("\n");
}
