import { z } from "zod";

/** Every answer that is not a success has one of these; its texts stand in shared/problems. */
export const PROBLEM_CODES = [
  "invalid",
  "not-found",
  "forbidden",
  "signed-out",
  "no-grant",
  "access-ended",
  "token-unknown",
  "token-over",
  "token-person-gone",
  "hook-unsigned",
  "hook-stale",
  "token-scope",
  "csrf",
  "too-many-tries",
  "stale",
  "revision-missing",
  "key-reused",
  "key-missing",
  "in-progress",
  "too-large",
  "not-csv",
  "database-down",
  "mail-down",
  "provider-down",
  "internal",
  "try-again",
  "exists-already",
  "reference-missing",
  "shifts-overlap",
  "assignments-overlap",
  "membership-overlaps",
  "loan-overlaps",
  "loan-has-begun",
  "absence-overlaps",
  "last-administrator",
  "subject-taken",
  "role-granted-already",
  "finding-open-already",
  "finding-closed",
  "too-late-to-undo",
  "notice-sent-already",
  "plan-put-aside-already",
  "code-used",
  "code-expired",
  "code-unknown",
  "not-computed",
  "imported-no-working",
  "own-grant",
  "own-proposal",
  "nothing-to-do",
  "import-refused",
  "quota-exceeded",
  "instruments-overlap",
  "same-file",
  "wrong-state",
  "already-out",
  "link-used",
  "link-expired",
  "link-not-yours",
  "letter-acknowledged",
  "roster-unconfirmed",
  "draining",
] as const;
export type ProblemCode = (typeof PROBLEM_CODES)[number];

export const ProblemIssue = z.object({
  /** Path of the field in the request, such as ["rows", 3, "tasks", 0, "durationMin"]. */
  path: z.array(z.union([z.string(), z.number()])),
  code: z.string(),
  params: z.record(z.string(), z.union([z.string(), z.number()])).default({}),
  /** What is wrong there, in the reader's language; an answer has it, a draft of one not yet. */
  text: z.string().optional(),
});
export type ProblemIssue = z.infer<typeof ProblemIssue>;

/** RFC 9457 problem details: codes with parameters for programs, title and detail in the reader's language. */
export const Problem = z.looseObject({
  type: z.string(),
  title: z.string(),
  status: z.number(),
  detail: z.string(),
  code: z.enum(PROBLEM_CODES),
  params: z.record(z.string(), z.union([z.string(), z.number()])),
  issues: z.array(ProblemIssue),
  requestId: z.string(),
  /** Of a conflict (412): what stands now, and what was sent. */
  current: z.unknown().optional(),
  yours: z.unknown().optional(),
});
export type Problem = z.infer<typeof Problem>;
