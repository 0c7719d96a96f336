import { unprocessable } from "./errors";

/** An opaque cursor: the sort values of the last row of a page. */
export function encodeCursor(values: readonly (string | number | null)[]): string {
  return Buffer.from(JSON.stringify(values)).toString("base64url");
}

const cursorUnknown = () =>
  unprocessable([{ path: ["cursor"], code: "cursor-unknown", params: {} }]);

/** @throws AppError invalid, where the cursor is none of ours. */
export function decodeCursor(
  cursor: string | undefined,
  length: number,
): (string | number | null)[] | null {
  if (!cursor) return null;
  try {
    const values = JSON.parse(Buffer.from(cursor, "base64url").toString("utf8"));
    const isOurs =
      Array.isArray(values) &&
      values.length === length &&
      values.every((value) => value === null || ["string", "number"].includes(typeof value));
    if (isOurs) return values;
  } catch {
    // Falls through: garbage is refused like any other bad parameter.
  }
  throw cursorUnknown();
}

const uuid = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;

/**
 * The cursor of a list that is ordered by a time or date and then by id.
 *
 * @throws AppError invalid, where the cursor is none of ours.
 */
export function decodeTimeCursor(cursor: string | undefined): { at: string; id: string } | null {
  const values = decodeCursor(cursor, 2);
  if (!values) return null;
  const [at, id] = values.map(String) as [string, string];
  if (!uuid.test(id) || Number.isNaN(Date.parse(at))) throw cursorUnknown();
  return { at, id };
}

/** A page from one row more than it holds. */
export function pageFrom<Row>(
  found: readonly Row[],
  limit: number,
  key: (row: Row) => readonly (string | number | null)[],
) {
  const rows = found.slice(0, limit);
  const last = rows.at(-1);
  return { rows, next: found.length > limit && last ? encodeCursor(key(last)) : null };
}
