import { expect, test } from "vitest";
import { PROBLEM_CODES } from "../../shared/schemas/problem";
import { ApiError } from "./api";
import { problemText } from "./problem-text";
import { testI18n } from "./test-i18n";

const error = (code: string, title = "") => new ApiError(400, code, {}, [], null, title);

test.each(PROBLEM_CODES)("%s has a sentence of its own", (code) => {
  expect(problemText(testI18n(), error(code, "the title"))).not.toBe("the title");
});

test("an unknown code speaks with the problem's title", () => {
  expect(problemText(testI18n(), error("something-new", "The kiln is cold"))).toBe(
    "The kiln is cold",
  );
});
