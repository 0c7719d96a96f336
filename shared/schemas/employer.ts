import { z } from "zod";
import { DUTY_BEARERS } from "../rule-sets/employer-duties";
import { Can } from "./common";

const Bearer = z.enum(DUTY_BEARERS);
const duties = { measure: Bearer, protect: Bearer, train: Bearer, keep: Bearer, tell: Bearer };

export const OutsideKind = z.enum(["agency", "contractor"]);

/** Who does what for the people of one employer at a site. */
export const EmployerDutiesInput = z.object({
  kind: OutsideKind,
  name: z.string().trim().min(1).max(200),
  ...duties,
  /** Where it was agreed: a contract, a letter. */
  basis: z.string().trim().min(3).max(2000),
});
export type EmployerDutiesInput = z.infer<typeof EmployerDutiesInput>;

export const EmployerView = z.object({
  kind: OutsideKind,
  /** Null: workers' records say that there is an employer, and not which. */
  name: z.string().nullable(),
  /** People on record at the site who have not left. */
  workerCount: z.number().int(),
  /** The first of them by name. */
  workers: z.array(z.object({ id: z.uuid(), name: z.string() })),
  agreed: z
    .object({ ...duties, basis: z.string(), by: z.string(), at: z.iso.datetime() })
    .nullable(),
  /** How it usually is under the site's governing rule set; it binds nobody. */
  usual: z
    .object({
      duties: z.object(duties),
      citation: z.string(),
      sourceStatus: z.enum(["read", "from-memory"]),
    })
    .nullable(),
  /** 0: nothing was agreed yet. */
  revision: z.number().int(),
  can: Can("agree"),
});
export type EmployerView = z.infer<typeof EmployerView>;

export const EmployerList = z.object({ rows: z.array(EmployerView) });
