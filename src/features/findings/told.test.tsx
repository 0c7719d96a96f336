// @vitest-environment jsdom
import { QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { afterEach, expect, test } from "vitest";
import type { FindingView } from "../../../shared/schemas/finding";
import { TestLanguage } from "../../lib/test-i18n";
import { clientOf } from "../session/test-session";
import { Told } from "./told";

afterEach(cleanup);

const siteId = "00000000-0000-4000-8000-000000000002";
const overdue = {
  siteId,
  state: "in-hand",
  dueOn: "2026-11-30",
  told: [],
  untold: "not-by-mail",
  wentUp: null,
  cannot: null,
  goesUp: false,
} as unknown as FindingView;

function show(changes: Partial<FindingView>, role: "officer" | "auditor" = "officer") {
  const client = clientOf(role);
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter>
          <Told finding={{ ...overdue, ...changes }} today="2026-12-03" onLook={() => undefined} />
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}
const nobodyAbove = () => screen.queryByText(/names nobody to whom overdue findings go up/);

test("an overdue finding that can go up to nobody says so, and an officer gets to where that is said", () => {
  show({});
  expect(nobodyAbove()).not.toBeNull();
  expect(screen.queryByText(/it waits on this page/)).toBeNull();
  expect(screen.getByRole("link").getAttribute("href")).toBe(`/rules/sites/${siteId}#escalation`);
  cleanup();
  show({}, "auditor");
  expect(nobodyAbove()).not.toBeNull();
  expect(screen.queryByRole("link")).toBeNull();
});

test.each([
  ["done waits for its check", { state: "done" }],
  ["is not due yet", { dueOn: "2026-12-03" }],
  ["will go up", { goesUp: true }],
] as const)("one that %s only waits on its page", (_, changes) => {
  show(changes);
  expect(nobodyAbove()).toBeNull();
  expect(screen.queryByText(/it waits on this page/)).not.toBeNull();
});
