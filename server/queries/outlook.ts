import {
  type Ahead,
  atEarDbOf,
  type ExpectedDay,
  faultsAhead,
  isSettled,
} from "../../shared/findings/expected";
import { WORN_KINDS } from "../../shared/findings/orders";
import type { Proposal } from "../../shared/findings/remedy";
import type { FindingKind, FindingRow, FindingState } from "../../shared/schemas/finding";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { comingDays } from "./coming-days";
import { evaluateExpected, type PersonExpected, peopleExpected } from "./expected-days";
import { knownOnWorkers, onWorkerKey } from "./on-worker";
import { proposalsFrom } from "./proposals";
import { registerOn } from "./protector-register";
import { rulesOn } from "./site-settings";

/** What is wrong with a day to come, the worst first, and what would put it right. */
export interface Outlook {
  readonly day: ExpectedDay;
  readonly faults: readonly Ahead[];
  readonly proposal: Proposal | null;
}

/** These days to come of one date, by worker. */
export async function outlooksOf(
  date: string,
  expected: ReadonlyMap<string, ExpectedDay>,
): Promise<Map<string, Outlook>> {
  const days = [...expected].map(([workerId, day]) => ({
    workerId,
    date,
    day,
    faults: faultsAhead(day),
  }));
  const faulty = days.filter(({ faults }) => faults.length > 0);
  const known = await knownOnWorkers(faulty);
  const propose = proposalsFrom(faulty.length > 0 ? await registerOn(date) : []);
  return new Map(
    days.map((one): [string, Outlook] => {
      const { workerId, day, faults } = one;
      const proposal = faults.length > 0 ? propose(day, known.get(onWorkerKey(one))) : null;
      return [workerId, { day, faults, proposal }];
    }),
  );
}

/** By worker the latest judged day with a word for what was worn, where that was in order. */
export async function lastInOrder(workerIds: readonly string[]): Promise<Map<string, string>> {
  if (workerIds.length === 0) return new Map();
  const found = await rows<{ workerId: string; date: string; isInOrder: boolean }>(
    `SELECT DISTINCT ON (d.worker_id) d.worker_id AS "workerId", d.date::text AS date,
       r.word NOT IN ('too-little', 'too-much') AND r.verdict_at_ear NOT IN ('over', 'cant-tell-yet') AS "isInOrder"
     FROM days d JOIN day_results r ON r.id = d.current_result_id
     WHERE d.worker_id = ANY (CAST(:ids AS uuid[])) AND r.word IS NOT NULL ORDER BY d.worker_id, d.date DESC`,
    { ids: `{${workerIds.join(",")}}` },
  );
  return new Map(
    found.flatMap(({ workerId, date, isInOrder }): [string, string][] =>
      isInOrder ? [[workerId, date]] : [],
    ),
  );
}

/** Whether the latest day of a finding credited the active part already; SQL, of a row `f` of findings. */
export const WAS_CREDITED =
  "EXISTS (SELECT 1 FROM day_results r WHERE r.id = f.last_result_id AND r.at_ear_counted_db IS NOT NULL)";

interface Found {
  readonly id: string;
  readonly kind: FindingKind;
  readonly state: FindingState;
  readonly facts: Readonly<Record<string, unknown>>;
  readonly lastDate: string;
  readonly rulesUntil: string | null;
  readonly workerId: string | null;
  readonly wasCredited: boolean;
}

/**
 * By finding what it comes to for the day to come, of those that are about what is worn and wait for somebody. Nothing is
 * said of whoever has no usual day, and of what is asked about a day that is past. A fixed number of statements for a
 * site and date.
 */
export async function findingsToday(
  findings: readonly Found[],
): Promise<Map<string, NonNullable<FindingRow["today"]>>> {
  const asked = findings.filter(
    ({ kind, state, rulesUntil, workerId }) =>
      WORN_KINDS.has(kind) && state !== "closed" && state !== "done" && !rulesUntil && workerId,
  );
  const workerIds = [...new Set(asked.flatMap(({ workerId }) => workerId ?? []))];
  const outlooks = await usualOutlooks(workerIds);
  const inOrder = await lastInOrder([...outlooks.keys()]);
  return new Map(
    asked.flatMap((finding): [string, NonNullable<FindingRow["today"]>][] => {
      const outlook = finding.workerId === null ? undefined : outlooks.get(finding.workerId);
      const today =
        outlook && todayOf(finding, outlook, inOrder.get(finding.workerId ?? "") ?? null);
      return today ? [[finding.id, today]] : [];
    }),
  );
}

function todayOf(finding: Found, outlook: Outlook, inOrderOn: string | null): FindingRow["today"] {
  const { day, faults, proposal } = outlook;
  const isOfPast = finding.kind === "not-worn-long-enough";
  if (isSettled(finding, inOrderOn, outlook) || (!isOfPast && faults.length === 0)) {
    return { is: "in-order", atEarDb: atEarDbOf(day.evaluation), word: day.evaluation.word };
  }
  if (isOfPast) return null;
  const isShown = faults.some(({ kind }) => kind === finding.kind);
  return isShown && proposal ? { is: "asked", proposal } : null;
}

/** By worker the outlook on the usual day, on the date that comes next for the crew. */
async function usualOutlooks(workerIds: readonly string[]): Promise<Map<string, Outlook>> {
  const people = await peopleExpected(workerIds);
  const dates = await comingDays(people.flatMap(({ crewId }) => crewId ?? []));
  const dateOf = ({ crewId, today }: PersonExpected) =>
    (crewId === null ? null : dates.get(crewId)?.date) ?? today;
  const outlooks = new Map<string, Outlook>();
  for (const together of groupBy(people, (one) => `${one.siteId} ${dateOf(one)}`).values()) {
    const { siteId } = together[0]!;
    const date = dateOf(together[0]!);
    const settings = await rulesOn(siteId, date);
    if (!settings) continue;
    const expected = await evaluateExpected(siteId, date, together, settings);
    for (const [id, outlook] of await outlooksOf(date, expected)) outlooks.set(id, outlook);
  }
  return outlooks;
}
