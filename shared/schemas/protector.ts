import { z } from "zod";
import { activeAttenuationDb } from "../acoustics/protection/active";
import type { ActivePart, BandAttenuation, OctaveBandValues } from "../acoustics/types";
import { Can, IsoDate, Name, Reason } from "./common";
import { Active, Attenuation, ProtectorFacts, ProtectorKindName } from "./evaluation";
import { Size } from "./fit";

/** No passive protector takes this much more off at 125 Hz than at 4 and 8 kHz: the bands stand backwards, dB. */
const FALLS_BY_DB = 10;
const HIGHEST_BAND = 7;

interface Fault {
  readonly path: (string | number)[];
  readonly code: string;
}

interface Checked {
  readonly issues: { path?: PropertyKey[] | undefined }[];
  addIssue(issue: { code: "custom"; path: (string | number)[]; params: { code: string } }): void;
}

/** Also where a field alone is at fault already: all that is wrong is said at once, and a field's own fault before. */
const TOGETHER = {
  when: ({ value }: { value: unknown }) => typeof value === "object" && value !== null,
};

function addFaults(context: Checked, faults: readonly Fault[]): void {
  for (const { path, code } of faults)
    if (!context.issues.some((issue) => issue.path?.join() === path.join()))
      context.addIssue({ code: "custom", path, params: { code } });
}

/** What a certificate can't say: an SNR below its L, a deviation below zero, an active part that works at 8 kHz. */
function faultsOfFacts(facts: z.infer<typeof ProtectorFacts>): Fault[] {
  const { snrDb, lDb, hDb, mDb, bands, active, percentile, usLabel, subjectsDb } = facts;
  const faults: Fault[] = [];
  const add = (path: (string | number)[], code: string) => faults.push({ path, code });
  if (isBelow(snrDb, lDb)) add(["snrDb"], "snr-below-l");
  if (
    [hDb, mDb, lDb].some((value) => value !== null) &&
    [hDb, mDb, lDb].some((value) => value === null)
  )
    add(["mDb"], "hml-all-three");
  if (bands) for (const { path, code } of faultsOfBands(bands)) add(["bands", ...path], code);
  // The level at the ear rests on means and deviations: without them the subjects would count for nothing.
  if (subjectsDb && !bands) add(["subjectsDb"], "subjects-without-bands");
  for (const band of belowZero(usLabel?.sdDb)) add(["usLabel", "sdDb", band], "deviation-negative");
  if (percentile && isBelow(percentile.fewDb, percentile.mostDb))
    add(["percentile", "fewDb"], "few-below-most");
  if (active && (active.delayS === null) !== (active.gain === null))
    add(["active", "gain"], "delay-and-gain-together");
  if (active && claimsHighestBand(active))
    add(
      active.attenuationDb === null
        ? ["active", "bandwidthHz"]
        : ["active", "attenuationDb", HIGHEST_BAND],
      "active-at-8-khz",
    );
  return faults;
}

/*
 * Fields that are at fault alone are looked at as well, so that anything may stand where a number belongs. Whatever is
 * no number is neither below nor above another.
 */
const isNumber = (value: unknown): value is number => typeof value === "number";
const isBelow = (value: unknown, other: unknown): boolean =>
  isNumber(value) && isNumber(other) && value < other;

/** Means and deviations that no test gives, each under its band; under its row where the row as a whole is meant. */
function faultsOfBands({ meanDb, sdDb }: BandAttenuation): Fault[] {
  const faults: Fault[] = [];
  for (const band of belowZero(sdDb))
    faults.push({ path: ["sdDb", band], code: "deviation-negative" });
  if (!Array.isArray(meanDb) || !Array.isArray(sdDb)) return faults;
  if ((meanDb[0] === null) !== (sdDb[0] === null))
    faults.push({ path: ["sdDb", 0], code: "band-missing" });
  const negative = takesNothing(meanDb);
  if (negative !== null) faults.push({ path: ["meanDb", negative], code: "attenuation-negative" });
  else if (isBackwards(meanDb)) faults.push({ path: ["meanDb"], code: "bands-backwards" });
  return faults;
}

const belowZero = (valuesDb: unknown): number[] =>
  Array.isArray(valuesDb) ? valuesDb.flatMap((db, band) => (isBelow(db, 0) ? [band] : [])) : [];

/** A cup may let a little more through in one low band; what is below zero in most was typed with its sign turned. */
const MOST_BANDS = 4;

/** The first band below zero where most are; null: they aren't. */
function takesNothing(meanDb: OctaveBandValues): number | null {
  const below = belowZero(meanDb);
  return below.length >= MOST_BANDS ? below[0]! : null;
}

const isBackwards = ([, at125, , , , , at4000, at8000]: OctaveBandValues): boolean =>
  [at125, at4000, at8000].every(isNumber) && at125 - Math.max(at4000, at8000) > FALLS_BY_DB;

/** By its report, or by a delay and a gain with no bandwidth that ends before. */
function claimsHighestBand(active: ActivePart): boolean {
  if (!Active.safeParse(active).success) return false;
  const claimedDb = active.attenuationDb ?? activeAttenuationDb(active);
  return (claimedDb?.[HIGHEST_BAND] ?? 0) > 0;
}

/** What a certificate says beside its numbers. */
export const ProtectorUse = z.object({
  sizes: z.array(Size).max(12).default([]),
  /** False: not to be worn together with it; null: not stated. */
  worksWith: z
    .object({
      helmet: z.boolean().nullable(),
      glasses: z.boolean().nullable(),
      respirator: z.boolean().nullable(),
    })
    .default({ helmet: null, glasses: null, respirator: null }),
  cushionsEveryDays: z.number().int().min(1).max(3650).nullable().default(null),
  tipsEveryDays: z.number().int().min(1).max(3650).nullable().default(null),
  auClass: z.number().int().min(1).max(5).nullable().default(null),
});
export type ProtectorUse = z.infer<typeof ProtectorUse>;
export const RegisterData = ProtectorFacts.extend(ProtectorUse.shape);

export const ProtectorRevisionInput = RegisterData.extend({
  effectiveFrom: IsoDate,
  reason: Reason.nullable().default(null),
}).superRefine((facts, context) => addFaults(context, faultsOfFacts(facts)), TOGETHER);
export type ProtectorRevisionInput = z.infer<typeof ProtectorRevisionInput>;

export const ProtectorInput = z.object({
  name: Name(120),
  kind: ProtectorKindName,
  isArchived: z.boolean().default(false),
});
export const NewProtectorInput = ProtectorInput.extend({ data: ProtectorRevisionInput });

export const ProtectorView = ProtectorInput.extend({
  id: z.uuid(),
  revision: z.number(),
  data: RegisterData.extend({ id: z.uuid(), number: z.number(), effectiveFrom: IsoDate }),
  wearersToday: z.number(),
  can: Can("change"),
});
export type ProtectorView = z.infer<typeof ProtectorView>;
export const ProtectorList = z.object({
  rows: z.array(ProtectorView),
  /** People, each once: of those that the asker may know of. */
  wearersToday: z.number(),
});
export const ProtectorDetail = ProtectorView.extend({
  history: z.array(
    RegisterData.extend({
      id: z.uuid(),
      number: z.number(),
      effectiveFrom: IsoDate,
      reason: z.string().nullable(),
      authorName: z.string().nullable(),
      createdAt: z.string(),
    }),
  ),
});

/** A data sheet or certificate, sent before, that belongs to a model. */
export const ProtectorFileInput = z.object({ fileId: z.uuid(), title: Name(200) });
export type ProtectorFileInput = z.infer<typeof ProtectorFileInput>;
export const ProtectorFileView = z.object({
  id: z.uuid(),
  fileId: z.uuid(),
  title: z.string(),
  fileName: z.string(),
  sizeBytes: z.number(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
});
export type ProtectorFileView = z.infer<typeof ProtectorFileView>;
export const ProtectorFileList = z.object({ rows: z.array(ProtectorFileView) });
export const ProtectorFileRemoval = z.object({ reason: Reason });

/** Test data of two models worn together, the inner one next to the ear, from a date on. */
export const CombinationInput = z
  .object({
    innerModelId: z.uuid(),
    outerModelId: z.uuid(),
    effectiveFrom: IsoDate,
    bands: Attenuation,
    /** Needed for all data of a pair after the first. */
    reason: Reason.nullable().default(null),
  })
  .superRefine(({ innerModelId, outerModelId, bands }, context) => {
    if (innerModelId === outerModelId)
      addFaults(context, [{ path: ["outerModelId"], code: "same-protector-twice" }]);
    if (bands)
      addFaults(
        context,
        faultsOfBands(bands).map(({ path, code }) => ({ path: ["bands", ...path], code })),
      );
  }, TOGETHER);
export type CombinationInput = z.infer<typeof CombinationInput>;
export const CombinationFilter = z.object({ modelId: z.uuid() });
export const CombinationView = z.object({
  id: z.uuid(),
  innerModelId: z.uuid(),
  innerName: z.string(),
  outerModelId: z.uuid(),
  outerName: z.string(),
  number: z.number(),
  effectiveFrom: IsoDate,
  bands: Attenuation,
  reason: z.string().nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  /** Of the pair's data, those that count today. */
  isInForce: z.boolean(),
});
export type CombinationView = z.infer<typeof CombinationView>;
/** By pair, and of each pair the latest first. */
export const CombinationList = z.object({ rows: z.array(CombinationView) });
