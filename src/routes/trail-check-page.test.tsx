// @vitest-environment jsdom
import { QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter } from "react-router-dom";
import { afterEach, expect, test, vi } from "vitest";
import { clientOf } from "../features/session/test-session";
import { TestLanguage } from "../lib/test-i18n";
import { Component as TrailCheckPage } from "./trail-check-page";

afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
});

const state = {
  head: { number: 12_345, hash: "ab".repeat(32), sealedAt: "2026-12-02T08:00:00Z" },
  tail: { events: 0, entries: 0, since: null },
  tables: ["areas", "runs", "workers"],
  unwatched: [],
  foreign: [],
  stated: [],
};
const rowsOf = (table: string) => ({
  table,
  rows: 7,
  faultCount: table === "runs" ? 1 : 0,
  faults: table === "runs" ? [{ kind: "row-changed", key: "run-1" }] : [],
});

function show() {
  vi.stubGlobal("fetch", async (url: string) => {
    const body = url.includes("/seals")
      ? { checked: 12_345, erased: 0, next: null, faults: [] }
      : url.includes("/rows/")
        ? rowsOf(url.split("/").at(-1) ?? "")
        : state;
    return new Response(JSON.stringify(body), { status: 200 });
  });
  const client = clientOf("auditor");
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter>
          <TrailCheckPage />
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

test("before a check it says what one does, and names no table; after it the faults come first and the rest is folded", async () => {
  show();
  await screen.findByText(/12.345 seals anew and holds the rows of 3 tables/);
  expect(screen.queryByRole("heading", { name: "Part by part" })).toBeNull();
  expect(screen.queryByText("areas")).toBeNull();

  await userEvent.click(screen.getByRole("button", { name: "Check now" }));
  await screen.findByText("3 parts are as the trail says");
  const headings = screen.getAllByRole("heading", { level: 2 }).map((one) => one.textContent);
  expect(headings.indexOf("Not as the trail says")).toBeLessThan(headings.indexOf("Part by part"));
  const faulty = screen.getByRole("table", { name: "Parts that are not as the trail says" });
  expect(within(faulty).queryByText("runs")).not.toBeNull();
  expect(within(faulty).queryByText("areas")).toBeNull();
  const folded = screen.getByText("3 parts are as the trail says").closest("details");
  expect(folded?.open).toBe(false);
  expect(within(folded as HTMLElement).queryByText("areas")).not.toBeNull();
});
