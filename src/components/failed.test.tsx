// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import { afterEach, expect, test } from "vitest";
import { ApiError } from "../lib/api";
import { TestLanguage } from "../lib/test-i18n";
import { Failed } from "./failed";

afterEach(cleanup);

function show(error: ApiError) {
  render(
    <TestLanguage>
      <Failed error={error} onRetry={() => undefined} />
    </TestLanguage>,
  );
  return screen.queryByRole("button", { name: "Try again" });
}

test("what is somebody else's is said without a way to try again", () => {
  const refused = new ApiError(403, "other-year", { years: "2026" }, [], null, "");
  expect(show(refused)).toBeNull();
  expect(screen.queryByText(/Your access is for 2026\./)).not.toBeNull();
});

test("what may be better the next time can be tried again", () => {
  expect(show(new ApiError(503, "database-down", {}, [], null, ""))).not.toBeNull();
});
