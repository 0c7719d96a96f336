// @vitest-environment jsdom
import { act, cleanup, render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { afterEach, expect, test } from "vitest";
import { ApiError, connectionEvents } from "../lib/api";
import { TestLanguage } from "../lib/test-i18n";
import { ConnectionBanner } from "./connection-banner";
import { FormProblem } from "./form-problem";

afterEach(() => {
  cleanup();
  connectionEvents.tell("ok");
});

const show = (part: React.ReactNode) =>
  render(
    <TestLanguage>
      <MemoryRouter initialEntries={["/crew-sheet/c1?show=ask"]}>{part}</MemoryRouter>
    </TestLanguage>,
  );
const wayBack = "/sign-in?returnTo=%2Fcrew-sheet%2Fc1%3Fshow%3Dask";

test("each state of the connection says what it is; only a lost session has a way back", () => {
  show(<ConnectionBanner />);
  expect(screen.queryByRole("status")).toBeNull();
  for (const [state, title] of [
    ["offline", "No connection."],
    ["unavailable", "The database can’t be reached."],
    ["session-expired", "You have been signed out."],
    ["access-over", "You have no access any more."],
  ] as const) {
    act(() => connectionEvents.tell(state));
    expect(screen.getByRole("status")).toHaveTextContent(title);
    expect(screen.queryAllByRole("link")).toHaveLength(
      state === "session-expired" || state === "access-over" ? 1 : 0,
    );
  }
  expect(screen.getByRole("link")).toHaveAttribute("href", wayBack);
});

test("the way back stands in the error itself, and in no other error", () => {
  const refused = (status: number, code: string) => new ApiError(status, code, {}, [], null, code);
  show(<FormProblem error={refused(401, "signed-out")} />);
  expect(screen.getByRole("alert")).toHaveTextContent("You have been signed out.");
  expect(screen.getByRole("link", { name: "Sign in again" })).toHaveAttribute("href", wayBack);
  cleanup();
  show(<FormProblem error={refused(503, "database-down")} />);
  expect(screen.getByRole("alert")).toHaveTextContent("The database can’t be reached.");
  expect(screen.queryByRole("link")).toBeNull();
});
