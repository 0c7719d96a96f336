import type { I18n } from "@lingui/core";
import type { ProtectorWord } from "../acoustics/types";
import type { FindingRow } from "../schemas/finding";

/** What a finding stores beside its kind: codes, names and numbers. An older finding may lack any of them. */
export type FindingFacts = Readonly<Record<string, unknown>>;

/** What the program proposes to wear, as the facts keep it. An older finding has one device or pair, and no tasks. */
export interface ProposedRemedy extends ProposedDevices {
  readonly inTasks: readonly (ProposedDevices & {
    readonly taskIds: readonly string[];
    readonly taskNames: readonly string[];
  })[];
  readonly atEarDb: number | null;
  readonly word: ProtectorWord | null;
}

export interface ProposedDevices {
  readonly modelIds: readonly string[];
  readonly names: readonly string[];
  readonly isHeld: boolean;
}

/** What was noticed, with what is to be done about it as things stand now. */
export const factsToday = ({
  facts,
  today,
}: {
  readonly facts: FindingFacts;
  readonly today: FindingRow["today"];
}): FindingFacts => (today?.is === "asked" ? { ...facts, ...today.proposal } : facts);

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

/** The tasks that a finding names: those of a list, else the one. */
export function tasksOf(i18n: I18n, facts: FindingFacts): string | null {
  const names = textsIn(facts.taskNames);
  return names.length > 0 ? listWords(i18n, names) : textOf(facts, "taskName");
}

const recordIn = (value: unknown): Readonly<Record<string, unknown>> | null =>
  typeof value === "object" && value !== null ? (value as Record<string, unknown>) : null;

const devicesIn = ({ names, modelIds, isHeld }: Readonly<Record<string, unknown>>) => ({
  names: textsIn(names),
  modelIds: textsIn(modelIds),
  isHeld: isHeld === true,
});

export function remedyOf(facts: FindingFacts): ProposedRemedy | null {
  const remedy = recordIn(facts.remedy);
  if (!remedy) return null;
  const main = devicesIn(remedy);
  if (main.names.length === 0) return null;
  const { atEarDb, word, inTasks } = remedy;
  return {
    ...main,
    inTasks: (Array.isArray(inTasks) ? inTasks : []).flatMap((one: unknown) => {
      const other = recordIn(one);
      return other
        ? [
            {
              ...devicesIn(other),
              taskIds: textsIn(other.taskIds),
              taskNames: textsIn(other.taskNames),
            },
          ]
        : [];
    }),
    atEarDb: typeof atEarDb === "number" ? atEarDb : null,
    word: typeof word === "string" ? (word as ProtectorWord) : null,
  };
}

/** One thing to give out: for everywhere in noise, or for tasks. */
export interface Handout extends ProposedDevices {
  readonly taskIds: readonly string[];
  readonly taskNames: readonly string[];
}

/** What the worker has not got yet of a remedy, in the order in which it is said. */
export function handoutsOf({ inTasks, ...main }: ProposedRemedy): [Handout, ...Handout[]] {
  const everywhere: Handout = { ...main, taskIds: [], taskNames: [] };
  const lacking = inTasks.filter(({ isHeld }) => !isHeld);
  const [first, ...others] = main.isHeld ? lacking : [everywhere, ...inTasks];
  return first ? [first, ...others] : [everywhere];
}

const LEFT_KINDS = ["wear-throughout", "lower-noise", "shorten-time", "other-protector"] as const;

/** What is left to do where no protector is to be given, and in which task. */
export function leftOf(
  facts: FindingFacts,
): { kind: (typeof LEFT_KINDS)[number]; taskName: string | null } | null {
  const left = recordIn(facts.left);
  const kind = LEFT_KINDS.find((one) => one === left?.kind);
  return left && kind ? { kind, taskName: textOf(left, "taskName") } : null;
}

/** "Fenmuff", "Fenmuff and Sedge band". */
export function protectorNames(i18n: I18n, names: readonly string[]): string {
  return listWords(i18n, names);
}

/** "Grinding", "Grinding and Chipping", "Grinding, Chipping and Linishing". */
export function listWords(i18n: I18n, words: readonly string[]): string {
  const last = words.at(-1) ?? "";
  const before = words.slice(0, -1);
  return before.length === 0
    ? last
    : i18n.t("{first} and {second}", { first: before.join(", "), second: last });
}

/** What to give out: "Fenmuff", "Sedge band for Teardown", "Fenmuff; in Teardown Alder foam and Fenmuff low". */
export function remedyWords(i18n: I18n, remedy: ProposedRemedy): string {
  const [first, ...others] = handoutsOf(remedy);
  const protector = protectorNames(i18n, first.names);
  return others.reduce(
    (said, { names, taskNames }) =>
      i18n.t("{said}; in {tasks} {protector}", {
        said,
        tasks: listWords(i18n, taskNames),
        protector: protectorNames(i18n, names),
      }),
    first.taskNames.length > 0
      ? i18n.t("{protector} for {tasks}", { protector, tasks: listWords(i18n, first.taskNames) })
      : protector,
  );
}
