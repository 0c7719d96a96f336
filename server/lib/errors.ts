import { DatabaseError, ForeignKeyConstraintError, UniqueConstraintError } from "sequelize";
import type { ProblemCode, ProblemIssue } from "../../shared/schemas/problem";

/** The one error that becomes an answer. Its code, not its text, says what happened. */
export class AppError extends Error {
  constructor(
    readonly code: ProblemCode,
    readonly status: number,
    readonly params: Readonly<Record<string, string | number>> = {},
    readonly issues: readonly ProblemIssue[] = [],
    /** Further members of the problem, such as both versions of a conflict. */
    readonly extra: Readonly<Record<string, unknown>> = {},
  ) {
    super(code);
  }
}

export const notFound = () => new AppError("not-found", 404);
export const forbidden = () => new AppError("forbidden", 403);
export const unprocessable = (issues: readonly ProblemIssue[]) =>
  new AppError("invalid", 422, {}, issues);
export const issue = (
  path: ProblemIssue["path"],
  code: ProblemIssue["code"],
  params: ProblemIssue["params"] = {},
): ProblemIssue => ({ path, code, params });

/** A stale revision: what stands now goes back, so that a person can choose. */
export const stale = (current: unknown) => new AppError("stale", 412, {}, [], { current });

/** Beside what stands now goes what was sent: both versions of one conflict. */
export const withSent = (error: unknown, sent: unknown): unknown =>
  error instanceof AppError && error.status === 412
    ? new AppError(error.code, error.status, error.params, error.issues, {
        ...error.extra,
        yours: sent ?? null,
      })
    : error;

/** What a database constraint means to the person who met it. */
const constraints: Record<string, () => AppError> = {
  workers_employee_number: () =>
    unprocessable([issue(["employeeNumber"], "employee-number-taken")]),
  shifts_overlap: () => new AppError("shifts-overlap", 409),
  assignments_overlap: () => new AppError("assignments-overlap", 409),
  crew_memberships_overlap: () => new AppError("membership-overlaps", 409),
  absence_spans_overlap: () => new AppError("absence-overlaps", 409),
  runs_overlap: () => new AppError("instruments-overlap", 409),
  runs_one_out: () => new AppError("instruments-overlap", 409),
  time_histories_overlap: () => new AppError("instruments-overlap", 409),
  instrument_reservations_overlap: () =>
    unprocessable([issue(["reservations"], "instrument-reserved-already")]),
  time_histories_file: () => new AppError("same-file", 409),
  crew_supervisors_overlap: () => new AppError("membership-overlaps", 409),
  shift_tasks_fit: () => unprocessable([issue(["tasks"], "tasks-longer-than-shift")]),
  last_administrator: () => new AppError("last-administrator", 409),
  users_email: () => unprocessable([issue(["email"], "email-taken")]),
  users_expected_subject: () => unprocessable([issue(["expectedSubject"], "subject-taken")]),
  users_issuer_subject_key: () => new AppError("subject-taken", 409),
  users_worker: () => unprocessable([issue(["workerId"], "worker-has-user")]),
  role_grants_once: () => new AppError("role-granted-already", 409),
  findings_one_open: () => new AppError("finding-open-already", 409),
  instruments_organization_id_serial_number_key: () =>
    unprocessable([issue(["serialNumber"], "serial-number-taken")]),
};

interface PostgresError {
  code?: string;
  constraint?: string;
}

/** Turns what the database refused into an answer; anything else stays what it is. */
export function fromDatabase(error: unknown): unknown {
  if (!(error instanceof DatabaseError || error instanceof UniqueConstraintError)) return error;
  const original =
    (error as { original?: PostgresError; parent?: PostgresError }).original ??
    (error as { parent?: PostgresError }).parent ??
    {};
  const known = original.constraint ? constraints[original.constraint] : undefined;
  if (known) return known();
  // Two saves of one revision: whoever came second saw a revision that is no longer current.
  if (
    original.code === "23505" &&
    /_(number|revision)_key$|_number_idx$/.test(original.constraint ?? "")
  )
    return new AppError("stale", 412);
  if (original.code === "23505") {
    const field = /_name_key$/.test(original.constraint ?? "") ? "name" : "";
    return field
      ? unprocessable([issue([field], "name-taken")])
      : new AppError("exists-already", 409);
  }
  if (error instanceof ForeignKeyConstraintError || original.code === "23503")
    return new AppError("reference-missing", 409);
  if (original.code === "40P01" || original.code === "40001") return new AppError("try-again", 409);
  return error;
}

const unreachable = new Set([
  "ECONNREFUSED",
  "ECONNRESET",
  "57P01",
  "57P02",
  "57P03",
  "53300",
  "08006",
  "08001",
]);

/** The database could not be reached, as opposed to refusing something. */
export function isDatabaseDown(error: unknown): boolean {
  if (!(error instanceof Error)) return false;
  if (/^SequelizeConnection/.test(error.name)) return true;
  const original = (error as { original?: PostgresError & Error }).original;
  return (
    unreachable.has(original?.code ?? (error as PostgresError).code ?? "") ||
    /Connection terminated|connection is closed/i.test(original?.message ?? error.message)
  );
}
