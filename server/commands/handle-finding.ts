import type { FindingState, FindingStepInput } from "../../shared/schemas/finding";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { AppError, issue, stale, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";
import { findingView } from "../queries/finding-view";
import { listOwners } from "../queries/follow-up";

/** From where each step may be taken, and where it leads. Null: the state stays. */
const steps: Record<
  Exclude<FindingStepInput["kind"], "undo">,
  { from: readonly FindingState[]; to: FindingState | null }
> = {
  "take-in-hand": { from: ["new", "came-back", "done"], to: "in-hand" },
  "hand-over": { from: ["new", "in-hand", "came-back", "done"], to: "in-hand" },
  "mark-done": { from: ["new", "in-hand", "came-back"], to: "done" },
  cannot: { from: ["new", "in-hand", "came-back"], to: "in-hand" },
  reopen: { from: ["done"], to: "in-hand" },
  close: { from: ["new", "in-hand", "done", "came-back"], to: "closed" },
  comment: { from: ["new", "in-hand", "done", "came-back", "closed"], to: null },
};

const recordedAs = {
  "take-in-hand": "state",
  "hand-over": "handed-over",
  "mark-done": "marked-done",
  cannot: "cannot",
  reopen: "state",
  close: "state",
  comment: "comment",
} as const;

/**
 * One step in a finding's life, by the person who takes it.
 *
 * @throws AppError stale with the finding as it stands, finding-closed where it can't be taken from there.
 */
export async function handleFinding(
  actor: Actor,
  finding: Finding,
  input: FindingStepInput,
  seenRevision: number,
): Promise<void> {
  if (finding.revision !== seenRevision) throw stale(await findingView(actor, finding));
  if (input.kind === "undo") return undoStep(actor, finding);
  const step = steps[input.kind];
  if (!step.from.includes(finding.state))
    throw new AppError(finding.state === "closed" ? "finding-closed" : "nothing-to-do", 409);
  const to = step.to ?? finding.state;
  const owner = await newOwner(actor, finding, input);
  const dueOn = "dueOn" in input ? input.dueOn : null;
  const text = "text" in input && input.text !== "" ? input.text : null;
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: finding.siteId },
  );
  const closes = to === "closed" && finding.state !== "closed";
  await execute(
    `UPDATE findings SET state = $2, revision = revision + 1, owner_id = CASE WHEN $3 THEN $4 ELSE owner_id END, due_on = coalesce($5, due_on),
       escalated_on = CASE WHEN $5::date > due_on THEN NULL ELSE escalated_on END, escalation_id = CASE WHEN $5::date > due_on THEN NULL ELSE escalation_id END,
       closed_on = CASE WHEN $6 THEN $7::date ELSE closed_on END, closing_reason = CASE WHEN $6 THEN $8 ELSE closing_reason END WHERE id = $1`,
    [
      finding.id,
      to,
      owner !== null,
      owner?.id ?? null,
      dueOn,
      closes,
      todayAt(site?.timeZone ?? "UTC"),
      text,
    ],
  );
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text, author_id) VALUES ($1, $2, $3, $4, $5, $6, $7)",
    [
      actor.organizationId,
      finding.id,
      recordedAs[input.kind],
      finding.state,
      to,
      input.kind === "hand-over" ? (owner?.name ?? null) : text,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: `${input.kind}-finding`,
    subjectKind: "finding",
    subjectId: finding.id,
    values: {
      from: finding.state,
      to,
      text,
      ...(input.kind === "hand-over" && { ownerId: input.ownerId, dueOn }),
    },
  });
}

/** The screen offers it for ten seconds; a slow connection has a minute. */
const UNDO_WITHIN_S = 60;

/**
 * Takes back one's own last step, Mark done or Can't: the state is again what it was before it, and both stand in the
 * finding's life.
 *
 * @throws AppError too-late-to-undo, also where something else was the last to happen.
 */
async function undoStep(actor: Actor, finding: Finding): Promise<void> {
  const last = await row<{ fromState: FindingState; toState: FindingState; isOwn: boolean }>(
    `SELECT from_state AS "fromState", to_state AS "toState",
       author_id = :userId AND kind IN ('marked-done', 'cannot') AND created_at > now() - interval '${UNDO_WITHIN_S} seconds' AS "isOwn"
     FROM finding_steps WHERE finding_id = :id ORDER BY created_at DESC, id DESC LIMIT 1`,
    { id: finding.id, userId: actor.userId },
  );
  if (!last?.isOwn || last.toState !== finding.state) throw new AppError("too-late-to-undo", 409);
  await execute("UPDATE findings SET state = $2, revision = revision + 1 WHERE id = $1", [
    finding.id,
    last.fromState,
  ]);
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, author_id) VALUES ($1, $2, 'undone', $3, $4, $5)",
    [actor.organizationId, finding.id, finding.state, last.fromState, actor.userId],
  );
  await recordAudit(actor, {
    action: "undo-finding",
    subjectKind: "finding",
    subjectId: finding.id,
    values: { from: finding.state, to: last.fromState },
  });
}

/** Whom a step puts the finding in the hands of; null where it stays in the hands it is in. */
async function newOwner(
  actor: Actor,
  finding: Finding,
  input: FindingStepInput,
): Promise<{ id: string; name: string } | null> {
  if (input.kind === "take-in-hand") return { id: actor.userId, name: actor.name };
  if (input.kind !== "hand-over") return null;
  const issues = dateIssues(["dueOn"], input.dueOn);
  const owner = (await listOwners(finding.siteId)).find(({ id }) => id === input.ownerId);
  if (!owner) issues.push(issue(["ownerId"], "not-of-this-site"));
  if (!owner || issues.length > 0) throw unprocessable(issues);
  return owner;
}
