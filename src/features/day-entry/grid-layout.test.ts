import { describe, expect, test } from "vitest";
import type { GridTask } from "../../../shared/schemas/shift";
import { gridColumns } from "./columns";
import { gridLayout } from "./grid-layout";

const columnsOf = (names: readonly string[]) =>
  gridColumns(
    names.map(
      (name, at): GridTask => ({
        id: `task ${at}`,
        name,
        areaId: null,
        zone: "none",
        level: null,
        isColumn: true,
      }),
    ),
    [],
  );
const SHORT = ["Rigging", "Run-up", "Soak run", "Control room", "Teardown", "Break"];
const LONG = [
  "Grundlärmmessung",
  "Triebwerksprüfstand",
  "Kompressorhaus",
  "Oberflächenschleifen",
  "Qualitätskontrolle",
  "Instandhaltung",
];
/** What a window leaves beside the page's margins. */
const AT_1600 = 1520;
const AT_1280 = 1200;

describe("six tasks without scrolling sideways", () => {
  test.each([
    ["short names", SHORT],
    ["long German names", LONG],
  ])("and with the whole worked-out half at 1600: %s", (_, names) => {
    const { isWide, minWidthPx } = gridLayout(columnsOf(names), AT_1600);
    expect(isWide).toBe(true);
    expect(minWidthPx).toBeLessThanOrEqual(AT_1600);
  });

  test("and under a rule of doses, a line for each of its figures, at 1600", () => {
    const { isWide, minWidthPx, fixedPx } = gridLayout(columnsOf(SHORT), AT_1600, true);
    expect(isWide).toBe(true);
    expect(minWidthPx).toBeLessThanOrEqual(AT_1600);
    expect(fixedPx.outside).toBeGreaterThan(gridLayout(columnsOf(SHORT), AT_1600).fixedPx.outside);
  });

  test("with strip and word at 1280", () => {
    const { isWide, minWidthPx } = gridLayout(columnsOf(SHORT), AT_1280);
    expect(isWide).toBe(false);
    expect(minWidthPx).toBeLessThanOrEqual(AT_1280);
  });
});

test("words are broken only where there is no room for them", () => {
  expect(gridLayout(columnsOf(SHORT), 2400).broken.size).toBe(0);
  expect(gridLayout(columnsOf(LONG), AT_1600).broken.size).toBeGreaterThan(0);
  const twelve = gridLayout(columnsOf([...LONG, ...SHORT]), 900);
  expect(twelve.broken.size).toBe(0);
  expect(twelve.minWidthPx).toBeGreaterThan(900);
});
