import type { AttenuationMethod, Protection, Reason, RuleSetVersion, TaskLevel } from "../types";
import { governingMethod } from "./at-ear";
import {
  lcMinusLaDb,
  methodResult,
  type Reduction,
  reductions,
  type StartsFrom,
  usStartsFrom,
} from "./attenuation";

type Rule = RuleSetVersion["protection"];

/** α of the shares of users that an attenuation of mean − α·deviation protects, percent. @source iso-4869-2 4 */
export const PROTECTED_SHARES = [
  { pct: 80, alpha: 0.84 },
  { pct: 84, alpha: 1.0 },
  { pct: 95, alpha: 1.64 },
  { pct: 98, alpha: 2.0 },
] as const;

const DERATING_NAMES = ["none", "half", "by-type"] as const;

/**
 * Methods further apart than this at the ear disagree by more than a word of EN 458's scale, dB: a reason to look at the
 * data. Common practice, no source.
 */
export const LARGE_SPREAD_DB = 5;

/** One method, in one of its ways, on one task. */
export interface MethodAtEar {
  readonly method: AttenuationMethod;
  /** Of the octave-band method: the share of users protected, percent. */
  readonly protectedPct: number | null;
  /** Of the US single number. */
  readonly derating: Rule["derating"] | null;
  /** The outside level that its figure comes off. */
  readonly startsFrom: StartsFrom;
  /** Of the percentile pair: what most users reach, or only few. */
  readonly reachedBy: "most" | "few" | null;
  /** Without programme audio, active part off, dB(A). */
  readonly atEarDb: number | null;
  /** Taken off the outside level, before any clamp, dB. */
  readonly reductionDb: number | null;
  readonly wasClamped: boolean;
  readonly reason: Reason | null;
  /** The rule computes this method in this way. */
  readonly isOfRule: boolean;
  /** It is the one that counts. */
  readonly governs: boolean;
}

export interface EveryMethod {
  readonly methods: readonly MethodAtEar[];
  /** Between the highest and the lowest level at the ear of the methods as the rule computes them, dB. */
  readonly spreadDb: number | null;
  readonly isSpreadLarge: boolean;
}

/**
 * The level at the ear in one task's noise by every method there is, each with its level or why there is none. The US
 * number comes off one and the same outside level in all its ways, that of the rule's own. A flat national allowance is
 * taken off as the rule has it, but off no way of derating that is not the rule's: the two are alternatives.
 *
 * @source iso-4869-2 6, 7, 8
 * @source osha-1910.95 App. B
 * @source ansi-s12.68 6
 * @source as-nzs-1270 App. A
 */
export function everyMethod(level: TaskLevel, protection: Protection, rule: Rule): EveryMethod {
  const usFrom = usStartsFrom(level, rule);
  const byRule = new Map(
    reductions(level, protection, rule).map((one) => [one.method, one] as const),
  );
  const of = (method: AttenuationMethod): Reduction =>
    byRule.get(method) ?? { method, reductionDb: null, reason: whyMissing(method, protection) };
  const governing = governingMethod(
    [...byRule.values()].map((one) => methodResult(level.levelDb, one)),
    rule,
    lcMinusLaDb(level),
  );
  const governs = (method: AttenuationMethod, isOfRule: boolean) =>
    isOfRule && governing.method === method && governing.atEarDb !== null;
  const seen = (reduction: Reduction, way: Way): MethodAtEar => ({
    ...PLAIN,
    ...way,
    ...methodResult(level.levelDb, reduction),
    startsFrom: reduction.method === "us-single-number" ? usFrom : STARTS_FROM[reduction.method],
    reductionDb: reduction.reductionDb,
    governs: governs(reduction.method, way.isOfRule),
  });
  const underRule = (changed: Partial<Rule>, method: AttenuationMethod): Reduction =>
    reductions(level, protection, { ...rule, ...changed }, usFrom).find(
      (one) => one.method === method,
    ) ?? of(method);
  const derated = (derating: Rule["derating"]): Partial<Rule> =>
    derating === "none" || derating === rule.derating ? { derating } : { derating, allowanceDb: 0 };
  const methods = [
    ...alphasOf(rule).map(({ pct, alpha }) =>
      seen(underRule({ alpha }, "octave-band"), {
        protectedPct: pct,
        isOfRule: alpha === rule.alpha,
      }),
    ),
    seen(of("hml"), OF_RULE),
    seen(of("snr"), OF_RULE),
    ...DERATING_NAMES.map((derating) =>
      seen(underRule(derated(derating), "us-single-number"), {
        derating,
        isOfRule: derating === rule.derating,
      }),
    ),
    seen(of("percentile"), { reachedBy: "most", isOfRule: true }),
    seen(few(of("percentile"), protection), { reachedBy: "few", isOfRule: false }),
    seen(of("slc80"), OF_RULE),
    seen(of("own-fit"), OF_RULE),
  ];
  const levels = methods.flatMap(({ atEarDb, isOfRule }) =>
    isOfRule && atEarDb !== null ? [atEarDb] : [],
  );
  const spreadDb = levels.length < 2 ? null : Math.max(...levels) - Math.min(...levels);
  return { methods, spreadDb, isSpreadLarge: spreadDb !== null && spreadDb > LARGE_SPREAD_DB };
}

const STARTS_FROM: Readonly<Record<Exclude<AttenuationMethod, "us-single-number">, StartsFrom>> = {
  "octave-band": "bands",
  hml: "la",
  snr: "lc",
  percentile: "la",
  slc80: "lc",
  "own-fit": "la",
};

type Way = Partial<Pick<MethodAtEar, "protectedPct" | "derating" | "reachedBy">> &
  Pick<MethodAtEar, "isOfRule">;
const PLAIN = { protectedPct: null, derating: null, reachedBy: null } as const;
const OF_RULE: Way = { isOfRule: true };

/** The shares that are shown, and the rule's own α where it is none of theirs. */
function alphasOf({ alpha }: Rule): readonly { pct: number | null; alpha: number }[] {
  return PROTECTED_SHARES.some((one) => one.alpha === alpha)
    ? PROTECTED_SHARES
    : [...PROTECTED_SHARES, { pct: null, alpha }];
}

function few(most: Reduction, { inner, outer }: Protection): Reduction {
  if (most.reductionDb === null || outer !== null || !inner.percentile) return most;
  const { mostDb, fewDb } = inner.percentile;
  return { ...most, reductionDb: most.reductionDb + fewDb - mostDb };
}

function whyMissing(method: AttenuationMethod, { outer }: Protection): Reason {
  return outer !== null && method !== "own-fit" ? "combination-not-tested" : "no-attenuation-data";
}
