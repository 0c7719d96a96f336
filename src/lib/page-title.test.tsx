// @vitest-environment jsdom
import { cleanup, render } from "@testing-library/react";
import { afterEach, expect, test } from "vitest";
import { PageHead } from "../components/page";
import { TestLanguage } from "./test-i18n";

afterEach(cleanup);

const page = (title: React.ReactNode) => (
  <TestLanguage>
    <PageHead title={title} />
  </TestLanguage>
);

test("the window is called after the page's heading, marks and hidden words included", () => {
  const { rerender, unmount } = render(
    page(
      <>
        Crew sheet
        <span className="sr-only">, Test cell days</span>
      </>,
    ),
  );
  expect(document.title).toBe("Crew sheet, Test cell days · Dinward");
  rerender(page("There is no such page"));
  expect(document.title).toBe("There is no such page · Dinward");
  unmount();
  expect(document.title).toBe("Dinward");
});

test("as long as the heading has no words the window has the product's name alone", () => {
  render(page(<span className="loading-line" />));
  expect(document.title).toBe("Dinward");
});

test("of two pages that follow each other at once, the later gives the name", () => {
  const { rerender } = render(
    <TestLanguage>
      <PageHead key="trail" title="Trail" />
    </TestLanguage>,
  );
  rerender(
    <TestLanguage>
      <PageHead key="days" title="Days" />
    </TestLanguage>,
  );
  expect(document.title).toBe("Days · Dinward");
});
