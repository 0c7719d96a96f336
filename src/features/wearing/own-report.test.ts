import { expect, test } from "vitest";
import { OwnReportFields, ownReport } from "./own-report";

const [press, saw] = [crypto.randomUUID(), crypto.randomUUID()];
const of = { siteId: "works", workerId: "ada", date: "2026-12-01" };

test("an answer is so many of four looks; a task without one is left out", () => {
  expect(ownReport({ answers: { [press]: "mostly", [saw]: null }, note: "hot" }, of)).toEqual({
    siteId: "works",
    seenOn: "2026-12-01",
    source: "own-report",
    note: "hot",
    looks: [{ workerId: "ada", taskId: press, wornCount: 3, seenCount: 4 }],
  });
  expect(ownReport({ answers: { [press]: "never" }, note: "" }, of).looks).toMatchObject([
    { wornCount: 0, seenCount: 4 },
  ]);
});

test("some answer is needed, and the fault stands at the first task", () => {
  const empty = OwnReportFields.safeParse({ answers: { [press]: null, [saw]: null }, note: "" });
  expect(empty.error?.issues.map(({ path }) => path)).toEqual([["answers", press]]);
  expect(OwnReportFields.safeParse({ answers: { [press]: "half" }, note: "" }).success).toBe(true);
});
