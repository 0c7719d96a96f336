import { stringify } from "csv-stringify/sync";
import { TRAILER, YEAR_COLUMNS } from "./year-columns";

/** The columns of a year's file, one record each, and what its last record is. */
export function yearDictionary(): string {
  const records = YEAR_COLUMNS.map(({ name, unit, type, meaning }) => [name, unit, type, meaning]);
  const trailer = [
    TRAILER,
    "",
    "integer",
    `The last record: «${TRAILER}» in the first column, the number of days in the second, the others empty. A file without it is not whole`,
  ];
  return stringify([["name", "unit", "type", "meaning"], ...records, trailer], {
    record_delimiter: "\r\n",
  });
}
