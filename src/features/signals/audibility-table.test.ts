import { expect, test } from "vitest";
import { mayBeMissed, tallyOf } from "./audibility-table";

type Row = Parameters<typeof mayBeMissed>[0];
const row = (off: Row["off"]["word"], on: Row["off"]["word"] | null = null): Row => {
  const heard = (word: Row["off"]["word"]) => ({ word, bestBandHz: null, aboveDb: null });
  return {
    taskId: "task",
    taskName: "Run-up",
    protectorId: null,
    protectorName: null,
    off: heard(off),
    on: on && heard(on),
    reason: null,
  };
};

test("a signal that an active part takes away may be missed, although it is heard with the part off", () => {
  expect(mayBeMissed(row("audible", "not-audible"))).toBe(true);
  expect(mayBeMissed(row("audible", "audible"))).toBe(false);
  expect(
    tallyOf([
      row("audible"),
      row("audible", "not-audible"),
      row("not-audible"),
      row("not-assessed"),
    ]),
  ).toEqual({ heard: 1, lost: 2, open: 1 });
});
