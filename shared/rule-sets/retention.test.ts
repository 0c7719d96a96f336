import { describe, expect, test } from "vitest";
import { RULE_SETS } from "./index";
import { type KeptFacts, keepUntil, RETENTION } from "./retention";

const facts = (more: Partial<KeptFacts> = {}): KeptFacts => ({
  leftOn: "2020-02-29",
  ruleSetKeys: ["us-general-industry"],
  last: { measurements: "2019-06-30", assessments: "2020-02-20", training: null },
  ownYears: null,
  ...more,
});

test("periods are of rule sets that there are, each with its citation", () => {
  const keys = new Set(RULE_SETS.map(({ key }) => key));
  for (const [key, periods] of Object.entries(RETENTION)) {
    expect(keys).toContain(key);
    for (const { citation } of periods) expect(citation).not.toBe("");
  }
});

describe("the longest term that applies", () => {
  test("is two years after the last measurement where that is after leaving", () => {
    expect(keepUntil(facts())).toMatchObject({
      keepUntil: "2021-06-30",
      ruleSetKey: "us-general-industry",
      period: { kind: "measurements" },
    });
  });

  test("is the length of employment where the measurements are older than that", () => {
    const last = { measurements: "2017-01-01", assessments: "2020-02-20", training: null };
    expect(keepUntil(facts({ last }))?.keepUntil).toBe("2020-02-29");
  });

  test("is of all rule sets that applied, a comparison among them", () => {
    const both = facts({ ruleSetKeys: ["us-general-industry", "us-construction"] });
    expect(keepUntil(both)).toMatchObject({
      keepUntil: "2049-06-30",
      ruleSetKey: "us-construction",
    });
  });

  test("is the organization's own where that is longer, and never shorter than a rule's", () => {
    expect(keepUntil(facts({ ownYears: 40 }))).toEqual({
      keepUntil: "2060-02-29",
      ruleSetKey: null,
      period: null,
    });
    // 2021 has no 29 February: its last day.
    expect(keepUntil(facts({ ownYears: 1 }))?.keepUntil).toBe("2021-06-30");
  });

  test("is not guessed where a rule sets none and the organization has none", () => {
    for (const ruleSetKeys of [["eu-2003-10-ec"], ["us-general-industry", "acgih-tlv"], []])
      expect(keepUntil(facts({ ruleSetKeys }))).toBeNull();
    expect(keepUntil(facts({ ruleSetKeys: ["eu-2003-10-ec"], ownYears: 1 }))?.keepUntil).toBe(
      "2021-02-28",
    );
  });
});
