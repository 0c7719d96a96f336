import { expect, test } from "vitest";
import { parseDictionary } from "./parse-dictionary";

// RFC 4180, section 2: rules 5 to 7 (quoted fields, line ends within them, doubled quotes).
test("quoted fields keep their commas, line ends and quotes; the head is no column", () => {
  const text =
    'name,unit,type,meaning\r\nlex_8h_db,dB,number,"Daily level, ISO 9612"\r\nnote,,text,"Says ""so"",\r\nand more"\r\n';
  expect(parseDictionary(text)).toEqual([
    { name: "lex_8h_db", unit: "dB", type: "number", meaning: "Daily level, ISO 9612" },
    { name: "note", unit: "", type: "text", meaning: 'Says "so",\r\nand more' },
  ]);
});

test("a last record without a line end counts", () => {
  expect(parseDictionary("name,unit,type,meaning\nrows,,integer,Count")).toEqual([
    { name: "rows", unit: "", type: "integer", meaning: "Count" },
  ]);
});
