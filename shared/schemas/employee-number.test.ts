import { expect, test } from "vitest";
import { EmployeeNumber } from "./common";

test.each(["4417", "A-12/3.b_4", "Ц 017", "社員12", "١٢٣"])("%s is an employee number", (text) => {
  expect(EmployeeNumber.parse(` ${text} `)).toBe(text);
});

test.each(["44\u{1F44D}", "44\u000017", "44\u200b17", "=4417", "44;17", " ", "1".repeat(41)])(
  "%j is none",
  (text) => {
    expect(EmployeeNumber.safeParse(text).success).toBe(false);
  },
);
