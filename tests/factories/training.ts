import { daysFromToday } from "./days";
import { insert } from "./insert";
import type { Site } from "./site";
import type { Worker } from "./worker";

/** A training that was held, with who was there. */
export async function buildTraining(
  site: Site,
  attendance: readonly Worker[],
  overrides: { heldOn?: string; struckReason?: string; fileId?: string } = {},
): Promise<string> {
  const { organizationId, id: siteId } = site;
  const sessionId = await insert("training_sessions", {
    organizationId,
    siteId,
    heldOn: daysFromToday(-10),
    title: "Noise and how protectors are worn",
    durationMin: 30,
    ...overrides,
  });
  for (const { id: workerId } of attendance)
    await insert("training_attendances", { organizationId, sessionId, workerId });
  return sessionId;
}
