// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { afterEach, expect, test } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { HistoryChart } from "./history-chart";

afterEach(cleanup);

const days = [
  { date: "2026-11-26", levelDb: 79.6 },
  { date: "2026-11-27", levelDb: null },
  { date: "2026-11-30", levelDb: 88.4, note: "88: worn-out cushions" },
];

test("reads day by day with the arrow keys; a day not assessed has no tick but is read", async () => {
  const { container } = render(
    <TestLanguage>
      <HistoryChart
        title="The year at the ear"
        days={days}
        limitDb={87}
        tableLink={<a href="/list">As a list</a>}
      />
    </TestLanguage>,
  );
  expect(container.querySelectorAll(".day-tick")).toHaveLength(2);
  const user = userEvent.setup();
  await user.tab();
  expect(document.activeElement).toBe(screen.getByRole("group", { name: "The year at the ear" }));
  await user.keyboard("{ArrowRight}");
  expect(screen.getByText("26 November 2026: 79.6 dB at the ear")).toBeDefined();
  await user.keyboard("{ArrowRight}");
  expect(screen.getByText("27 November 2026: not assessed")).toBeDefined();
  await user.keyboard("{End}");
  expect(screen.getByText("30 November 2026: 88.4 dB at the ear")).toBeDefined();
  expect(screen.getByRole("link", { name: "As a list" })).toBeDefined();
});

test("a level beyond the frame widens it: its tick stays above the limit's line", () => {
  const { container } = render(
    <TestLanguage>
      <HistoryChart
        title="Year"
        days={[{ date: "2026-11-30", levelDb: 98.1 }]}
        limitDb={87}
        tableLink={null}
      />
    </TestLanguage>,
  );
  const y = (selector: string) => Number(container.querySelector(selector)?.getAttribute("y1"));
  expect(y(".day-tick")).toBeGreaterThanOrEqual(0);
  expect(y(".day-tick")).toBeLessThan(y(".limit-line"));
});

test("the words of a tick just over or under the limit stand clear of the limit's line", () => {
  const noteAndLine = (levelDb: number) => {
    const { container, unmount } = render(
      <TestLanguage>
        <HistoryChart
          title="Year"
          variant="worker"
          days={[{ date: "2026-11-30", levelDb, note: "88" }]}
          limitDb={87}
          tableLink={null}
        />
      </TestLanguage>,
    );
    const note = [...container.querySelectorAll("text.label-ink")].find(
      ({ textContent }) => textContent === "88",
    );
    const noteY = Number(note?.getAttribute("y"));
    const lineY = Number(container.querySelector(".limit-line")?.getAttribute("y1"));
    unmount();
    return noteY - lineY;
  };
  // The baseline over the line, and under it by the height of the figures.
  expect(noteAndLine(87.6)).toBeLessThanOrEqual(-4);
  expect(noteAndLine(86.8)).toBeGreaterThanOrEqual(14);
});
