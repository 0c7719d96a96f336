// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import { afterEach, expect, test } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { NoticeLine } from "./notice-line";

afterEach(cleanup);

const said = (more: Partial<Parameters<typeof NoticeLine>[0]> = {}) => {
  render(
    <TestLanguage>
      <NoticeLine state="were-told" peopleCount={3} time="20:28" {...more} />
    </TestLanguage>,
  );
  return screen.getByRole("status").textContent;
};

test("who was told, and what a correction would do", () => {
  expect(said()).toBe("3 people were told at 20:28. A correction sends “This replaces…”");
});

test("a correction that has gone is said with its time, and no other is announced", () => {
  expect(said({ correctedAt: "1 December 2026, 20:41" })).toBe(
    "3 people were told at 20:28. A correction was sent: 1 December 2026, 20:41.",
  );
});

test("the correction's own line says what it was", () => {
  expect(said({ isCorrection: true, time: "20:41" })).toBe(
    "The correction was sent to 3 people at 20:41. ",
  );
});
