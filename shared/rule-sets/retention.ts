import { addMonths } from "../time/zone";

/** What a rule makes an employer keep. */
export const RETENTION_KINDS = ["measurements", "assessments", "training"] as const;
export type RetentionKind = (typeof RETENTION_KINDS)[number];

export interface RetentionPeriod {
  readonly kind: RetentionKind;
  /** From the last such record, or from the day on which somebody left. */
  readonly counts: "from-record" | "from-leaving";
  /** Months; 0 with `from-leaving`: for the length of employment. Null: the text asks to keep them and sets no term. */
  readonly months: number | null;
  readonly citation: string;
  readonly sourceStatus: "read" | "from-memory";
}

const years = (count: number) => 12 * count;

/** By rule set. One that is not here sets no term that the program knows of: the organization's own has to be set. */
export const RETENTION: Readonly<Record<string, readonly RetentionPeriod[]>> = {
  "eu-2003-10-ec": [
    {
      kind: "assessments",
      counts: "from-record",
      months: null,
      citation: "Directive 2003/10/EC, article 4(5)",
      sourceStatus: "from-memory",
    },
  ],
  "uk-2005": [
    {
      kind: "assessments",
      counts: "from-record",
      months: null,
      citation: "Control of Noise at Work Regulations 2005, regulations 5 and 9",
      sourceStatus: "from-memory",
    },
  ],
  "us-general-industry": [
    {
      kind: "measurements",
      counts: "from-record",
      months: years(2),
      citation: "29 CFR 1910.95(m)(3)(i)",
      sourceStatus: "from-memory",
    },
    {
      // Part of the audiometric record, (m)(2)(ii), and kept as long as that.
      kind: "assessments",
      counts: "from-leaving",
      months: 0,
      citation: "29 CFR 1910.95(m)(2)(ii), (m)(3)(ii)",
      sourceStatus: "from-memory",
    },
  ],
  "us-construction": [
    {
      kind: "measurements",
      counts: "from-record",
      months: years(30),
      citation: "29 CFR 1910.1020(d)(1)(ii), by 1926.33",
      sourceStatus: "from-memory",
    },
  ],
  "us-mining": [
    {
      kind: "assessments",
      counts: "from-leaving",
      months: 6,
      citation: "30 CFR 62.110(d), 62.171",
      sourceStatus: "from-memory",
    },
    {
      kind: "training",
      counts: "from-leaving",
      months: 6,
      citation: "30 CFR 62.180",
      sourceStatus: "from-memory",
    },
  ],
  "niosh-rel": [
    {
      kind: "measurements",
      counts: "from-record",
      months: years(30),
      citation: "NIOSH 98-126, recommendations, recordkeeping",
      sourceStatus: "from-memory",
    },
  ],
  "canada-federal": [
    {
      kind: "measurements",
      counts: "from-record",
      months: years(10),
      citation: "Canada Occupational Health and Safety Regulations, section 7.3",
      sourceStatus: "from-memory",
    },
  ],
  "brazil-nr-15": [
    {
      kind: "assessments",
      counts: "from-record",
      months: years(20),
      citation: "NR-1, item 1.5.7.3.3.1",
      sourceStatus: "from-memory",
    },
  ],
};

/** What becomes of records whose employer ends or sells a site. */
export const SUCCESSION_KINDS = ["hand-over", "receive", "tell-workers"] as const;
export type SuccessionKind = (typeof SUCCESSION_KINDS)[number];

export interface SuccessionDuty {
  /** To hand over and, for whoever follows, to keep on; where nobody follows, to tell workers of their right of access. */
  readonly kind: SuccessionKind;
  /** At least so many months before the end; null: the text sets no time. */
  readonly monthsBefore: number | null;
  readonly citation: string;
  readonly sourceStatus: "read" | "from-memory";
}

const GENERAL_SUCCESSION: readonly SuccessionDuty[] = [
  {
    kind: "receive",
    monthsBefore: null,
    citation: "29 CFR 1910.1020(h)(1)",
    sourceStatus: "from-memory",
  },
  {
    kind: "tell-workers",
    monthsBefore: 3,
    citation: "29 CFR 1910.1020(h)(2)",
    sourceStatus: "from-memory",
  },
];

/** By rule set. One that is not here says nothing of it that the program knows of; records can be handed over all the same. */
export const SUCCESSION: Readonly<Record<string, readonly SuccessionDuty[]>> = {
  "us-general-industry": [
    {
      kind: "hand-over",
      monthsBefore: null,
      citation: "29 CFR 1910.95(m)(5)",
      sourceStatus: "from-memory",
    },
    ...GENERAL_SUCCESSION,
  ],
  // By 29 CFR 1926.33, as the term of keeping.
  "us-construction": GENERAL_SUCCESSION,
  "us-mining": [
    {
      kind: "hand-over",
      monthsBefore: null,
      citation: "30 CFR 62.190(c)",
      sourceStatus: "from-memory",
    },
  ],
};

export interface KeptFacts {
  /** ISO date. */
  readonly leftOn: string;
  /** That applied where the person worked, governing or beside. */
  readonly ruleSetKeys: readonly string[];
  /** ISO date of the last record of a kind; null: there is none. */
  readonly last: Readonly<Record<RetentionKind, string | null>>;
  /** The organization's own term after leaving; null: none is set. */
  readonly ownYears: number | null;
}

export interface KeepUntil {
  /** The last day of the longest term, ISO. */
  readonly keepUntil: string;
  /** Whose term that is; null: the organization's own. */
  readonly ruleSetKey: string | null;
  readonly period: RetentionPeriod | null;
}

/**
 * How long a former worker's person stays in the records: the longest term that applies. Null: a rule set that applies sets
 * none that is known, and the organization has none of its own, so that nobody can say.
 */
export function keepUntil({ leftOn, ruleSetKeys, last, ownYears }: KeptFacts): KeepUntil | null {
  const terms: KeepUntil[] = [];
  let isOpen = ruleSetKeys.length === 0;
  for (const ruleSetKey of ruleSetKeys) {
    const periods = RETENTION[ruleSetKey] ?? [];
    if (!periods.some(({ months }) => months !== null)) isOpen = true;
    for (const period of periods) {
      const from = period.counts === "from-leaving" ? leftOn : last[period.kind];
      if (period.months !== null && from !== null)
        terms.push({ keepUntil: addMonths(from, period.months), ruleSetKey, period });
    }
  }
  if (ownYears !== null)
    terms.push({ keepUntil: addMonths(leftOn, years(ownYears)), ruleSetKey: null, period: null });
  else if (isOpen) return null;
  // Of nothing recorded, nothing has to be kept beyond leaving.
  return terms.reduce((longest, term) => (term.keepUntil > longest.keepUntil ? term : longest), {
    keepUntil: leftOn,
    ruleSetKey: null,
    period: null,
  });
}
