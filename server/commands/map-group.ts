import type { MappingInput, MappingView } from "../../shared/schemas/group-mapping";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { AppError, forbidden } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { mappingPolicy, sitePolicy } from "../policies";
import { keepAnAdministrator } from "./set-grants";

/** From the next sign-in on, whoever is in the group has the role; nobody maps beyond the sites that they administer. */
export async function mapGroup(actor: Actor, input: MappingInput): Promise<string> {
  if (input.siteId !== null) await findVisible(Site, sitePolicy, input.siteId, actor);
  if (!mappingPolicy.can.change(actor, input)) throw forbidden();
  const made = await row<{ id: string }>(
    `INSERT INTO group_mappings (organization_id, group_name, role, site_id, author_id)
     VALUES (:organizationId, :groupName, :role, :siteId, :authorId) RETURNING id`,
    { ...input, organizationId: actor.organizationId, authorId: actor.userId },
  );
  if (!made) throw new Error("a mapping was not made");
  await recordAudit(actor, {
    action: "map-group",
    subjectKind: "group-mapping",
    subjectId: made.id,
    values: input,
  });
  return made.id;
}

/** What it gave ends with it, at once. The last administrator's role can't: the database says so. */
export async function endMapping(actor: Actor, mapping: MappingView): Promise<void> {
  const ended = await execute(
    "UPDATE group_mappings SET ended_at = now() WHERE id = $1 AND ended_at IS NULL",
    [mapping.id],
  );
  if (ended === 0) throw new AppError("nothing-to-do", 409);
  await execute(
    "UPDATE role_grants SET revoked_at = now() WHERE mapping_id = $1 AND revoked_at IS NULL",
    [mapping.id],
  );
  await keepAnAdministrator();
  const { groupName, role, siteId, people: peopleCount } = mapping;
  await recordAudit(actor, {
    action: "end-group-mapping",
    subjectKind: "group-mapping",
    subjectId: mapping.id,
    values: { groupName, role, siteId, peopleCount },
  });
}
