/** What a rule set makes an employer do again and again, or by a date. */
export const DUTY_KEYS = ["training", "monitoring", "act-at-once"] as const;
export type DutyKey = (typeof DUTY_KEYS)[number];

export interface Duty {
  readonly key: DutyKey;
  /** Of the rule set: who was over one of them is owed it. Empty: what it hangs from is no criterion, as a change. */
  readonly criterionIds: readonly string[];
  /** Days from the first such day until it is due; 0: at once, or where the text gives no term. */
  readonly withinDays: number;
  /** Until it is due again; null: the text sets no interval. */
  readonly everyMonths: number | null;
  readonly citation: string;
  readonly sourceStatus: "read" | "from-memory";
}

/** By rule set. A rule set that is not here, or names no such duty, makes nothing due by the program. */
export const DUTIES: Readonly<Record<string, readonly Duty[]>> = {
  "eu-2003-10-ec": [
    {
      key: "act-at-once",
      criterionIds: ["limit"],
      withinDays: 0,
      everyMonths: null,
      citation: "Directive 2003/10/EC, article 7(2)",
      sourceStatus: "from-memory",
    },
    {
      key: "monitoring",
      criterionIds: [],
      withinDays: 0,
      everyMonths: null,
      citation: "Directive 2003/10/EC, article 4",
      sourceStatus: "from-memory",
    },
    {
      key: "training",
      criterionIds: ["lower-action-training"],
      withinDays: 0,
      everyMonths: null,
      citation: "Directive 2003/10/EC, article 8",
      sourceStatus: "from-memory",
    },
  ],
  "uk-2005": [
    {
      key: "act-at-once",
      criterionIds: ["limit"],
      withinDays: 0,
      everyMonths: null,
      citation: "Control of Noise at Work Regulations 2005, regulation 6",
      sourceStatus: "from-memory",
    },
    {
      key: "monitoring",
      criterionIds: [],
      withinDays: 0,
      everyMonths: null,
      citation: "Control of Noise at Work Regulations 2005, regulation 5",
      sourceStatus: "from-memory",
    },
    {
      key: "training",
      criterionIds: ["lower-action"],
      withinDays: 0,
      everyMonths: null,
      citation: "Control of Noise at Work Regulations 2005, regulation 10",
      sourceStatus: "from-memory",
    },
  ],
  "us-general-industry": [
    {
      key: "monitoring",
      criterionIds: [],
      withinDays: 0,
      everyMonths: null,
      citation: "29 CFR 1910.95(d)(3)",
      sourceStatus: "from-memory",
    },
    {
      key: "training",
      criterionIds: ["action-value"],
      withinDays: 0,
      everyMonths: 12,
      citation: "29 CFR 1910.95(k)(1), (2)",
      sourceStatus: "from-memory",
    },
  ],
  "us-mining": [
    {
      key: "training",
      criterionIds: ["action-value"],
      withinDays: 30,
      everyMonths: 12,
      citation: "30 CFR 62.180",
      sourceStatus: "from-memory",
    },
  ],
};

export const dutyOf = (ruleSetKey: string, key: DutyKey): Duty | null =>
  DUTIES[ruleSetKey]?.find((duty) => duty.key === key) ?? null;
