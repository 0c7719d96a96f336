import { useEffect } from "react";
import { readTyped, useTypedKey, writeTyped } from "./keep-typed";

const NAME = "order of findings";

/** Keeps the order of the list that stands on the page, for going from one of its findings to the next. */
export function useKeepFindingOrder(ids: readonly string[]): void {
  const key = useTypedKey(NAME);
  const text = ids.join();
  useEffect(() => {
    if (text !== "") writeTyped(key, text.split(","));
  }, [key, text]);
}

/** The findings before and after one in the list that one came from; null at its ends, and where there was no list. */
export function useFindingNeighbours(id: string): {
  place: number;
  count: number;
  before: string | null;
  after: string | null;
} | null {
  const kept = readTyped(useTypedKey(NAME));
  const ids = Array.isArray(kept) ? kept.map(String) : [];
  const at = ids.indexOf(id);
  if (at < 0 || ids.length < 2) return null;
  return {
    place: at + 1,
    count: ids.length,
    before: ids[at - 1] ?? null,
    after: ids[at + 1] ?? null,
  };
}
