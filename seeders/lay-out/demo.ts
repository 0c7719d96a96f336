import { randomUUID } from "node:crypto";
import { recordAudit } from "../../server/lib/audit";
import { execute, rows } from "../../server/lib/db";
import { openFileStore } from "../../server/lib/file-store";
import type { DayKey } from "../../server/queries/day-inputs";
import { addDays } from "../../shared/time/zone";
import { PEOPLE } from "../demo/people";
import { INSTRUMENTS, ORGANIZATION, SITES, type SiteKey } from "../demo/programme";
import { daysBetween } from "./calendar";
import { computeDays, enterDay, staleDays, storeDays } from "./days";
import { layOutEmployers } from "./employers";
import { layOutFits } from "./fits";
import { layOutHistories } from "./histories";
import { layOutLetters } from "./letters";
import { measureBeforehand, measureSince, sendOutToday } from "./measurements";
import { leaveSomeToTell, markSent, tellInThePast } from "./notices";
import { writePeopleFile } from "./people-file";
import { layOutPlans, layOutTimetable } from "./plans";
import { Demo, known, layOutProgramme } from "./programme";
import { layOutProtection, layOutRounds } from "./protection";
import { layOutRecordings } from "./recordings";
import { layOutRecords, layOutYearReports } from "./records";
import { layOutRetention } from "./retention";
import { layOutShiftChange } from "./shift-change";
import { takeStep } from "./steps";
import { dateStory } from "./story";
import { layOutTraining } from "./training";

const DAYS_A_MONTH = 30.4;
/** Further back than this, days are entered and computed a week at a time. */
const DAILY_FROM_DAYS_AGO = 21;
const FRIDAY = 5;
/** Soon, and again once the tables have some size. */
const ANALYZED_AFTER_DAYS = [10, 40, 200];
const CALIBRATION_SOON_DAYS = 7;

export interface Filling {
  months: number;
  now: Date;
  dataFolder: string;
  publicUrl: string;
  /** Lets the database take stock: its plans are those of empty tables until it has. */
  analyze: () => Promise<void>;
}

const siteKeys = Object.keys(SITES) as SiteKey[];

/**
 * Fills an empty database with the demo, in order of time: each day's changes to the programme, what people did about
 * what the days before had shown, then the day's own shifts.
 *
 * @returns a summary to print
 */
export async function layOutDemo({
  months,
  now,
  dataFolder,
  publicUrl,
  analyze,
}: Filling): Promise<string> {
  openFileStore(dataFolder);
  const demo = new Demo(now, Math.round(months * DAYS_A_MONTH));
  await layOutProgramme(demo);
  await measureBeforehand(demo);
  await layOutRounds(demo);
  const story = dateStory(demo);
  /** On the site's own clock: who is told of a day is told after it was noticed there. */
  const morningOf = (date: string, site: SiteKey) =>
    new Date(
      Math.min(demo.calendar(site).instant(date, "08:30").getTime(), now.getTime() - 120_000),
    );
  const compute = async (keys: readonly DayKey[], at: Date) =>
    tellInThePast(demo, await computeDays(demo, keys, at), at, publicUrl);

  let unstored: string[] = [];
  const storeUp = async (date: string) => {
    for (const site of siteKeys) {
      const at = morningOf(date, site);
      await compute(await storeDays(demo, story, site, unstored, at), at);
    }
    unstored = [];
  };
  const first = siteKeys.map((site) => demo.calendar(site).first).sort()[0]!;
  const last = siteKeys
    .map((site) => demo.calendar(site).today)
    .sort()
    .at(-1)!;
  for (let date = first; date <= last; date = addDays(date, 1)) {
    if (ANALYZED_AFTER_DAYS.includes(daysBetween(first, date))) await analyze();
    const steps = story.steps.filter((step) => step.date === date);
    if (steps.length > 0) await storeUp(date);
    for (const step of steps) {
      await takeStep(demo, step, now);
      const at = new Date(
        Math.min(demo.calendar(step.site).instant(date, step.at).getTime(), now.getTime()) + 1_000,
      );
      await compute(await staleDays(demo), at);
    }
    unstored.push(date);
    const isDue =
      new Date(`${date}T00:00:00Z`).getUTCDay() === FRIDAY ||
      daysBetween(date, last) <= DAILY_FROM_DAYS_AGO;
    if (isDue) await storeUp(addDays(date, 1));
    for (const site of siteKeys) await enterDay(demo, story, site, date, now);
  }
  await measureSince(demo);
  await layOutHistories(demo, story);
  await layOutRecordings(demo);
  await layOutFits(demo);
  await layOutProtection(demo);
  await layOutTraining(demo);
  await compute(await staleDays(demo), new Date(now.getTime() - 60_000));
  await layOutPlans(demo);
  await layOutTimetable(demo);
  await layOutShiftChange(demo, now);
  const former = await layOutRetention(demo, now);
  await layOutEmployers(demo, now);
  await layOutLetters(demo, publicUrl);
  await layOutRecords(demo, former);
  await sendOutToday(demo, now);
  await tellOfCalibration(demo);
  await layOutYearReports(demo);
  await markSent(demo, now, publicUrl);
  await leaveSomeToTell(demo);
  const file = writePeopleFile(demo, dataFolder);
  return summarize(demo, file);
}

/** Whose laboratory calibration is due soon becomes a finding: the officer has to book it. */
async function tellOfCalibration(demo: Demo): Promise<void> {
  for (const { site, name, calibrationDueInDays } of INSTRUMENTS) {
    if (calibrationDueInDays > CALIBRATION_SOON_DAYS) continue;
    const { today } = demo.calendar(site);
    const instrument = known(demo.instruments, name);
    const id = randomUUID();
    await demo.at(demo.calendar(site).instant(today, "00:05"), async () => {
      await execute(
        `INSERT INTO findings (id, organization_id, site_id, instrument_id, kind, state, facts, first_date, last_date, days_count, due_on)
         VALUES ($1, $2, $3, $4, 'instrument', 'new', $5::jsonb, $6, $6, 0, $7)`,
        [
          id,
          demo.organizationId,
          instrument.siteId,
          instrument.id,
          JSON.stringify({ calibrationDueOn: instrument.calibrationDueOn }),
          today,
          instrument.calibrationDueOn,
        ],
      );
      await execute(
        "INSERT INTO finding_steps (organization_id, finding_id, kind, to_state) VALUES ($1, $2, 'state', 'new')",
        [demo.organizationId, id],
      );
      await recordAudit(
        { organizationId: demo.organizationId },
        {
          action: "open-finding",
          subjectKind: "finding",
          subjectId: id,
          values: { kind: "instrument", calibrationDueOn: instrument.calibrationDueOn },
        },
      );
    });
  }
}

async function summarize(demo: Demo, file: string): Promise<string> {
  const [counts] = await demo.at(new Date(), () =>
    rows<{ shifts: number; results: number; findings: number; open: number }>(
      `SELECT (SELECT count(*)::int FROM shifts) AS shifts, (SELECT count(*)::int FROM day_results) AS results,
       (SELECT count(*)::int FROM findings) AS findings, (SELECT count(*)::int FROM findings WHERE state <> 'closed') AS open`,
    ),
  );
  const { shifts = 0, results = 0, findings = 0, open = 0 } = counts ?? {};
  return [
    `${ORGANIZATION}: ${Object.values(SITES)
      .map(({ name }) => name)
      .join(" and ")}, from ${demo.calendar("ostmere").first} to ${demo.calendar("ostmere").today}`,
    `${shifts} shifts, ${results} results, ${findings} findings, ${open} of them open`,
    `${PEOPLE.length} people for the local sign-in in ${file}`,
  ].join("\n");
}
