import { expect, test } from "vitest";
import { DUTIES, dutyOf } from "./duties";
import { RULE_SETS } from "./index";

test("a duty hangs from criteria that its rule set has, and says where it stands", () => {
  for (const [key, duties] of Object.entries(DUTIES)) {
    const ruleSet = RULE_SETS.find((one) => one.key === key);
    const ids = ruleSet?.criteria.map(({ id }) => id) ?? [];
    for (const duty of duties) {
      expect(ids).toEqual(expect.arrayContaining([...duty.criterionIds]));
      expect(duty.citation).not.toBe("");
      expect(duty.withinDays).toBeGreaterThanOrEqual(0);
    }
  }
});

test("training is repeated yearly under the US rules; construction and the guidelines set none", () => {
  expect(dutyOf("us-general-industry", "training")?.everyMonths).toBe(12);
  expect(dutyOf("us-mining", "training")).toMatchObject({ withinDays: 30, everyMonths: 12 });
  expect(dutyOf("eu-2003-10-ec", "training")?.everyMonths).toBeNull();
  expect(dutyOf("us-construction", "training")).toBeNull();
  expect(dutyOf("niosh-rel", "training")).toBeNull();
});
