export interface FileColumn {
  readonly name: string;
  readonly unit: string;
  readonly type: string;
  readonly meaning: string;
}

/** The records of a CSV as RFC 4180 has it: quoted fields may hold commas, line ends and doubled quotes. */
function parseCsv(text: string): string[][] {
  const records: string[][] = [];
  let record: string[] = [];
  for (const [, quoted, plain = "", end = ""] of text.matchAll(
    /(?:"((?:[^"]|"")*)"|([^",\r\n]*))(,|\r?\n|$)/g,
  )) {
    record.push(quoted === undefined ? plain : quoted.replaceAll('""', '"'));
    if (end === ",") continue;
    if (record.length > 1) records.push(record);
    record = [];
  }
  return records;
}

/** The dictionary that goes with a year's file, its head left out. */
export function parseDictionary(text: string): FileColumn[] {
  return parseCsv(text)
    .slice(1)
    .map(([name = "", unit = "", type = "", meaning = ""]) => ({ name, unit, type, meaning }));
}
