import { describe, expect, test } from "vitest";
import { actionValueDb, mainLimit, RULE_SETS, ruleSetInForce, ruleSetVersion } from ".";

describe.each(RULE_SETS)("$key", (ruleSet) => {
  test("names its criteria once each, with a citation and a duty", () => {
    const ids = ruleSet.criteria.map(({ id }) => id);
    expect(new Set(ids).size).toBe(ids.length);
    for (const { citation, duties, id } of ruleSet.criteria) {
      expect(id).toMatch(/^[a-z0-9-]+$/);
      expect(citation).not.toBe("");
      expect(duties.length).toBeGreaterThan(0);
    }
  });

  test("has a daily main limit", () => {
    expect(mainLimit(ruleSet)).toMatchObject({ kind: "limit" });
  });

  test("is found by version, and by a date from its first day on", () => {
    expect(ruleSetVersion(ruleSet.key, ruleSet.version)).toBe(ruleSet);
    expect(ruleSetInForce(ruleSet.key, ruleSet.effectiveFrom)).toBe(ruleSet);
    expect(ruleSetInForce(ruleSet.key, "1900-01-01")).toBeUndefined();
  });
});

describe("the limit a picture hangs from", () => {
  test.each([
    ["eu-2003-10-ec", 87, "at-the-ear"],
    ["uk-2005", 87, "at-the-ear"],
    ["us-general-industry", 90, "without-protection"],
    ["us-mining", 90, "without-protection"],
    ["niosh-rel", 85, "without-protection"],
    ["canada-federal", 87, "without-protection"],
    ["australia", 85, "without-protection"],
    ["brazil-nr-15", 85, "without-protection"],
    ["acgih-tlv", 85, "without-protection"],
  ])("%s: %d dB, %s", (key, levelDb, judged) => {
    expect(mainLimit(ruleSetVersion(key, 1)!)).toMatchObject({ levelDb, judged });
  });

  test("the words of EN 458 hang from the upper action value where the rule uses them", () => {
    expect(actionValueDb(ruleSetVersion("uk-2005", 1)!)).toBe(85);
    expect(actionValueDb(ruleSetVersion("us-general-industry", 1)!)).toBeNull();
  });
});
