import {
  type Ahead,
  type ExpectedDay,
  factsAhead,
  isSettled,
  orderAhead,
} from "../../shared/findings/expected";
import { foldOrders, ORDER_KINDS, WORN_KINDS } from "../../shared/findings/orders";
import type { CrewSheetRow } from "../../shared/schemas/crew";
import type { Cannot, FindingKind, FindingState } from "../../shared/schemas/finding";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { type Actor, visible } from "../lib/policy";
import { findingPolicy } from "../policies";
import { RULES_UNTIL } from "./finding-view";
import { lastCannots } from "./last-cannots";
import { lastInOrder, type Outlook, outlooksOf, WAS_CREDITED } from "./outlook";

interface OrderRow {
  workerId: string;
  findingId: string;
  kind: FindingKind;
  state: FindingState;
  facts: Record<string, unknown>;
  lastDate: string;
  wasCredited: boolean;
  rulesUntil: string | null;
  revision: number;
  siteId: string;
}

type SheetOrders = Pick<CrewSheetRow, "order" | "ahead">;

/**
 * By worker the one order of the sheet: of an open finding, as far as the days since and the day to come still ask for
 * it, else of the day to come itself. What it says of a protector at fault is said of the day to come.
 */
export async function sheetOrders(
  actor: Actor,
  workerIds: readonly string[],
  date: string,
  expected: ReadonlyMap<string, ExpectedDay>,
): Promise<Map<string, SheetOrders>> {
  const findings = await openFindings(actor, workerIds);
  const cannots = await lastCannots(
    [...findings.values()].flat().map(({ findingId }) => findingId),
  );
  const inOrder = await lastInOrder([...findings.keys()]);
  const outlooks = await outlooksOf(date, expected);
  return new Map(
    workerIds.map((workerId): [string, SheetOrders] => {
      const outlook = outlooks.get(workerId) ?? null;
      const open = (findings.get(workerId) ?? []).filter(
        (finding) => !isSettled(finding, inOrder.get(workerId) ?? null, outlook),
      );
      const lead = foldOrders(open)[0]?.lead ?? null;
      const order = lead && toOrder(actor, lead, outlook, cannots.get(lead.findingId) ?? null);
      return [workerId, { order, ahead: aheadOf(lead, outlook) }];
    }),
  );
}

function toOrder(
  actor: Actor,
  { siteId, ...lead }: OrderRow,
  outlook: Outlook | null,
  cannot: Cannot | null,
): NonNullable<CrewSheetRow["order"]> {
  const { findingId, kind, state, rulesUntil, revision } = lead;
  const canMarkDone = findingPolicy.can.markDone(actor, { siteId }) && state !== "done";
  // What was done stays as it was said, and why it came off is asked of the day on which it did.
  const isOfPast = state === "done" || kind === "not-worn-long-enough" || rulesUntil !== null;
  const facts =
    outlook && !isOfPast ? factsAhead(lead, outlook.faults, outlook.proposal) : lead.facts;
  const ofDate = facts === lead.facts ? lead.lastDate : null;
  return { findingId, kind, state, facts, ofDate, rulesUntil, cannot, revision, canMarkDone };
}

/** Null where the order of a finding says it already, or said it and was done. */
function aheadOf(lead: OrderRow | null, outlook: Outlook | null): Ahead | null {
  const ahead = outlook && orderAhead(outlook.day, outlook.faults, outlook.proposal);
  if (!ahead || !lead || !WORN_KINDS.has(lead.kind)) return ahead;
  const isSaid = lead.state !== "done" || outlook.faults.some(({ kind }) => kind === lead.kind);
  return isSaid ? null : ahead;
}

/**
 * The open findings by worker, from what the rules that govern now ask for. What rests on earlier rules stays on the
 * sheet, named as such, only until a day has been judged by the new ones: from then on that day decides, and the finding
 * is the officer's to close.
 */
async function openFindings(
  actor: Actor,
  workerIds: readonly string[],
): Promise<Map<string, OrderRow[]>> {
  if (workerIds.length === 0) return new Map();
  const found = await rows<OrderRow>(
    `SELECT * FROM (SELECT f.worker_id AS "workerId", f.id AS "findingId", f.kind, f.state, f.facts, f.last_date::text AS "lastDate",
       ${WAS_CREDITED} AS "wasCredited",
       ${RULES_UNTIL} AS "rulesUntil", f.revision, f.site_id AS "siteId" FROM findings f
     WHERE f.worker_id = ANY (CAST(:ids AS uuid[])) AND f.state <> 'closed' AND ${visible(findingPolicy, actor, "f")}) open
     WHERE "rulesUntil" IS NULL OR NOT EXISTS (SELECT 1 FROM days d WHERE d.worker_id = open."workerId"
       AND d.date >= CAST(open."rulesUntil" AS date) AND d.current_result_id IS NOT NULL)`,
    { ids: `{${workerIds.join(",")}}` },
  );
  return groupBy(
    found.filter(({ kind }) => ORDER_KINDS.includes(kind)),
    ({ workerId }) => workerId,
  );
}

/** What a row still asks for: the day to come, and the order of an open finding that nobody has marked as done. */
export const stillAsked = ({ order, ahead }: CrewSheetRow) => [
  ...(ahead ? [{ ...ahead, findingId: null, cannot: null }] : []),
  ...(order && order.state !== "done" ? [order] : []),
];
