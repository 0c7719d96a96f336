import type { DayInput, Protection, TaskAtEar } from "../types";

/**
 * A task at the ear as the verdict reads it, dB: with the active part on where the site credits it and its check passed
 * on this worker, else with it off.
 */
export function judgedAtEar(
  atEar: TaskAtEar,
  protection: Protection | null,
  { creditsActivePart }: DayInput["site"],
): Pick<TaskAtEar, "word" | "wornDb" | "inTaskDb"> {
  const { word, wornDb, inTaskDb, wordActive, wornActiveDb, inTaskActiveDb } = atEar;
  return creditsActivePart && protection?.activeCheckPassed && wornActiveDb !== null
    ? { word: wordActive, wornDb: wornActiveDb, inTaskDb: inTaskActiveDb }
    : { word, wornDb, inTaskDb };
}
