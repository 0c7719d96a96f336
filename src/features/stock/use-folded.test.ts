import { act, renderHook } from "@testing-library/react";
import { afterEach, expect, test, vi } from "vitest";
import { useFolded } from "./use-folded";

const onPhone = (isPhone: boolean) =>
  vi.stubGlobal("matchMedia", () => ({
    matches: isPhone,
    addEventListener: () => undefined,
    removeEventListener: () => undefined,
  }));
afterEach(() => vi.unstubAllGlobals());

const stock = [4, 0, 3, 9, 2, 7, -1, 5];
const isShort = (quantity: number) => quantity <= 0;

test("a phone begins with what is short, filled up to a few rows, and brings the others when asked", () => {
  onPhone(true);
  const { result } = renderHook(() => useFolded(stock, isShort));
  expect(result.current.rows).toEqual([4, 0, 3, 9, -1]);
  act(() => result.current.more?.onMore());
  expect(result.current).toEqual({ rows: stock });
});

test("what is short is never folded away, and a desk has all of it", () => {
  onPhone(true);
  const empty = [0, 0, 0, 0, 0, 0, 8];
  expect(renderHook(() => useFolded(empty, isShort)).result.current.rows).toEqual(
    empty.slice(0, 6),
  );
  onPhone(false);
  expect(renderHook(() => useFolded(stock, isShort)).result.current).toEqual({ rows: stock });
});
