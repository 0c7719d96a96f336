import { describe, expect, test } from "vitest";
import { HistoryHead, HistoryMapping } from "../../../shared/schemas/history";
import { draftOf, needsStart, readFirstLines, toMapping } from "./mapping";

const mapping = HistoryMapping.parse({
  delimiter: ";",
  skipLines: 1,
  decimal: ",",
  dateOrder: "dmy",
  time: { kind: "date-and-time", dateColumn: 0, timeColumn: 1 },
  levels: [
    { column: 2, channel: "laeq", unit: "dB" },
    { column: 4, channel: "lcpeak", unit: "dB/10" },
  ],
  overRange: ["satt", "++"],
});
const head = HistoryHead.parse({
  format: "text",
  encoding: "utf-8",
  sheets: [],
  lines: [
    ["Datum", "Zeit", "LAeq", "Akku", "LCpeak"],
    ["02.03.2026", "06:00:00", "84,5", "88", "1012"],
    [],
    ["02.03.2026", "06:00:01", "satt", "88", "1013"],
  ],
  proposed: mapping,
  proposedFrom: "file",
});

describe("a mapping while it is being made", () => {
  test("comes out of its draft as it went in", () => {
    expect(toMapping(draftOf(head, mapping))).toEqual(mapping);
  });

  test("without a proposal lacks a time first, then levels", () => {
    const empty = draftOf(head, null);
    expect(empty.roles).toEqual(["", "", "", "", ""]);
    expect(toMapping(empty)).toBe("no-time");
    expect(toMapping({ ...empty, roles: ["date-time", "", "", "", ""] })).toBe("no-levels");
    expect(toMapping({ ...empty, roles: ["date-time", "time", "laeq", "", ""] })).toBe(
      "time-twice-mapped",
    );
    expect(toMapping({ ...empty, roles: ["date-time", "", "laeq", "laeq", ""] })).toBe(
      "channel-twice",
    );
    expect(toMapping({ ...empty, skipLines: null, roles: ["date-time", "", "las", "", ""] })).toBe(
      "skip-missing",
    );
  });

  test("asks for a start where the file says no date", () => {
    const draft = { ...draftOf(head, null), roles: ["", "time", "laeq", "", ""] as never };
    expect([needsStart(draft), toMapping(draft)]).toEqual([true, "start-missing"]);
    expect(toMapping({ ...draft, startDate: "2026-03-02", startTime: "06:00" })).toMatchObject({
      startsAt: "2026-03-02T06:00",
      time: { kind: "time-of-day", column: 1 },
    });
  });

  test("shows how the first lines are read, with their own numbers", () => {
    expect(readFirstLines(head, mapping, 5)).toEqual([
      { line: 2, time: "2026-03-02 06:00:00", values: [84.5, 1012] },
      { line: 4, time: "2026-03-02 06:00:01", values: ["over", 1013] },
    ]);
  });
});
