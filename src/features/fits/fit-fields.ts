import { z } from "zod";
import { impossibleTrials } from "../../../shared/acoustics/protection/fit-rating";
import { FIT_METHODS, type FitFacts, FitMethod } from "../../../shared/schemas/fit";
import { Unreadable } from "../../components/form";
import type { Typed } from "../../components/number-input";
import { MOST_TRIALS } from "./trial-cells";

/** The trials of an ear as they stand in cells, some of them empty. */
const Trials = z
  .array(z.number().min(-20).max(80).nullable())
  .max(MOST_TRIALS)
  .transform((trials) => trials.filter((trial) => trial !== null));

/** A field that was emptied states none. */
export const SizeField = z
  .string()
  .trim()
  .max(20)
  .nullable()
  .transform((size) => size || null);

/** How a fit was tested and what came of it: the same at the desk and in a correction. */
export const FitFields = z.object({
  size: SizeField,
  method: FitMethod,
  methodSdDb: z.number().min(0).max(20),
  leftDb: Trials,
  rightDb: Trials,
  note: z.string().trim().max(10_000),
});

/** What no ear can have is said at its ear before it is sent. */
export function possibleTrials(context: {
  value: Pick<FitFacts, "leftDb" | "rightDb">;
  issues: z.core.$ZodRawIssue[];
}): void {
  for (const { code, ...params } of impossibleTrials(context.value))
    context.issues.push({
      code: "custom",
      input: params.foundDb,
      path: [params.ear === "left" ? "leftDb" : "rightDb"],
      params: { code, ...params },
    });
}

/** Microphones at the cup have a page of their own. */
export const DESK_METHODS = FIT_METHODS.filter((method) => method !== "two-microphones");

const typedIn = (values: unknown): readonly Typed[] =>
  Array.isArray(values) ? (values as Typed[]) : [];

/** The trials as far as they are typed. What can't be read isn't left out: nothing is rated until it is mended. */
export function trialsTyped(left: unknown, right: unknown): Pick<FitFacts, "leftDb" | "rightDb"> {
  const isReadable = ![...typedIn(left), ...typedIn(right)].some(
    (trial: unknown) => trial instanceof Unreadable,
  );
  const numbers = (values: unknown) =>
    isReadable ? typedIn(values).filter((value) => typeof value === "number") : [];
  return { leftDb: numbers(left), rightDb: numbers(right) };
}

export const factsOf = (
  { leftDb, rightDb, methodSdDb }: Pick<FitFacts, "leftDb" | "rightDb" | "methodSdDb">,
  bands: FitFacts["bands"] = null,
): FitFacts => ({ leftDb, rightDb, methodSdDb, bands });
