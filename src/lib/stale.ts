import { ApiError, type ReplySchema } from "./api";

/** What stands now, where a change was refused because somebody else's came first; null where it was not, or none came. */
export function savedMeanwhile<View>(error: unknown, schema: ReplySchema<View>): View | null {
  if (!(error instanceof ApiError) || error.status !== 412) return null;
  const { body } = error;
  if (typeof body !== "object" || body === null || !("current" in body)) return null;
  try {
    return schema.parse(body.current);
  } catch {
    return null;
  }
}
