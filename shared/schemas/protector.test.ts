import { setupI18n } from "@lingui/core";
import { compileMessage } from "@lingui/message-utils/compileMessage";
import { describe, expect, test } from "vitest";
import { issueText } from "../problems/issue-text";
import { ProtectorRevisionInput } from "./protector";

const i18n = setupI18n({ locale: "en", messages: { en: {} } }).setMessagesCompiler(compileMessage);
const same = (value: number) => Array<number>(8).fill(value);
const ACTIVE = {
  attenuationDb: null,
  delayS: null,
  gain: null,
  maximumDb: null,
  bandwidthHz: null,
  saturatesAboveDb: null,
  batteryMin: null,
};

function issuesOf(fields: Record<string, unknown>) {
  const { error } = ProtectorRevisionInput.safeParse({ effectiveFrom: "2026-01-05", ...fields });
  return (error?.issues ?? []).map((issue) => ({
    path: issue.path.join("."),
    code: issue.code === "custom" ? String(issue.params?.code) : issue.code,
    says: issueText(i18n, {
      code: issue.code === "custom" ? String(issue.params?.code) : issue.code,
      params: issue as unknown as Record<string, unknown>,
    }),
  }));
}

describe("what a certificate can't say is refused at its field, in words of its own", () => {
  test.each([
    ["an SNR below its L", { snrDb: 15, hDb: 30, mDb: 24, lDb: 18 }, "snrDb", "snr-below-l"],
    [
      "subjects without means and deviations",
      { subjectsDb: [same(20), same(24)] },
      "subjectsDb",
      "subjects-without-bands",
    ],
    [
      "a single subject",
      { bands: { meanDb: same(20), sdDb: same(3) }, subjectsDb: [same(20)] },
      "subjectsDb",
      "subjects-too-few",
    ],
    ["H without M and L", { hDb: 30 }, "mDb", "hml-all-three"],
    [
      "a negative deviation",
      { bands: { meanDb: same(25), sdDb: [2, 2, 2, 2, -2, 2, 2, 2] } },
      "bands.sdDb.4",
      "deviation-negative",
    ],
    [
      "63 Hz in one of the two",
      { bands: { meanDb: [null, 20, 20, 20, 20, 20, 20, 20], sdDb: same(2) } },
      "bands.sdDb.0",
      "band-missing",
    ],
    [
      "bands from the highest to the lowest",
      { bands: { meanDb: [36, 36, 34, 30, 25, 18, 14, 12], sdDb: same(2) } },
      "bands.meanDb",
      "bands-backwards",
    ],
    [
      "an active part at 8 kHz by its report",
      { active: { ...ACTIVE, attenuationDb: [15, 15, 12, 6, 0, 0, 0, 3] } },
      "active.attenuationDb.7",
      "active-at-8-khz",
    ],
    [
      "an active part at 8 kHz by a delay that is none",
      { active: { ...ACTIVE, delayS: 0, gain: 0.9 } },
      "active.bandwidthHz",
      "active-at-8-khz",
    ],
    [
      "a delay without its gain",
      { active: { ...ACTIVE, delayS: 0.0001 } },
      "active.gain",
      "delay-and-gain-together",
    ],
    [
      "a delay of a second",
      { active: { ...ACTIVE, delayS: 1, gain: 0.9 } },
      "active.delayS",
      "delay-too-long",
    ],
    [
      "few users below most",
      { percentile: { mostDb: 25, fewDb: 18 } },
      "percentile.fewDb",
      "few-below-most",
    ],
    [
      "a negative deviation of the US label",
      { usLabel: { meanDb: Array(9).fill(25), sdDb: [3, 3, 3, 3, 3, 3, 3, 3, -3] } },
      "usLabel.sdDb.8",
      "deviation-negative",
    ],
  ])("%s", (_what, fields, path, code) => {
    const found = issuesOf(fields);
    expect(found).toHaveLength(1);
    expect(found[0]).toMatchObject({ path, code });
    expect(found[0]!.says).not.toBe("This needs another look.");
    expect(found[0]!.says.length).toBeGreaterThan(20);
  });

  test("the US label needs all of its nine frequencies, and says how many", () => {
    const found = issuesOf({ usLabel: { meanDb: same(25), sdDb: Array(9).fill(3) } });
    expect(found).toMatchObject([{ path: "usLabel.meanDb", says: "All 9 values are needed." }]);
  });

  test("all that is wrong is said at once, each fault at its own field", () => {
    const sdDb = [3, 3, -3, 3, null, 3, 3, 3];
    const found = issuesOf({
      snrDb: 15,
      hDb: 30,
      mDb: 24,
      lDb: 18,
      bands: { meanDb: [...same(25).slice(0, 5), null, 25, 25], sdDb },
      percentile: { mostDb: 25, fewDb: 18 },
    });
    expect(found.map(({ path, code }) => [path, code]).sort()).toEqual([
      ["bands.meanDb.5", "invalid_type"],
      ["bands.sdDb.2", "deviation-negative"],
      ["bands.sdDb.4", "invalid_type"],
      ["percentile.fewDb", "few-below-most"],
      ["snrDb", "snr-below-l"],
    ]);
  });

  test("whatever stands where numbers belong is refused, and nothing is computed from it", () => {
    for (const value of ["x", 3, [], {}, null])
      for (const field of ["bands", "active", "usLabel", "subjectsDb", "percentile", "snrDb"])
        expect(() => issuesOf({ [field]: value })).not.toThrow();
    expect(ProtectorRevisionInput.safeParse(null).success).toBe(false);
    // No loop over the periods of a delay that no canceller has.
    expect(issuesOf({ active: { ...ACTIVE, delayS: 1e12, gain: 0.9 } })).toHaveLength(1);
  });

  test("bands that are missing", () => {
    const found = issuesOf({ bands: { meanDb: same(25).slice(1), sdDb: same(3) } });
    expect(found).toHaveLength(1);
    expect(found[0]!.path).toMatch(/^bands\.meanDb/);
  });
});

test("a whole certificate passes", () => {
  expect(
    issuesOf({
      snrDb: 28,
      hDb: 31,
      mDb: 25,
      lDb: 17,
      usRatingDb: 25,
      percentile: { mostDb: 20, fewDb: 29 },
      bands: { meanDb: [13, 14, 19, 27, 33, 34, 36, 35], sdDb: same(2.5) },
      usLabel: { meanDb: Array(9).fill(25), sdDb: Array(9).fill(3) },
      active: { ...ACTIVE, attenuationDb: [14, 16, 14, 6, -1, -2, 0, 0], bandwidthHz: 1000 },
    }),
  ).toEqual([]);
  expect(issuesOf({ active: { ...ACTIVE, delayS: 120e-6, gain: 0.93 } })).toEqual([]);
});
