import { z } from "zod";
import { Can, Name } from "./common";
import { OctaveBands } from "./evaluation";

export const WarningSignalInput = z.object({
  siteId: z.uuid(),
  areaId: z.uuid().nullable().default(null),
  name: Name(120),
  meaning: z.string().trim().max(2000).default(""),
  /** Unweighted, at the worker's place. */
  octaveBandsDb: OctaveBands,
  isArchived: z.boolean().default(false),
});
export type WarningSignalInput = z.infer<typeof WarningSignalInput>;

export const AudibilityWord = z.enum(["audible", "not-audible", "not-assessed"]);
/** One signal in one task under one assignment. */
export const Audibility = z.object({
  taskId: z.uuid(),
  taskName: z.string(),
  protectorId: z.uuid().nullable(),
  protectorName: z.string().nullable(),
  off: z.object({
    word: AudibilityWord,
    bestBandHz: z.number().nullable(),
    aboveDb: z.number().nullable(),
  }),
  /** With the active part on; null without one. */
  on: z
    .object({
      word: AudibilityWord,
      bestBandHz: z.number().nullable(),
      aboveDb: z.number().nullable(),
    })
    .nullable(),
  reason: z.string().nullable(),
});
export const WarningSignalView = WarningSignalInput.extend({
  id: z.uuid(),
  revision: z.number(),
  siteName: z.string(),
  areaName: z.string().nullable(),
  can: Can("change"),
});
export type WarningSignalView = z.infer<typeof WarningSignalView>;
export const WarningSignalList = z.object({ rows: z.array(WarningSignalView) });
export const WarningSignalDetail = WarningSignalView.extend({ audibility: z.array(Audibility) });
