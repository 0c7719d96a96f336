import { evaluateDay } from "../../shared/acoustics/day";
import type { DayInput, RuleSetVersion } from "../../shared/acoustics/types";
import { summarizeDay } from "../../shared/day/summarize-day";
import { findCauses } from "../../shared/findings/causes";
import { isNotified, NEWS_FOR_DAYS } from "../../shared/findings/notified";
import type { ChangePreview } from "../../shared/schemas/site";
import { addDays } from "../../shared/time/zone";
import { todayAt } from "../lib/calendar";
import { execute, row, rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy } from "../policies";
import { hydrateDays, resolveDays, ruleSetsOf } from "../queries/day-inputs";
import { type Concerned, concernedDays } from "./mark-days-stale";
import { recomputeAndTell, type SiteDay } from "./recompute-and-tell";

/** More are not looked at within one request. */
const MOST_DAYS = 20_000;
/** Workers' changes, each with its days: more are not listed. */
const MOST_CHANGES = 500;
const BATCH = 500;

interface DayNow extends SiteDay {
  workerName: string;
  verdictOutside: string | null;
  verdictAtEar: string | null;
  word: string | null;
  total: number;
}

type Change = ChangePreview["changes"][number];
type Line = Change["line"];
const NONE = "none";

/** What a day comes to, gravest first; then who is judged at the ear before what is judged without protection. */
const GRAVEST_STATES = ["over", "cant-tell-yet", "not-assessed", "too-little", NONE, "too-much"];
const GRAVEST_LINES: readonly Line[] = ["at-the-ear", "without-protection", "protector"];
const rank = (list: readonly string[], value: string) =>
  list.includes(value) ? list.indexOf(value) : list.length;
const byGravity = (a: Pick<Change, "line" | "after">, b: Pick<Change, "line" | "after">) =>
  rank(GRAVEST_STATES, a.after) - rank(GRAVEST_STATES, b.after) ||
  rank(GRAVEST_LINES, a.line) - rank(GRAVEST_LINES, b.line);

/**
 * Who would change verdict if a change were made: the change is made, the days it touches are evaluated from the inputs
 * as they then are, and it is taken back. So the preview can't differ from the change. Compared with the stored results.
 * Whom the change would tell is found out the same way.
 */
export async function previewChange(
  actor: Actor,
  where: Concerned,
  change: () => Promise<unknown>,
): Promise<ChangePreview> {
  const values: Record<string, string> = {};
  const value = (given: string) => {
    const name = `value${Object.keys(values).length}`;
    values[name] = given;
    return `:${name}`;
  };
  const days = await rows<DayNow>(
    `SELECT d.worker_id AS "workerId", d.site_id AS "siteId", w.name AS "workerName", d.date::text AS date, r.verdict_outside AS "verdictOutside",
       r.verdict_at_ear AS "verdictAtEar", r.word, (count(*) OVER ())::int AS total
     FROM days d JOIN workers w ON w.id = d.worker_id LEFT JOIN day_results r ON r.id = d.current_result_id
     WHERE ${visible(dayPolicy, actor, "d")} AND ${concernedDays(where, value)}
     ORDER BY d.date DESC, w.name, d.worker_id LIMIT ${MOST_DAYS}`,
    values,
  );
  const total = days[0]?.total ?? 0;
  const changes = new Map<string, Change>();
  const tally = new Map<string, ChangePreview["tally"][number]>();
  let changedDays = 0;
  let overDays = 0;
  let cantTellDays = 0;
  const news = new News();
  await execute("SAVEPOINT preview");
  await change();
  for (let from = 0; from < days.length; from += BATCH) {
    const batch = days.slice(from, from + BATCH);
    const then = await evaluateAsTheyStand(batch);
    for (const day of batch) {
      const { workerId, workerName, date } = day;
      const now = then.get(`${workerId} ${date}`);
      // No shift, or imported: nothing here is computed from what changes.
      if (!now) continue;
      const { summary } = now;
      news.add(day, now);
      const compared: [Line, string | null, string | null][] = [
        ["without-protection", day.verdictOutside, summary.verdictOutside],
        ["at-the-ear", day.verdictAtEar, summary.verdictAtEar],
        ["protector", day.word, summary.word],
      ];
      const changed = compared.filter(([, before, next]) => before !== next);
      if (changed.length === 0) continue;
      changedDays += 1;
      if (changed.some(([, , next]) => next === "over")) overDays += 1;
      else if (changed.some(([, , next]) => next === "cant-tell-yet")) cantTellDays += 1;
      for (const [line, before, next] of changed) {
        const after = next ?? NONE;
        const counted = tally.get(`${line} ${after}`);
        if (counted) counted.days += 1;
        else tally.set(`${line} ${after}`, { line, after, days: 1 });
        const key = [workerId, line, before, after].join(" ");
        const change = changes.get(key);
        // The days come latest first.
        if (change) Object.assign(change, { days: change.days + 1, firstDate: date });
        else
          changes.set(key, {
            workerId,
            workerName,
            line,
            before: before ?? NONE,
            after,
            days: 1,
            firstDate: date,
            lastDate: date,
          });
      }
    }
  }
  const people = await peopleTold(actor.organizationId, [
    ...news.days,
    ...(await daysToldOf(days)),
  ]);
  await execute("ROLLBACK TO SAVEPOINT preview");
  return {
    days: total,
    workers: new Set(days.map(({ workerId }) => workerId)).size,
    tally: [...tally.values()].sort((a, b) => byGravity(a, b) || b.days - a.days),
    changes: [...changes.values()]
      .sort((a, b) => byGravity(a, b) || b.days - a.days)
      .slice(0, MOST_CHANGES),
    changesCount: changes.size,
    changedDays,
    overDays,
    cantTellDays,
    people,
    tooMany: total - days.length,
  };
}

/** The fresh days of which people would be told: of each worker and cause the latest. */
class News {
  readonly days: DayNow[] = [];
  private readonly oldest = addDays(todayAt("UTC"), -NEWS_FOR_DAYS - 1);
  private readonly seen = new Set<string>();

  /** The days come latest first. */
  add(day: DayNow, { input, evaluation, governing }: Evaluated): void {
    if (day.date < this.oldest) return;
    const causes = findCauses(input, evaluation, governing).filter(isNotified);
    const fresh = causes
      .map(({ kind, criterion, useKey }) => [day.workerId, kind, criterion, useKey].join("|"))
      .filter((key) => !this.seen.has(key));
    if (fresh.length > 0) this.days.push(day);
    for (const key of fresh) this.seen.add(key);
  }
}

/** Days of which people were told: another result is told them anew. */
async function daysToldOf(days: readonly SiteDay[]): Promise<SiteDay[]> {
  return rows<SiteDay>(
    `SELECT DISTINCT x."workerId", x.date::text AS date, x."siteId" FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date, "siteId" uuid)
     JOIN notice_items i ON i.worker_id = x."workerId" AND i.date = x.date JOIN notices n ON n.id = i.notice_id AND n.state IN ('sending', 'sent', 'possibly-sent', 'bounced', 'on-paper')`,
    [JSON.stringify(days.map(({ workerId, date, siteId }) => ({ workerId, date, siteId })))],
  );
}

/** How many people hear of these days once they are computed. Leaves them computed: for a savepoint to take back. */
async function peopleTold(organizationId: string, days: readonly SiteDay[]): Promise<number> {
  const unique = [...new Map(days.map((day) => [`${day.workerId} ${day.date}`, day])).values()];
  const entryIds: string[] = [];
  for (let from = 0; from < unique.length; from += BATCH)
    entryIds.push(...(await recomputeAndTell(organizationId, unique.slice(from, from + BATCH))));
  const told = await row<{ people: number }>(
    `SELECT count(DISTINCT recipient_id)::int AS people FROM notices WHERE entry_id = ANY (CAST(:entryIds AS uuid[]))`,
    { entryIds: `{${entryIds.join(",")}}` },
  );
  return told?.people ?? 0;
}

type Evaluated = ReturnType<typeof evaluateOne>;

/** For the governing rules only: the others bind nobody. */
function evaluateOne(input: DayInput, governing: RuleSetVersion) {
  const evaluation = evaluateDay(input, governing, []);
  return { input, governing, evaluation, summary: summarizeDay(input, evaluation, governing) };
}

async function evaluateAsTheyStand(keys: readonly { workerId: string; date: string }[]) {
  const resolved = await resolveDays(keys);
  const inputs = await hydrateDays(resolved);
  return new Map(
    resolved.map(({ workerId, date, refs }, index) => {
      const { governing } = ruleSetsOf(refs);
      return [`${workerId} ${date}`, evaluateOne(inputs[index]!, governing)];
    }),
  );
}
