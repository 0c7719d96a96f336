import type { I18n } from "@lingui/core";
import type { ProtectorWord } from "../acoustics/types";

/** What a finding stores beside its kind: codes, names and numbers. An older finding may lack any of them. */
export type FindingFacts = Readonly<Record<string, unknown>>;

/** The protector that the program proposes, as the facts keep it. */
export interface ProposedRemedy {
  readonly modelIds: readonly string[];
  readonly names: readonly string[];
  readonly atEarDb: number | null;
  readonly word: ProtectorWord | null;
}

export const textOf = (facts: FindingFacts, name: string): string | null => {
  const value = facts[name];
  return typeof value === "string" && value !== "" ? value : null;
};

export const numberOf = (facts: FindingFacts, name: string): number | null => {
  const value = facts[name];
  return typeof value === "number" && Number.isFinite(value) ? value : null;
};

const textsIn = (value: unknown): string[] =>
  Array.isArray(value) ? value.filter((one): one is string => typeof one === "string") : [];

export function remedyOf(facts: FindingFacts): ProposedRemedy | null {
  const remedy = facts.remedy;
  if (typeof remedy !== "object" || remedy === null) return null;
  const { names, modelIds, atEarDb, word } = remedy as Record<string, unknown>;
  const found = textsIn(names);
  if (found.length === 0) return null;
  return {
    names: found,
    modelIds: textsIn(modelIds),
    atEarDb: typeof atEarDb === "number" ? atEarDb : null,
    word: typeof word === "string" ? (word as ProtectorWord) : null,
  };
}

/** "Fenmuff", "Fenmuff and Sedge band". */
export function protectorNames(i18n: I18n, names: readonly string[]): string {
  const [first = "", second] = names;
  return second === undefined ? first : i18n.t("{first} and {second}", { first, second });
}
