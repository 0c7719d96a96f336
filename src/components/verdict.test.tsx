// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import { afterEach, expect, test } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { ProtectorWord } from "./protector-word";
import { Verdict } from "./verdict";

afterEach(cleanup);

test.each([
  ["under", "Under"],
  ["over", "Over"],
  ["cant-tell-yet", "Can’t tell yet"],
  ["not-assessed", "Not assessed"],
] as const)("%s has its word, and a shape that is not read out", (verdict, word) => {
  const { container } = render(
    <TestLanguage>
      <Verdict verdict={verdict} />
    </TestLanguage>,
  );
  expect(screen.getByText(word)).toBeDefined();
  expect(container.querySelector("svg")?.getAttribute("aria-hidden")).toBe("true");
});

test("a protector's word comes with the standard's where that differs, and without a word it is not assessed", () => {
  const { rerender } = render(
    <TestLanguage>
      <ProtectorWord word="too-much" showsStandardWord beneath="Teardown 62.5" />
    </TestLanguage>,
  );
  expect(screen.getByText("Too much").className).toBe("is-fault");
  expect(screen.getByText("overprotection")).toBeDefined();
  rerender(
    <TestLanguage>
      <ProtectorWord word={null} beneath="wearing not known" />
    </TestLanguage>,
  );
  expect(screen.getByText("Not assessed")).toBeDefined();
});
