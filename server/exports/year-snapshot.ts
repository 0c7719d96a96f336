import type pg from "pg";
import { inTransaction, rows } from "../lib/db";

/**
 * Reads a year's records from one state of the database, with the settings that their files rest on: numbers at full
 * precision, dates as ISO has them, and an end when the reader has gone.
 *
 * @param read gets the connection under the transaction, for cursors
 */
export function readYear<Found>(
  organizationId: string,
  read: (client: pg.Client) => Promise<Found>,
): Promise<Found> {
  return inTransaction(
    { organizationId, readOnly: true, isolation: "repeatable-read" },
    async (transaction) => {
      await rows(
        `SELECT set_config('statement_timeout', '30min', true), set_config('client_connection_check_interval', '1s', true),
           set_config('extra_float_digits', '1', true), set_config('datestyle', 'ISO, YMD', true)`,
      );
      return read((transaction as unknown as { connection: pg.Client }).connection);
    },
  );
}
