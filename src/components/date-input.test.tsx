import { fireEvent, render, screen } from "@testing-library/react";
import { expect, test, vi } from "vitest";
import type { Locale } from "../../shared/i18n";
import { TestLanguage } from "../lib/test-i18n";
import { DateInput } from "./date-input";

function open(locale: Locale) {
  const onChoose = vi.fn();
  render(
    <TestLanguage locale={locale}>
      <DateInput aria-label="Another day" value="2026-03-12" onChoose={onChoose} />
    </TestLanguage>,
  );
  return { onChoose, field: screen.getByLabelText("Another day") };
}

test.each([
  ["en", "Thursday 12 March 2026"],
  ["de", "Donnerstag, 12. März 2026"],
] as const)("the date stands beside the field in the reader's language: %s", (locale, words) => {
  open(locale);
  expect(screen.getByText(words)).toBeVisible();
});

test("a picked date is chosen at once, a typed one once it is complete", () => {
  const { onChoose, field } = open("en");
  fireEvent.change(field, { target: { value: "2026-03-11" } });
  expect(onChoose.mock.calls).toEqual([["2026-03-11"]]);
  fireEvent.keyDown(field, { key: "1" });
  fireEvent.change(field, { target: { value: "2026-03-01" } });
  fireEvent.change(field, { target: { value: "2026-03-10" } });
  expect(screen.getByText("Tuesday 10 March 2026")).toBeVisible();
  expect(onChoose).toHaveBeenCalledTimes(1);
  fireEvent.keyDown(field, { key: "Enter" });
  expect(onChoose).toHaveBeenLastCalledWith("2026-03-10");
});
