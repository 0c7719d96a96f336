import { dutyOf } from "./duties";
import { resultNoticeOf } from "./result-notice";

/** Where a rule set says that workers are told what was measured on them. All from memory. */
const TELL_WORKERS: Readonly<Record<string, string>> = {
  "eu-2003-10-ec": "Directive 2003/10/EC, article 8",
  "uk-2005": "Control of Noise at Work Regulations 2005, regulation 10",
  "us-general-industry": "29 CFR 1910.95(e)",
};

/** What in a rule set asks that a worker hears the results of measurements; null where it names nothing known here. */
export const tellWorkersCitation = (ruleSetKey: string): string | null =>
  resultNoticeOf(ruleSetKey).citation ?? TELL_WORKERS[ruleSetKey] ?? null;

/** What in a rule set makes somebody act at once when a limit is passed; null where it names nothing known here. */
export const actAtOnceCitation = (ruleSetKey: string): string | null =>
  dutyOf(ruleSetKey, "act-at-once")?.citation ?? null;
