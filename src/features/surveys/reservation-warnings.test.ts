import { expect, test } from "vitest";
import { isOffNominal } from "../../lib/nominal-check";
import { reservationWarnings } from "./reservation-warnings";

const days = { fromDate: "2026-12-07", toDate: "2026-12-09" };
const instrument = {
  id: "1",
  name: "Dosimeter",
  serialNumber: "77 401",
  kind: "dosimeter",
  class: "2",
  calibrationDueOn: "2026-12-09",
  calibrationFailedOn: null,
  reservedBy: [],
};
const reserved = (fromDate: string, toDate: string, surveyId = "other") => ({
  surveyId,
  surveyName: "Fettlers",
  fromDate,
  toDate,
});
const codes = (overrides: object) =>
  reservationWarnings({ ...instrument, ...overrides }, days, "own").map(({ code }) => code);

test("a certificate holds on its last day and not after it", () => {
  expect(codes({})).toEqual([]);
  expect(codes({ calibrationDueOn: "2026-12-08" })).toEqual(["certificate-expires"]);
  expect(codes({ calibrationDueOn: null })).toEqual(["no-certificate-date"]);
  const failed = { calibrationDueOn: "2026-11-15", calibrationFailedOn: "2026-11-15" };
  expect(codes(failed)).toEqual(["calibration-failed"]);
});

test("another survey's reservation warns where the days meet, one's own never", () => {
  expect(codes({ reservedBy: [reserved("2026-12-01", "2026-12-06")] })).toEqual([]);
  expect(codes({ reservedBy: [reserved("2026-12-01", "2026-12-07")] })).toEqual([
    "reserved-already",
  ]);
  expect(codes({ reservedBy: [reserved("2026-12-09", "2026-12-20")] })).toEqual([
    "reserved-already",
  ]);
  expect(codes({ reservedBy: [reserved("2026-12-07", "2026-12-09", "own")] })).toEqual([]);
});

test("15 % of the nominal time is still it", () => {
  expect(isOffNominal(120, 138)).toBe(false);
  expect(isOffNominal(120, 138.1)).toBe(true);
  expect(isOffNominal(120, 101.9)).toBe(true);
});
