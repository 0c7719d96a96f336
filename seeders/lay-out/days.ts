import { randomUUID } from "node:crypto";
import { type Recomputation, recomputeDays } from "../../server/commands/recompute-days";
import { recordRun } from "../../server/commands/record-run";
import { saveDay } from "../../server/commands/save-day";
import { type CheckedShift, storeShifts } from "../../server/commands/store-shifts";
import { recordAuditMany } from "../../server/lib/audit";
import { execute, rows } from "../../server/lib/db";
import { groupBy } from "../../server/lib/group-by";
import type { DayKey } from "../../server/queries/day-inputs";
import { RunInput } from "../../shared/schemas/run";
import { addDays } from "../../shared/time/zone";
import { CREWS, SITES, type SiteKey } from "../demo/programme";
import type { DemoRun } from "../demo/story";
import { daysBetween } from "./calendar";
import type { Demo } from "./programme";
import { known } from "./programme";
import { type PlannedDay, type PlannedShift, planDay } from "./shifts";
import type { DatedStory } from "./story";

const RECOMPUTED_AT_ONCE = 500;
/** Of the crew that is being entered while the demo is filled: how many rows still wait. */
const ROWS_THAT_WAIT = 2;

/**
 * Writes dates of a site as its officer would have: shifts, absences, runs. Today and yesterday have a way of their own.
 * Gives the days that are to be computed.
 */
export async function storeDays(
  demo: Demo,
  story: DatedStory,
  site: SiteKey,
  dates: readonly string[],
  at: Date,
): Promise<DayKey[]> {
  const { today } = demo.calendar(site);
  const plans = dates
    .filter((date) => daysBetween(date, today) > 1)
    .map((date) => planDay(demo, story, site, date));
  const shifts = plans.flatMap((plan) => plan.shifts);
  if (shifts.length === 0) return [];
  const actor = demo.officer(site);
  return demo.at(at, async () => {
    const ids = await storeShifts(
      actor,
      randomUUID(),
      shifts.map((shift) => toChecked(demo, shift)),
    );
    await storeAbsences(
      demo,
      site,
      plans.flatMap(({ absent }) => absent),
    );
    for (const [index, shift] of shifts.entries()) {
      if (shift.run)
        await recordRun(
          actor,
          known(demo.sites, site).id,
          toRun(demo, shift, shift.run, ids[index] ?? null),
        );
    }
    return shifts.map(({ workerId, date }) => ({ workerId, date }));
  });
}

function toChecked(
  demo: Demo,
  { crew, workerId, date, lengthMin, tasks, note }: PlannedShift,
): CheckedShift {
  return {
    shiftId: null,
    number: 1,
    siteId: known(demo.sites, crew.site).id,
    workerId,
    crewId: known(demo.crews, crew.name).id,
    date,
    timeZone: SITES[crew.site].timeZone,
    localStart: crew.usualStart,
    lengthMin,
    startsAt: demo.calendar(crew.site).instant(date, crew.usualStart),
    unaccounted: { how: "unknown" },
    tasks: tasks.map(({ name: _, ...task }) => task),
    note,
    reason: null,
  };
}

function toRun(
  demo: Demo,
  { workerId, date, lengthMin }: PlannedShift,
  run: DemoRun,
  shiftId: string | null,
): RunInput {
  const [checkBeforeDb, checkAfterDb] = run.checks;
  return RunInput.parse({
    instrumentId: known(demo.instruments, run.instrument).id,
    workerId,
    date,
    shiftId,
    durationMin: lengthMin,
    checkBeforeDb,
    checkAfterDb,
    covers: "shift",
    keptReason: run.keptReason,
    unusual: run.unusual,
    readings: run.readings.map(({ peakDb, ...reading }) => ({
      ...reading,
      peak: peakDb === undefined ? null : { levelDb: peakDb, weighting: "C" },
    })),
  });
}

async function storeAbsences(
  demo: Demo,
  site: SiteKey,
  absent: PlannedDay["absent"],
): Promise<void> {
  const actor = demo.officer(site);
  const records = absent.map(({ workerId, date, crew }) => ({
    workerId,
    date,
    crewId: known(demo.crews, crew.name).id,
  }));
  await execute(
    `INSERT INTO absences (organization_id, worker_id, date, crew_id, recorded_by)
     SELECT $1, x."workerId", x.date, x."crewId", $3 FROM jsonb_to_recordset($2::jsonb) AS x("workerId" uuid, date date, "crewId" uuid)`,
    [demo.organizationId, JSON.stringify(records), actor.userId],
  );
  await recordAuditMany(
    actor,
    records.map(({ workerId, date }) => ({
      action: "record-absence",
      subjectKind: "worker",
      subjectId: workerId,
      values: { date },
    })),
  );
}

/** Computes days and gives what was opened, in steps that each are a transaction. */
export async function computeDays(
  demo: Demo,
  keys: readonly DayKey[],
  at: Date,
): Promise<Recomputation["opened"]> {
  const opened: Recomputation["opened"] = [];
  for (let from = 0; from < keys.length; from += RECOMPUTED_AT_ONCE) {
    const recomputed = await demo.at(at, () =>
      recomputeDays(demo.organizationId, keys.slice(from, from + RECOMPUTED_AT_ONCE)),
    );
    opened.push(...recomputed.opened);
  }
  return opened;
}

/** Days that a change of the programme has made stale. */
export const staleDays = (demo: Demo): Promise<DayKey[]> =>
  demo.at(new Date(), () =>
    rows<DayKey>(
      `SELECT worker_id AS "workerId", date::text AS date FROM days WHERE is_stale ORDER BY date, worker_id`,
    ),
  );

/**
 * The newest days are entered crew by crew through the day grid's own command, with the notices that it sends. Of today
 * one crew stands there so far, and not all of it.
 */
export async function enterDay(
  demo: Demo,
  story: DatedStory,
  site: SiteKey,
  date: string,
  now: Date,
): Promise<void> {
  const calendar = demo.calendar(site);
  const isToday = date === calendar.today;
  // Where it is still yesterday's evening, the date of another site has not begun.
  if (daysBetween(date, calendar.today) > 1 || date > calendar.today) return;
  const plan = planDay(demo, story, site, date);
  for (const [crewName, ofCrew] of groupBy(plan.shifts, ({ crew }) => crew.name)) {
    if (isToday && crewName !== CREWS[0]!.name) continue;
    const crew = CREWS.find(({ name }) => name === crewName)!;
    const entered = calendar.instant(
      crew.enteredAt < crew.usualStart ? addDays(date, 1) : date,
      crew.enteredAt,
    );
    const at = new Date(Math.min(entered.getTime(), now.getTime() - 60_000));
    const waiting = new Set(isToday ? rowsThatWait(ofCrew) : []);
    const worked = ofCrew.filter((shift) => !waiting.has(shift)).map((shift) => toRow(shift));
    const absent = plan.absent
      .filter((one) => one.crew.name === crewName)
      .map(({ workerId }) => ({ kind: "absent", workerId }));
    const saved = await demo.at(at, () =>
      saveDay(demo.officer(site), known(demo.crews, crewName), date, [...worked, ...absent]),
    );
    if (saved.refused.length > 0 || saved.conflicts.length > 0)
      throw new Error(`${crewName} on ${date} was refused: ${JSON.stringify(saved.refused)}`);
  }
}

/** Not the one whose day the story tells. */
function rowsThatWait(shifts: readonly PlannedShift[]): PlannedShift[] {
  return shifts.filter(({ isTold }) => !isTold).slice(-ROWS_THAT_WAIT);
}

function toRow({ workerId, crew, lengthMin, tasks, note }: PlannedShift): Record<string, unknown> {
  return {
    kind: "worked",
    workerId,
    localStart: crew.usualStart,
    lengthMin,
    unaccounted: { how: "unknown" },
    note,
    confirmsOpenEnd: true,
    tasks: tasks.map(({ name: _, ...task }) => task),
  };
}
