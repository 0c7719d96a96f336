import { expect, test } from "vitest";
import { readLines, readRecords } from "./read-records";

async function* inPieces(text: string, length: number) {
  const bytes = new TextEncoder().encode(text);
  for (let at = 0; at < bytes.length; at += length) yield bytes.subarray(at, at + length);
}
async function all<T>(found: AsyncIterable<T>): Promise<T[]> {
  const list: T[] = [];
  for await (const one of found) list.push(one);
  return list;
}

test("records as RFC 4180 has them, wherever the pieces are cut", async () => {
  const text = 'a,b\r\n"x, ""y""\r\nz",Ü\r\n,\r\n';
  for (let length = 1; length < 12; length += 1)
    expect(await all(readRecords(inPieces(text, length)))).toEqual([
      ["a", "b"],
      ['x, "y"\r\nz', "Ü"],
      ["", ""],
    ]);
  expect(await all(readRecords(inPieces("a,b", 2)))).toEqual([["a", "b"]]);
});

test("lines, wherever the pieces are cut", async () => {
  for (let length = 1; length < 6; length += 1)
    expect(await all(readLines(inPieces("ä\nb\n\nc", length)))).toEqual(["ä", "b", "c"]);
});
