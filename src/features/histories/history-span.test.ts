import { expect, test } from "vitest";
import { fitSpan, isWhole, panSpan, shortestSpanS, withMargin, zoomSpan } from "./history-span";

const lengthS = 28_800;

test("closer keeps what is under the hand where it is", () => {
  expect(zoomSpan({ fromS: 0, toS: 28_800 }, 0.5, 7200, 20, lengthS)).toEqual({
    fromS: 3600,
    toS: 18_000,
  });
});

test("wider ends at the whole, closer at twenty values", () => {
  const whole = zoomSpan({ fromS: 20_000, toS: 28_800 }, 8, 24_000, 20, lengthS);
  expect(whole).toEqual({ fromS: 0, toS: lengthS });
  expect(isWhole(whole, lengthS)).toBe(true);
  const closest = zoomSpan({ fromS: 100, toS: 130 }, 0.01, 110, 20, lengthS);
  expect(closest.toS - closest.fromS).toBe(20);
  expect([shortestSpanS(1000, lengthS), shortestSpanS(125, lengthS)]).toEqual([20, 2.5]);
});

test("a move stops at the ends", () => {
  expect(panSpan({ fromS: 3600, toS: 7200 }, -2, lengthS)).toEqual({ fromS: 0, toS: 3600 });
  expect(panSpan({ fromS: 3600, toS: 7200 }, 0.25, lengthS)).toEqual({ fromS: 4500, toS: 8100 });
  expect(panSpan({ fromS: 20_000, toS: 27_200 }, 1, lengthS)).toEqual({
    fromS: 21_600,
    toS: 28_800,
  });
});

test("a marked part that is too short, or reaches out, is made to fit", () => {
  expect(fitSpan({ fromS: -50, toS: 50 }, 20, lengthS)).toEqual({ fromS: 0, toS: 100 });
  expect(fitSpan({ fromS: 500, toS: 501 }, 20, lengthS)).toEqual({ fromS: 490.5, toS: 510.5 });
});

test("levels are asked for half as far again on either side", () => {
  expect(withMargin({ fromS: 1000, toS: 3000 }, lengthS)).toEqual({ fromS: 0, toS: 4000 });
  expect(withMargin({ fromS: 27_800, toS: 28_800 }, lengthS)).toEqual({
    fromS: 27_300,
    toS: 28_800,
  });
});
