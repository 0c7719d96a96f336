import type { DaySummary } from "../../shared/day/summarize-day";
import type { GivingPreview } from "../../shared/schemas/choice";
import type { AssignmentInput } from "../../shared/schemas/worker";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import type { Actor } from "../lib/policy";
import type { Worker } from "../models/worker";
import { expectedDays, peopleExpected } from "../queries/expected-days";
import { settingsInForce } from "../queries/site-settings";
import { assignToMany, type Paths } from "./assign-protector";
import { previewChange } from "./preview-change";

type UsualDay = GivingPreview["changes"][number]["before"];

const VERDICTS: readonly UsualDay["verdictAtEar"][] = [
  "over",
  "cant-tell-yet",
  "not-assessed",
  "under",
];
const WORDS: readonly UsualDay["word"][] = [
  "too-little",
  null,
  "too-much",
  "just-enough",
  "strong-side",
  "good",
  "enough",
];
const byGravity = (a: UsualDay, b: UsualDay) =>
  VERDICTS.indexOf(a.verdictAtEar) - VERDICTS.indexOf(b.verdictAtEar) ||
  WORDS.indexOf(a.word) - WORDS.indexOf(b.word) ||
  (b.atEarDb ?? 0) - (a.atEarDb ?? 0);

/**
 * Who would change verdict if these workers were given a protector: it is given, their usual days and those on record are
 * computed as they then are, and it is taken back. So the preview can't differ from the giving.
 *
 * @throws AppError as assignToMany; not-computed, where a site has no rules on the first day
 */
export async function previewGiving(
  actor: Actor,
  workers: readonly Worker[],
  input: AssignmentInput,
  paths: Paths,
): Promise<GivingPreview> {
  const before = await usualDays(workers, input.fromDate);
  let after = before;
  let alreadyHad: readonly string[] = [];
  const recorded = await previewChange(
    actor,
    { workerIds: workers.map(({ id }) => id), fromDate: input.fromDate },
    async () => {
      alreadyHad = (await assignToMany(actor, workers, input, paths)).alreadyHad;
      after = await usualDays(workers, input.fromDate);
    },
  );
  const changes = workers.flatMap(({ id, name }) => {
    const [was, becomes] = [before.get(id), after.get(id)];
    if (!was || !becomes) return [];
    if (was.verdictAtEar === becomes.verdictAtEar && was.word === becomes.word) return [];
    return [{ workerId: id, workerName: name, before: toView(was), after: toView(becomes) }];
  });
  const given = workers.filter(({ id }) => !alreadyHad.includes(id));
  return {
    changes: changes.sort(
      (a, b) => byGravity(a.after, b.after) || a.workerName.localeCompare(b.workerName),
    ),
    daysCount: after.size,
    withoutDayCount: workers.length - after.size,
    recorded,
    stock: await stockFor(
      given.map(({ id }) => id),
      [input.innerModelId, input.outerModelId].filter((id) => id !== null),
      input.fromDate,
    ),
  };
}

const toView = ({ verdictAtEar, word, atEarDb }: DaySummary): UsualDay => ({
  verdictAtEar,
  word,
  atEarDb,
});

/** The nominal days as they are expected from the first day on, or today where that is past. */
async function usualDays(
  workers: readonly Worker[],
  fromDate: string,
): Promise<Map<string, DaySummary>> {
  const found = await peopleExpected(
    workers.map(({ id }) => id),
    fromDate,
  );
  const days = new Map<string, DaySummary>();
  for (const [siteId, people] of groupBy(found, (worker) => worker.siteId)) {
    const { today } = people[0]!;
    const date = fromDate > today ? fromDate : today;
    const settings = await settingsInForce(siteId, date);
    for (const [id, summary] of await expectedDays(siteId, date, people, settings))
      days.set(id, summary);
  }
  return days;
}

/** Who would need a device from the shelf, by site and model; and who of them has it assigned, but not from here. */
function stockFor(
  workerIds: readonly string[],
  modelIds: readonly string[],
  fromDate: string,
): Promise<GivingPreview["stock"]> {
  return rows(
    `SELECT s.name AS "siteName", m.id AS "modelId", m.name AS "modelName", count(*)::int AS "neededCount",
       count(*) FILTER (WHERE EXISTS (SELECT 1 FROM assignments a WHERE a.worker_id = w.id
         AND m.id IN (a.inner_model_id, a.outer_model_id) AND a.valid @> CAST(:fromDate AS date)))::int AS "assignedCount",
       (SELECT sum(k.quantity)::int FROM stock_moves k WHERE k.site_id = s.id AND k.model_id = m.id AND k.part = 'device') AS "stockCount"
     FROM workers w JOIN sites s ON s.id = w.site_id JOIN protector_models m ON m.id = ANY (CAST(:modelIds AS uuid[]))
     WHERE w.id = ANY (CAST(:workerIds AS uuid[])) AND NOT EXISTS (SELECT 1 FROM protector_issues i
       WHERE i.worker_id = w.id AND i.model_id = m.id AND i.ended_on IS NULL)
     GROUP BY s.id, s.name, m.id, m.name ORDER BY s.name, m.name`,
    { workerIds: `{${workerIds.join(",")}}`, modelIds: `{${modelIds.join(",")}}`, fromDate },
  );
}
