import { z } from "zod";
import type { RuleSetVersion } from "../acoustics/types";

/** Every version of every rule set, as the engine uses it. */
export const RuleSetList = z.object({ rows: z.array(z.custom<RuleSetVersion>()) });
export type RuleSetList = z.infer<typeof RuleSetList>;
