/** SQL for an instant as the API writes it, inside JSON that the database builds as well. */
export const isoInstant = (instant: string): string =>
  `to_char(${instant} AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"')`;
