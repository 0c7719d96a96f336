import { unprocessable } from "./errors";

/** An opaque cursor: the sort values of the last row of a page. */
export function encodeCursor(values: readonly (string | number | null)[]): string {
  return Buffer.from(JSON.stringify(values)).toString("base64url");
}

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
  throw unprocessable([{ path: ["cursor"], code: "cursor-unknown", params: {} }]);
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
