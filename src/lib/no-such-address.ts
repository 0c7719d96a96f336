import { ApiError } from "./api";

const NAMES_OF_THINGS: ReadonlySet<unknown> = new Set(["uuid", "date"]);

/**
 * What was asked for by its address is not there: it does not exist, is not this person's to know of, or the address names
 * it by an id or a date that is none.
 */
export function isNoSuchAddress(error: unknown): boolean {
  if (!(error instanceof ApiError)) return false;
  if (error.status === 404) return error.code === "not-found";
  return (
    error.status === 422 &&
    error.issues.length > 0 &&
    error.issues.every(({ params }) => NAMES_OF_THINGS.has(params.format))
  );
}
