import type { I18n } from "@lingui/core";
import { stringify } from "csv-stringify/sync";
import { YEAR_COLUMNS } from "./year-columns";

/** The columns of a year's file, one record each, with their meaning in the reader's language. */
export function yearDictionary(i18n: I18n): string {
  const records = YEAR_COLUMNS.map(({ name, unit, type, meaning }) => [
    name,
    unit,
    type,
    i18n._(meaning),
  ]);
  return stringify([["name", "unit", "type", "meaning"], ...records], {
    record_delimiter: "\r\n",
  });
}
