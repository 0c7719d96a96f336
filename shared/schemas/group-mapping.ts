import { z } from "zod";
import { RoleName } from "./session";

/** A worker's role wants a worker, whom no group names. */
export const MappedRole = RoleName.exclude(["worker"]);

export const MappingInput = z.object({
  /** As the sign-in service writes it. */
  groupName: z.string().trim().min(1).max(255),
  role: MappedRole,
  siteId: z.uuid().nullable().default(null),
});
export type MappingInput = z.infer<typeof MappingInput>;

export const MappingView = z.object({
  id: z.uuid(),
  groupName: z.string(),
  role: MappedRole,
  siteId: z.uuid().nullable(),
  siteName: z.string().nullable(),
  /** People who hold a role by it at this moment. */
  people: z.number(),
  isEnded: z.boolean(),
});
export type MappingView = z.infer<typeof MappingView>;
export const MappingList = z.object({ rows: z.array(MappingView) });
