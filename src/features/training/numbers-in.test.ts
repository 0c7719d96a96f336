import { expect, test } from "vitest";
import { numbersIn } from "./numbers-in";

test("employee numbers come by lines, commas or from a spreadsheet, each once", () => {
  expect(numbersIn(" 4417\n3425, 4417;\t2 180 \r\n\n")).toEqual(["4417", "3425", "2 180"]);
  expect(numbersIn(" \n ,")).toEqual([]);
});
