import type { FindingState, FindingStepInput } from "../../shared/schemas/finding";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { AppError, stale } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";
import { findingView } from "../queries/finding-view";

/** From where each step may be taken, and where it leads. Null: the state stays. */
const steps: Record<
  FindingStepInput["kind"],
  { from: readonly FindingState[]; to: FindingState | null }
> = {
  "take-in-hand": { from: ["new", "came-back", "done"], to: "in-hand" },
  "mark-done": { from: ["new", "in-hand", "came-back"], to: "done" },
  cannot: { from: ["new", "in-hand", "came-back"], to: "in-hand" },
  reopen: { from: ["done"], to: "in-hand" },
  close: { from: ["new", "in-hand", "done", "came-back"], to: "closed" },
  comment: { from: ["new", "in-hand", "done", "came-back", "closed"], to: null },
};

const recordedAs = {
  "take-in-hand": "state",
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
  const step = steps[input.kind];
  if (!step.from.includes(finding.state))
    throw new AppError(finding.state === "closed" ? "finding-closed" : "nothing-to-do", 409);
  const to = step.to ?? finding.state;
  const text = "text" in input && input.text !== "" ? input.text : null;
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: finding.siteId },
  );
  const closes = to === "closed" && finding.state !== "closed";
  await execute(
    `UPDATE findings SET state = $2, revision = revision + 1, owner_id = CASE WHEN $3 THEN $4 ELSE owner_id END, due_on = coalesce($5, due_on),
       closed_on = CASE WHEN $6 THEN $7::date ELSE closed_on END, closing_reason = CASE WHEN $6 THEN $8 ELSE closing_reason END WHERE id = $1`,
    [
      finding.id,
      to,
      input.kind === "take-in-hand",
      actor.userId,
      input.kind === "take-in-hand" ? input.dueOn : null,
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
      text,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: `${input.kind}-finding`,
    subjectKind: "finding",
    subjectId: finding.id,
    values: { from: finding.state, to, text },
  });
}
