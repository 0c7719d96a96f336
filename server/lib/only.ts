import { notFound } from "./errors";

/** @throws AppError not-found, where a query for one row came back without it. */
export function only<Row>(found: readonly Row[]): Row {
  const [row] = found;
  if (row === undefined) throw notFound();
  return row;
}
