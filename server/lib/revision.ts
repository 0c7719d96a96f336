import { stale } from "./errors";

/**
 * Holds a change to the revision that its author saw.
 *
 * @throws AppError stale, with the row as it stands now.
 */
export async function requireRevision(
  row: { revision: number },
  seen: number,
  current: () => Promise<unknown>,
): Promise<void> {
  if (row.revision !== seen) throw stale(await current());
}
