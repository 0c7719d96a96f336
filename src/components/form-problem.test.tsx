// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import { afterEach, expect, test } from "vitest";
import { ApiError } from "../lib/api";
import { TestLanguage } from "../lib/test-i18n";
import { FormProblem } from "./form-problem";

afterEach(cleanup);

const form = { getValues: () => ({ sha256: "", signedBy: "" }) };
const wrong = (...paths: string[]) =>
  new ApiError(
    422,
    "invalid",
    {},
    paths.map((path) => ({ path, code: "required", params: {} })),
    null,
    "",
  );

test.each([
  [["sha256"], false],
  [["sha256", "signedBy"], false],
  [["sha256", "transferId"], true],
  [[""], true],
  [[], true],
])("issues of %j: said beneath the form %s", (paths, isSaid) => {
  render(
    <TestLanguage>
      <FormProblem error={wrong(...paths)} form={form} />
    </TestLanguage>,
  );
  expect(screen.queryByText("Something in the form needs another look.") !== null).toBe(isSaid);
});

test("what is wrong with no field is said in any case", () => {
  const refused = new ApiError(403, "forbidden", {}, [], null, "");
  render(
    <TestLanguage>
      <FormProblem error={refused} form={form} />
    </TestLanguage>,
  );
  expect(screen.queryByText(/not yours to do/)).not.toBeNull();
});
