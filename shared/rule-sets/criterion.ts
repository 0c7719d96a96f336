import type { Criterion } from "../acoustics/types";

/** What most criteria share, so that a rule's file shows only what is its own. */
const PLAIN = {
  levelDb: null,
  judged: "without-protection",
  exchangeRateDb: null,
  thresholdDb: null,
  criterionLevelDb: null,
  referenceMin: 480,
  twaFactor: null,
  peakWeighting: null,
  table: null,
  usesUncertainty: false,
  force: "must",
  sourceStatus: "from-memory",
} as const;

type Own = "id" | "kind" | "label" | "value" | "comparator" | "duties" | "citation";
type Fields<More extends keyof Criterion = never> = Pick<Criterion, Own | More> &
  Partial<Omit<Criterion, "quantity">>;

/** A criterion on the energy level over eight hours. */
export function energyCriterion(fields: Fields): Criterion {
  return { ...PLAIN, quantity: "lex-8h", exchangeRateDb: 3, levelDb: fields.value, ...fields };
}

/** A criterion on a dose; value in percent. */
export function doseCriterion(
  fields: Fields<"levelDb" | "exchangeRateDb" | "thresholdDb" | "criterionLevelDb" | "twaFactor">,
): Criterion {
  return { ...PLAIN, quantity: "dose", ...fields };
}

/** A criterion on the maximum of the slow level. */
export function ceilingCriterion(fields: Omit<Fields, "kind">): Criterion {
  return { ...PLAIN, kind: "ceiling", quantity: "slow-maximum", ...fields };
}

/** A criterion on the peak; the weighting is null where the rule names none. */
export function peakCriterion(fields: Fields<"peakWeighting">): Criterion {
  return { ...PLAIN, quantity: "peak", ...fields };
}
