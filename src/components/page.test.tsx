import { act, render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter } from "react-router-dom";
import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { RunningHead } from "./page";

const ITEMS = ["Waiting for you", "Days", "Workers", "Findings", "Measuring", "Rules"].map(
  (label) => ({ to: `/${label}`, label }),
);

/** jsdom lays nothing out: words per line of the list, and how high a line is. */
let layout = { perLine: 3, linePx: 56 };

beforeEach(() => {
  vi.stubGlobal(
    "ResizeObserver",
    class {
      observe() {}
      disconnect() {}
    },
  );
  vi.spyOn(HTMLElement.prototype, "offsetTop", "get").mockImplementation(function (
    this: HTMLElement,
  ) {
    const at = ITEMS.findIndex(({ label }) => label === this.textContent);
    return this.tagName === "A" && at >= 0 ? Math.floor(at / layout.perLine) * layout.linePx : 0;
  });
  vi.spyOn(HTMLElement.prototype, "clientHeight", "get").mockReturnValue(56);
});
afterEach(() => {
  vi.unstubAllGlobals();
  vi.restoreAllMocks();
});

function open(at = "/Days") {
  render(
    <TestLanguage>
      <MemoryRouter initialEntries={[at]}>
        <RunningHead items={ITEMS} />
      </MemoryRouter>
    </TestLanguage>,
  );
  return screen.getByRole("navigation", { name: "Pages" });
}

// The reader's text size decides how high a line is: one lower than the list hid the words behind nothing.
test.each([56, 49, 84])("words in a second line of %d px stand behind More", async (linePx) => {
  layout = { perLine: 3, linePx };
  const nav = open();
  expect(nav).toHaveClass("has-more");
  const more = screen.getByRole("button", { name: "More" });
  expect(more).toHaveAttribute("aria-expanded", "false");
  await act(() => userEvent.click(more));
  expect(screen.getByRole("button", { name: "Fewer" })).toHaveAttribute("aria-expanded", "true");
});

test("where the page itself stands behind More, that is marked", () => {
  layout = { perLine: 3, linePx: 49 };
  open("/Rules");
  expect(screen.getByRole("button", { name: "More" })).toHaveClass("is-current");
});

test("where all words have room there is no More", () => {
  layout = { perLine: ITEMS.length, linePx: 49 };
  expect(open()).not.toHaveClass("has-more");
});
