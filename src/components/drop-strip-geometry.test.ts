import { describe, expect, test } from "vitest";
import { levelX, type StripFacts, stripGeometry } from "./drop-strip-geometry";

const day: StripFacts = {
  outsideDb: 98.5,
  outsideUDb: 2.3,
  outsideBound: "exact",
  atEarDb: 80,
  atEarBound: "exact",
  atEarUDb: 2.3,
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  whileWornDb: 80,
  limits: [{ levelDb: 87, label: "limit 87" }],
  targetBand: { lowDb: 70, highDb: 85, goodLowDb: 75, goodHighDb: 80 },
  isExpected: false,
  hasProtector: "yes",
  word: "good",
  verdict: "under",
};
const size = { widthPx: 200, k: 1 };
const draw = (facts: Partial<StripFacts>, k = 1, widthPx = 200) =>
  stripGeometry({ ...day, ...facts }, { widthPx, k });

// x(L) = 5 + (L − 60)(W − 10)/60, by hand: 190/60 = 3.1667 px a decibel at W = 200.
test.each([
  [60, 200, 5],
  [120, 200, 195],
  [90, 200, 100],
  [87, 310, 140],
])("%d dB on a strip of %d px stands at %d px", (levelDb, widthPx, x) => {
  expect(levelX(levelDb, widthPx)).toBeCloseTo(x, 10);
});

test("the bar falls from 5.4 at the outer tick to 12.6 at the inner one, 6.5 thick, times k", () => {
  const { bar, outer, inner } = draw({}, 2);
  expect(bar).toMatchObject({ outerY: 10.8, innerY: 25.2, thickness: 13 });
  expect(bar?.outerX).toBe(outer?.x);
  expect(bar?.innerX).toBe(inner?.x);
  expect(outer).toMatchObject({ y: 2, height: 20, width: 3.2 });
  expect(inner).toMatchObject({ y: 14, height: 24, width: 4 });
});

test("the caret does not grow with the box", () => {
  expect(draw({}, 2).height).toBeCloseTo(45.4);
  expect(draw({}, 2).caret?.y).toBe(41);
});

describe("hinting", () => {
  test("the limit and the band's edges lie on pixels", () => {
    const { limits, band } = stripGeometry(day, size);
    expect(limits[0]?.x).toBe(91); // 90.5
    expect((band?.lowX ?? 0) % 1).toBe(0.5);
    expect((band?.highX ?? 0) % 1).toBe(0.5);
  });

  // One decibel is 3.17 px here: the tick of 86.9 or 87.1 would touch the limit's paper.
  test.each([
    [87.1, "over", 1],
    [86.9, "cant-tell-yet", -1],
    [87, "under", -1],
    [87, "over", 1], // a rule that says "reaches"
  ] as const)("a tick at %d, %s, keeps off the limit on its side", (atEarDb, verdict, side) => {
    const { inner, limits } = draw({ atEarDb, verdict });
    expect(((inner?.x ?? 0) - (limits[0]?.x ?? 0)) * side).toBeGreaterThanOrEqual(2 + 2.5 / 2);
  });

  test("a whisker's cap ends four pixels from the limit, on the side of the unrounded verdict", () => {
    const limitX = draw({}).limits[0]?.x ?? 0;
    const capOf = (facts: Partial<StripFacts>) =>
      draw(facts).whiskers.find((whisker) => whisker.y > 10)?.toX ?? Number.NaN;
    expect(capOf({ atEarDb: 84.9, atEarUDb: 2.05, verdict: "under" })).toBe(limitX - 4);
    expect(capOf({ atEarDb: 84.9, atEarUDb: 2.15, verdict: "cant-tell-yet" })).toBe(limitX + 4);
    expect(capOf({ atEarDb: 80, atEarUDb: 2, verdict: "under" })).toBeCloseTo(levelX(82, 200));
  });

  test("the tick of the noise outside is held against the limit by its own number", () => {
    const { outer, limits } = draw({ outsideDb: 87.1, atEarDb: 70, verdict: "under" });
    expect(outer?.x).toBeGreaterThan(limits[0]?.x ?? Infinity);
  });
});

test("whiskers stand at the foot of the inner and the head of the outer tick", () => {
  expect(draw({}, 1.5).whiskers.map((whisker) => whisker.y)).toEqual([3, 17.4 * 1.5]);
});

test("without an uncertainty, or without a limit, there is no whisker", () => {
  expect(draw({ atEarUDb: null, outsideUDb: null }).whiskers).toEqual([]);
  expect(draw({ limits: [], verdict: null }).whiskers).toEqual([]);
});

test("a level off the scale is a double chevron in place of its tick", () => {
  const above = draw({ outsideDb: 123.4 });
  expect(above.outer).toBeNull();
  expect(above.chevrons).toEqual([{ x: 195, y: 5.4, pointsTo: "right" }]);
  expect(above.bar?.outerX).toBe(195);
  const below = draw({ atEarDb: 58, whileWornDb: 58 });
  expect(below.inner).toBeNull();
  expect(below.chevrons).toEqual([{ x: 5, y: 12.6, pointsTo: "left" }]);
  expect(below.caret).toBeNull();
});

test("a lower bound is a tick, dotted to the right end, with no whisker and no bar", () => {
  const { outer, dotted, bar, whiskers } = draw({
    outsideDb: 84.1,
    outsideBound: "lower",
    atEarDb: null,
    whileWornDb: null,
    verdict: "not-assessed",
  });
  expect(outer?.x).toBeCloseTo(levelX(84.1, 200));
  expect(dotted).toMatchObject({ toX: 195, isUnknown: false });
  expect(bar).toBeNull();
  expect(whiskers).toEqual([]);
});

test.each(["no", "unknown"] as const)(
  "protector %s: one full tick, whisker at its foot",
  (hasProtector) => {
    const geometry = draw({
      hasProtector,
      outsideDb: 98.1,
      atEarDb: 98.1,
      whileWornDb: null,
      verdict: "over",
    });
    expect(geometry.full).toMatchObject({ y: 1, height: 18 });
    expect([geometry.outer, geometry.inner, geometry.bar]).toEqual([null, null, null]);
    expect(geometry.whiskers).toHaveLength(1);
    expect(geometry.whiskers[0]?.y).toBe(17.4);
  },
);

test("nothing known: a dotted line from end to end and no mark that could be read as a level", () => {
  const geometry = draw({
    outsideDb: null,
    atEarDb: null,
    whileWornDb: null,
    verdict: "not-assessed",
  });
  expect(geometry.dotted).toMatchObject({ fromX: 5, toX: 195, isUnknown: true });
  expect([geometry.outer, geometry.inner, geometry.full, geometry.caret]).toEqual([
    null,
    null,
    null,
    null,
  ]);
});

describe("active part", () => {
  test("the ring lies left of the tick that counts, joined by a broken line; so does the day as worked", () => {
    const { ring, dot, link, inner } = draw({
      atEarDb: 86,
      atEarActiveDb: 77,
      atEarAsWorkedDb: 83,
    });
    expect(ring?.x).toBeCloseTo(levelX(77, 200));
    expect(dot?.x).toBeCloseTo(levelX(83, 200));
    expect(link?.fromX).toBe(ring?.x);
    expect(link?.toX).toBeLessThan(inner?.x ?? 0);
  });

  test("where the part is credited, the ring says what it is with the part off", () => {
    const { ring, inner, link } = draw({ atEarDb: 77, atEarOffDb: 86, atEarActiveDb: null });
    expect(ring?.x).toBeCloseTo(levelX(86, 200));
    expect(inner?.x).toBeCloseTo(levelX(77, 200));
    expect(link).toBeNull();
  });

  test("an active part that adds noise puts its ring right of the tick, without a line", () => {
    const { ring, inner, link } = draw({ atEarDb: 78.6, atEarActiveDb: 81.2 });
    expect(ring?.x).toBeGreaterThan(inner?.x ?? Infinity);
    expect(link).toBeNull();
  });
});

describe("feet", () => {
  test("too little reaches from the band's upper edge, too much from its lower one", () => {
    const little = draw({ whileWornDb: 90.3, word: "too-little" });
    expect(little.foot).toEqual({
      fromX: little.band?.highX,
      toX: little.caret?.x,
      kind: "too-little",
    });
    const much = draw({ whileWornDb: 62.5, word: "too-much" });
    expect(much.foot).toEqual({ fromX: much.band?.lowX, toX: much.caret?.x, kind: "too-much" });
  });

  test("inside the band, or where the word is no fault, there is none", () => {
    expect(draw({ whileWornDb: 82, word: "just-enough" }).foot).toBeNull();
    expect(draw({ whileWornDb: 86, word: "enough" }).foot).toBeNull();
    expect(draw({ targetBand: null, whileWornDb: 90, word: "too-little" }).foot).toBeNull();
  });
});

test("several limits keep their order and every tick keeps off each", () => {
  const { limits, outer } = draw({
    limits: [
      { levelDb: 90, label: "limit 90" },
      { levelDb: 85, label: "action 85" },
    ],
    outsideDb: 90.1,
    atEarDb: 78,
  });
  expect(limits.map((limit) => limit.label)).toEqual(["limit 90", "action 85"]);
  expect((outer?.x ?? 0) - (limits[0]?.x ?? 0)).toBeGreaterThanOrEqual(3);
});

test("an outlined tick of a day to come keeps off the limit with all of its width", () => {
  const { inner, limits } = draw({ isExpected: true, atEarDb: 86.8, verdict: null });
  const rightEdge = (inner?.x ?? Infinity) + (inner?.width ?? 0) / 2;
  expect(rightEdge).toBeLessThanOrEqual((limits[0]?.x ?? 0) - 2);
});
