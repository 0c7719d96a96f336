// @vitest-environment jsdom
import { cleanup, render, screen } from "@testing-library/react";
import { afterEach, describe, expect, test } from "vitest";
import { TestLanguage, testI18n } from "../lib/test-i18n";
import { DropStrip, type DropStripProps, StripScale } from "./drop-strip";
import { stripLabel } from "./strip-label";
import { WorkerStrip } from "./worker-strip";

afterEach(cleanup);

const day: DropStripProps = {
  outsideDb: 98.5,
  outsideUDb: 2.3,
  outsideBound: "exact",
  atEarDb: 86.7,
  atEarBound: "exact",
  atEarUDb: 2.3,
  atEarActiveDb: 77.2,
  atEarAsWorkedDb: null,
  whileWornDb: 90.3,
  limits: [{ levelDb: 87, label: "limit 87" }],
  targetBand: { lowDb: 70, highDb: 85, goodLowDb: 75, goodHighDb: 80 },
  isExpected: false,
  hasProtector: "yes",
  word: "too-little",
  verdict: "cant-tell-yet",
  outsideWords: "over 85",
  decidingTask: "Run-up",
};

describe("what a strip says aloud", () => {
  const label = (facts: Partial<DropStripProps>) => stripLabel(testI18n(), { ...day, ...facts });

  test("every figure it shows, with its verdict", () => {
    expect(label({})).toBe(
      "At the ear 86.7 plus or minus 2.3, limit 87, can’t tell yet; 77.2 with the active part on. " +
        "Without protection 98.5, over 85. Protector too little: 90.3 in Run-up.",
    );
  });

  test("what is not known is said to be not known", () => {
    const text = label({
      outsideDb: null,
      atEarDb: null,
      verdict: "not-assessed",
      hasProtector: "unknown",
    });
    expect(text).toBe("At the ear not known. Without protection not known. Protector not known.");
  });

  test("a bound is no level", () => {
    expect(label({ outsideDb: 84.1, outsideBound: "lower" })).toContain(
      "Without protection at least 84.1",
    );
  });
});

test("the strip is an image with that name", () => {
  render(
    <TestLanguage>
      <DropStrip {...day} variant="list" />
    </TestLanguage>,
  );
  expect(screen.getByRole("img", { name: /^At the ear 86\.7/ })).toBeDefined();
});

test("where the cells beside it say the same, it is silent", () => {
  render(
    <TestLanguage>
      <DropStrip {...day} isHidden />
    </TestLanguage>,
  );
  expect(screen.queryByRole("img")).toBeNull();
});

test("the worker's strip speaks in whole decibels and knows no band", () => {
  const { container } = render(
    <TestLanguage>
      <WorkerStrip {...day} atEarDb={78.9} outsideDb={95.6} verdict="under" />
    </TestLanguage>,
  );
  expect(container.textContent).toBe("limit 87around you 9679 at your ear");
  expect(container.querySelector(".strip-v1, .strip-caret")).toBeNull();
});

test("the card writes the figures at their ticks, with a decimal comma in German", () => {
  const { container } = render(
    <TestLanguage locale="de">
      <DropStrip {...day} variant="card" />
    </TestLanguage>,
  );
  const figures = [...container.querySelectorAll(".strip-figure")].map(
    (figure) => figure.textContent,
  );
  expect(figures).toEqual(["98,5", "86,7", "77,2"]);
});

test("the head of the column carries target, limit and the same scale everywhere", () => {
  const { container } = render(
    <TestLanguage>
      <StripScale limits={day.limits} targetBand={day.targetBand} widthPx={200} />
    </TestLanguage>,
  );
  expect(container.textContent).toBe("targetlimit 8760708090100110120");
});
