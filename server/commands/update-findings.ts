import { randomUUID } from "node:crypto";
import type { DayInput, ProtectorData, RuleSetVersion } from "../../shared/acoustics/types";
import type { Cause } from "../../shared/findings/causes";
import { type OnWorker, type Proposal, proposeRemedy } from "../../shared/findings/remedy";
import type { FindingKind, FindingState } from "../../shared/schemas/finding";
import { recordAudit, recordAuditMany } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { knownOnWorkers, onWorkerKey } from "../queries/on-worker";
import { registerOn } from "../queries/protector-register";

export interface DayCauses {
  workerId: string;
  date: string;
  resultId: string | null;
  siteId: string | null;
  jobId: string | null;
  causes: readonly Cause[];
  input: DayInput | null;
  governing: RuleSetVersion | null;
}

export interface OpenedFinding {
  id: string;
  kind: FindingKind;
  criterion: string;
  workerId: string;
  siteId: string;
  date: string;
  resultId: string;
}

interface FindingRow {
  id: string;
  workerId: string | null;
  jobId: string | null;
  kind: FindingKind;
  criterion: string;
  useKey: string;
  state: FindingState;
  lastDate: string;
  closedOn: string | null;
  /** Closed because its only day was corrected: for a later correction it never was. */
  wasWithdrawn: boolean;
}

/** Kinds for which a protector of the register may be the answer. */
const mendable = new Set<FindingKind>([
  "over-limit-at-ear",
  "protects-too-little",
  "protects-too-much",
  "no-protector",
  "dual-protection",
]);

const isMendable = ({ cause }: { cause: Cause }): boolean => mendable.has(cause.kind);

const causeKey = (
  subject: string,
  { kind, criterion, useKey }: Pick<Cause, "kind" | "criterion" | "useKey">,
) => [subject, kind, criterion, useKey].join("|");

/**
 * Holds the findings to what the days show now. A cause has one open finding, to which further days attach; a closed one
 * comes back only for a day dated after its closing; a day that was corrected away takes its evidence with it. One that
 * only other rules took away is for a person to check.
 */
export async function updateFindings(
  organizationId: string,
  days: readonly DayCauses[],
): Promise<OpenedFinding[]> {
  const workerIds = [...new Set(days.map(({ workerId }) => workerId))];
  const jobIds = [...new Set(days.flatMap(({ jobId }) => (jobId ? [jobId] : [])))];
  await withdrawEvidence(organizationId, days);
  const present = days.filter((day) => day.resultId !== null && day.causes.length > 0);
  if (present.length === 0) return [];

  const known = await rows<FindingRow>(
    `SELECT DISTINCT ON (f.worker_id, f.job_id, f.kind, f.criterion, f.use_key) f.id, f.worker_id AS "workerId", f.job_id AS "jobId", f.kind,
       f.criterion, f.use_key AS "useKey", f.state, f.last_date::text AS "lastDate", f.closed_on::text AS "closedOn", coalesce(f.closing_reason = 'evidence-gone', FALSE) AS "wasWithdrawn"
     FROM findings f
     WHERE f.organization_id = :organizationId AND (f.worker_id = ANY (CAST(:workerIds AS uuid[])) OR f.job_id = ANY (CAST(:jobIds AS uuid[])))
     ORDER BY f.worker_id, f.job_id, f.kind, f.criterion, f.use_key, (f.state <> 'closed') DESC, f.opened_at DESC`,
    { organizationId, workerIds: `{${workerIds.join(",")}}`, jobIds: `{${jobIds.join(",")}}` },
  );
  const byCause = new Map(
    known.map((row) => [causeKey((row.jobId ?? row.workerId) as string, row), row]),
  );

  const opened: OpenedFinding[] = [];
  const evidence: Evidence[] = [];
  const fresh: NewFinding[] = [];
  const latest = new Map<string, { day: DayCauses; cause: Cause }>();
  // Oldest day first, so that a finding's facts end up as those of its latest day.
  for (const day of present.toSorted((a, b) => (a.date < b.date ? -1 : 1))) {
    for (const cause of day.causes) {
      const ofJob = cause.concerns === "job";
      const subject = ofJob ? day.jobId : day.workerId;
      if (subject === null || day.resultId === null || day.siteId === null) continue;
      const key = causeKey(subject, cause);
      let finding = byCause.get(key);
      if (!finding || finding.state === "closed") {
        const closed = finding?.wasWithdrawn ? undefined : finding;
        if (closed?.closedOn && day.date <= closed.closedOn) continue;
        const { kind, criterion, useKey } = cause;
        const id = randomUUID();
        const state: FindingState = closed ? "came-back" : "new";
        const owner = { workerId: ofJob ? null : day.workerId, jobId: ofJob ? day.jobId : null };
        fresh.push({
          id,
          siteId: day.siteId,
          ...owner,
          kind,
          criterion,
          useKey,
          state,
          date: day.date,
          resultId: day.resultId,
          dueIn: dueInDays(kind),
          previousId: closed?.id ?? null,
        });
        opened.push({
          id,
          kind,
          criterion,
          workerId: day.workerId,
          siteId: day.siteId,
          date: day.date,
          resultId: day.resultId,
        });
        finding = {
          id,
          ...owner,
          kind,
          criterion,
          useKey,
          state,
          lastDate: day.date,
          closedOn: null,
          wasWithdrawn: false,
        };
        byCause.set(key, finding);
      }
      evidence.push({
        findingId: finding.id,
        workerId: day.workerId,
        date: day.date,
        resultId: day.resultId,
      });
      if (day.date >= finding.lastDate) {
        finding.lastDate = day.date;
        latest.set(finding.id, { day, cause });
      }
    }
  }
  await insertFindings(organizationId, fresh);
  const remedies = new Remedies(
    await knownOnWorkers(
      [...new Set([...latest.values()].filter(isMendable).map(({ day }) => day))].filter(
        ({ input, governing }) => input && governing,
      ),
    ),
  );
  const facts = new Map<string, Record<string, unknown>>();
  for (const [findingId, { day, cause }] of latest)
    facts.set(findingId, await factsOf(day, cause, remedies));
  await attachEvidence(organizationId, evidence, facts);
  return opened;
}

interface Evidence {
  findingId: string;
  workerId: string;
  date: string;
  resultId: string;
}

interface NewFinding {
  id: string;
  siteId: string;
  workerId: string | null;
  jobId: string | null;
  kind: FindingKind;
  criterion: string;
  useKey: string;
  state: FindingState;
  date: string;
  resultId: string;
  dueIn: number;
  previousId: string | null;
}

/** What would put a day right, found once however many of its findings ask. */
class Remedies {
  private readonly registers = new Map<string, ProtectorData[]>();
  private readonly found = new Map<DayCauses, Proposal | null>();

  constructor(private readonly onWorkers: ReadonlyMap<string, OnWorker>) {}

  async of(day: DayCauses, input: DayInput, governing: RuleSetVersion): Promise<Proposal | null> {
    const known = this.found.get(day);
    if (known !== undefined) return known;
    const models = this.registers.get(day.date) ?? (await registerOn(day.date));
    this.registers.set(day.date, models);
    const proposal = proposeRemedy(input, governing, models, this.onWorkers.get(onWorkerKey(day)));
    this.found.set(day, proposal);
    return proposal;
  }
}

async function factsOf(
  day: DayCauses,
  cause: Cause,
  remedies: Remedies,
): Promise<Record<string, unknown>> {
  if (!isMendable({ cause }) || !day.input || !day.governing) return { ...cause.facts };
  return { ...cause.facts, ...(await remedies.of(day, day.input, day.governing)) };
}

async function insertFindings(organizationId: string, fresh: readonly NewFinding[]): Promise<void> {
  if (fresh.length === 0) return;
  const json = JSON.stringify(fresh);
  await execute(
    `INSERT INTO findings (id, organization_id, site_id, worker_id, job_id, kind, criterion, use_key, state, first_date, last_date, last_result_id, days_count, previous_id)
     SELECT x.id, $1, x."siteId", x."workerId", x."jobId", x.kind, x.criterion, x."useKey", x.state, x.date, x.date, x."resultId", 0, x."previousId"
     FROM jsonb_to_recordset($2::jsonb) AS x(id uuid, "siteId" uuid, "workerId" uuid, "jobId" uuid, kind text, criterion text, "useKey" text,
       state text, date date, "resultId" uuid, "previousId" uuid)`,
    [organizationId, json],
  );
  // Counted from the day on which it was noticed, by the site's clock: nobody is late for what was not known.
  await execute(
    `UPDATE findings f SET due_on = CAST(f.opened_at AT TIME ZONE s.time_zone AS date) + x."dueIn"
     FROM jsonb_to_recordset($1::jsonb) AS x(id uuid, "dueIn" int), sites s WHERE f.id = x.id AND s.id = f.site_id`,
    [json],
  );
  await execute(
    `INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state)
     SELECT $1, x.id, 'state', CASE WHEN x."previousId" IS NOT NULL THEN 'closed' END, x.state
     FROM jsonb_to_recordset($2::jsonb) AS x(id uuid, "previousId" uuid, state text)`,
    [organizationId, json],
  );
  await recordAuditMany(
    { organizationId },
    fresh.map(({ id, kind, criterion, date }) => ({
      action: "open-finding",
      subjectKind: "finding",
      subjectId: id,
      values: { kind, criterion, date },
    })),
  );
}

/**
 * Adds the days to their findings, whose counts and dates move by what was added: a finding of years is not counted
 * through again for each of its days. The facts become those of the latest day.
 */
async function attachEvidence(
  organizationId: string,
  evidence: readonly Evidence[],
  facts: ReadonlyMap<string, Record<string, unknown>>,
): Promise<void> {
  if (evidence.length === 0) return;
  const added = await rows<{ findingId: string }>(
    `INSERT INTO finding_evidence (organization_id, finding_id, worker_id, date, result_id)
     SELECT $1, x."findingId", x."workerId", x.date, x."resultId"
     FROM jsonb_to_recordset($2::jsonb) AS x("findingId" uuid, "workerId" uuid, date date, "resultId" uuid)
     ON CONFLICT (finding_id, worker_id, date) DO NOTHING RETURNING finding_id AS "findingId"`,
    [organizationId, JSON.stringify(evidence)],
  );
  if (added.length < evidence.length) {
    await execute(
      `UPDATE finding_evidence e SET result_id = x."resultId"
       FROM jsonb_to_recordset($1::jsonb) AS x("findingId" uuid, "workerId" uuid, date date, "resultId" uuid)
       WHERE e.finding_id = x."findingId" AND e.worker_id = x."workerId" AND e.date = x.date AND e.result_id <> x."resultId"`,
      [JSON.stringify(evidence)],
    );
  }
  const addedTo = groupBy(added, ({ findingId }) => findingId);
  const moved = [...groupBy(evidence, ({ findingId }) => findingId)].map(([findingId, days]) => {
    const last = days.reduce((a, b) => (b.date >= a.date ? b : a));
    return {
      findingId,
      added: addedTo.get(findingId)?.length ?? 0,
      firstDate: days.reduce((a, b) => (b.date < a.date ? b : a)).date,
      lastDate: last.date,
      resultId: last.resultId,
      facts: facts.get(findingId),
    };
  });
  await execute(
    `UPDATE findings f SET days_count = f.days_count + x.added,
       first_date = CASE WHEN f.days_count = 0 THEN x."firstDate" ELSE least(f.first_date, x."firstDate") END,
       last_date = CASE WHEN f.days_count = 0 THEN x."lastDate" ELSE greatest(f.last_date, x."lastDate") END,
       last_result_id = CASE WHEN f.days_count = 0 OR x."lastDate" >= f.last_date THEN x."resultId" ELSE f.last_result_id END,
       facts = coalesce(x.facts, f.facts)
     FROM jsonb_to_recordset($1::jsonb) AS x("findingId" uuid, added int, "firstDate" date, "lastDate" date, "resultId" uuid, facts jsonb)
     WHERE f.id = x."findingId"`,
    [JSON.stringify(moved)],
  );
}

/** Brings counts and dates in line with what is left of the evidence. */
async function recountFindings(findingIds: readonly string[]): Promise<void> {
  if (findingIds.length === 0) return;
  await execute(
    `UPDATE findings f SET days_count = e.count, first_date = e.first, last_date = e.last, last_result_id = e.result
     FROM (SELECT finding_id, count(*)::int AS count, min(date) AS first, max(date) AS last, (array_agg(result_id ORDER BY date DESC))[1] AS result
           FROM finding_evidence WHERE finding_id = ANY ($1::uuid[]) GROUP BY finding_id) e
     WHERE f.id = e.finding_id`,
    [findingIds],
  );
}

/** Days within which somebody has to have acted. Common practice, no source. */
function dueInDays(kind: FindingKind): number {
  if (
    [
      "over-limit-at-ear",
      "no-protector",
      "protects-too-little",
      "dual-protection",
      "peak-or-ceiling",
    ].includes(kind)
  )
    return 1;
  if (["not-worn-long-enough", "wearing-unknown", "time-not-accounted"].includes(kind)) return 3;
  return 14;
}

interface Attached {
  findingId: string;
  workerId: string;
  date: string;
  kind: FindingKind;
  criterion: string;
  useKey: string;
  state: FindingState;
  /** The rules by which the day showed it. */
  ruleSetKey: string;
  ruleSetVersion: number;
}

async function withdrawEvidence(organizationId: string, days: readonly DayCauses[]): Promise<void> {
  const attached = await rows<Attached>(
    `SELECT e.finding_id AS "findingId", e.worker_id AS "workerId", e.date::text AS date, f.kind, f.criterion, f.use_key AS "useKey", f.state,
       r.governing_rule_set AS "ruleSetKey", r.governing_version AS "ruleSetVersion"
     FROM finding_evidence e JOIN findings f ON f.id = e.finding_id JOIN day_results r ON r.id = e.result_id
     JOIN jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date) ON x."workerId" = e.worker_id AND x.date = e.date
     WHERE f.state <> 'closed' AND f.kind <> 'problem-reported'`,
    [JSON.stringify(days.map(({ workerId, date }) => ({ workerId, date })))],
  );
  const dayOf = new Map(days.map((day) => [`${day.workerId} ${day.date}`, day]));
  const gone = attached.filter(
    ({ workerId, date, kind, criterion, useKey }) =>
      !(dayOf.get(`${workerId} ${date}`)?.causes ?? []).some(
        (cause) => cause.kind === kind && cause.criterion === criterion && cause.useKey === useKey,
      ),
  );
  if (gone.length === 0) return;
  await execute(
    `DELETE FROM finding_evidence e USING jsonb_to_recordset($1::jsonb) AS x("findingId" uuid, "workerId" uuid, date date)
     WHERE e.finding_id = x."findingId" AND e.worker_id = x."workerId" AND e.date = x.date`,
    [JSON.stringify(gone)],
  );
  const touched = [...new Map(gone.map((one) => [one.findingId, one])).values()];
  const left = await rows<{ findingId: string }>(
    `SELECT DISTINCT finding_id AS "findingId" FROM finding_evidence WHERE finding_id = ANY (CAST(:ids AS uuid[]))`,
    { ids: `{${touched.map(({ findingId }) => findingId).join(",")}}` },
  );
  const hasEvidence = new Set(left.map(({ findingId }) => findingId));
  await recountFindings([...hasEvidence]);
  for (const one of touched.filter(({ findingId }) => !hasEvidence.has(findingId))) {
    const { findingId, date, state } = one;
    const governing = dayOf.get(`${one.workerId} ${date}`)?.governing;
    const isRejudged =
      governing && (governing.key !== one.ruleSetKey || governing.version !== one.ruleSetVersion);
    if (isRejudged) {
      await leaveToCheck(organizationId, one, governing);
      continue;
    }
    // Nobody has taken it up and nothing of it is left: a typing error that was caught.
    const closes = state === "new" || state === "came-back";
    await execute(
      "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text) VALUES ($1, $2, 'evidence-gone', $3, $4, $5)",
      [organizationId, findingId, state, closes ? "closed" : state, date],
    );
    if (!closes) {
      await execute("UPDATE findings SET days_count = 0 WHERE id = $1", [findingId]);
      continue;
    }
    await execute(
      "UPDATE findings SET state = 'closed', closed_on = $2, closing_reason = 'evidence-gone', revision = revision + 1 WHERE id = $1",
      [findingId, date],
    );
    await recordAudit(
      { organizationId },
      {
        action: "withdraw-finding",
        subjectKind: "finding",
        subjectId: findingId,
        values: { date },
      },
    );
  }
}

/**
 * The day stands as it was, and other rules judge it now. Nobody has found it to be wrong, so that it is not closed: a
 * person looks whether what the earlier rules asked for is still wanted.
 */
async function leaveToCheck(
  organizationId: string,
  { findingId, date, state, ruleSetKey }: Attached,
  governing: RuleSetVersion,
): Promise<void> {
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text) VALUES ($1, $2, 'rules-changed', $3, 'done', $4)",
    [organizationId, findingId, state, governing.key],
  );
  await execute(
    "UPDATE findings SET state = 'done', days_count = 0, revision = revision + 1 WHERE id = $1",
    [findingId],
  );
  await recordAudit(
    { organizationId },
    {
      action: "rejudge-finding",
      subjectKind: "finding",
      subjectId: findingId,
      values: { date, from: state, to: "done", ruleSets: [ruleSetKey, governing.key] },
    },
  );
}
