import { EMPLOYER_DUTIES } from "../../shared/rule-sets/employer-duties";
import type { EmployerDutiesInput, EmployerView } from "../../shared/schemas/employer";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { notFound } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { listEmployers } from "../queries/employers";

const FIELDS = [...EMPLOYER_DUTIES, "basis"] as const;

/** What the trail calls them. */
const EVENT_FIELDS = {
  measure: "measuresFor",
  protect: "protectsFor",
  train: "trainsFor",
  keep: "keepsFor",
  tell: "tellsFor",
  basis: "agreedIn",
} as const;

/**
 * What was agreed with an employer from now on; what was agreed before stays on record.
 *
 * @throws AppError not-found: nobody of that employer is at the site, and nothing was ever agreed with it.
 */
export async function agreeEmployerDuties(
  actor: Actor,
  siteId: string,
  input: EmployerDutiesInput,
  seenRevision: number,
): Promise<EmployerView> {
  const { kind, name } = input;
  const read = async (): Promise<EmployerView> => {
    const [employer] = await listEmployers(actor, siteId, { kind, name });
    if (!employer) throw notFound();
    return employer;
  };
  await execute("SELECT pg_advisory_xact_lock(hashtextextended('employer-duties:' || $1, 0))", [
    siteId,
  ]);
  const before = await read();
  await requireRevision(before, seenRevision, async () => before);
  const changed = FIELDS.filter((field) => before.agreed?.[field] !== input[field]);
  if (changed.length === 0) return before;
  await execute(
    `INSERT INTO employer_duties (organization_id, site_id, kind, name, number, measure, protect, train, keep, tell, basis, agreed_by)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12)`,
    [
      actor.organizationId,
      siteId,
      kind,
      name,
      before.revision + 1,
      input.measure,
      input.protect,
      input.train,
      input.keep,
      input.tell,
      input.basis,
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "agree-employer-duties",
    subjectKind: "site",
    subjectId: siteId,
    values: {
      employerName: name,
      ...Object.fromEntries(
        changed.map((field) => [
          EVENT_FIELDS[field],
          { from: before.agreed?.[field] ?? null, to: input[field] },
        ]),
      ),
    },
  });
  return read();
}
