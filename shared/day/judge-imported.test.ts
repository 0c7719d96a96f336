import { expect, test } from "vitest";
import { ruleSetVersion } from "../rule-sets";
import { judgeImported } from "./judge-imported";
import { headline } from "./summarize-day";

const verdicts = (key: string, levels: Parameters<typeof judgeImported>[0]) =>
  new Map(
    judgeImported(levels, ruleSetVersion(key, 1)!).map(({ criterionId, verdict, judged }) => [
      criterionId,
      { verdict, judged },
    ]),
  );
const on = (found: ReturnType<typeof verdicts>, judged: string) =>
  headline([...found.values()].filter((one) => one.judged === judged));

// Directive 2003/10/EC, Article 3: limit 87 dB(A) at the ear, action values 85 and 80 dB(A) without protection.
test.each([
  [79.9, "under"],
  [85.1, "over"],
])("2003/10/EC: %d dB without protection is %s", (outsideDb, verdict) => {
  expect(on(verdicts("eu-2003-10-ec", { outsideDb, atEarDb: null }), "without-protection")).toBe(
    verdict,
  );
});

test.each([
  [87, "under"],
  [87.1, "over"],
])(
  "2003/10/EC: the limit of 87 dB is exceeded, not reached: %d dB at the ear is %s",
  (atEarDb, verdict) => {
    expect(on(verdicts("eu-2003-10-ec", { outsideDb: null, atEarDb }), "at-the-ear")).toBe(verdict);
  },
);

test("a time-weighted average is judged by no dose of 29 CFR 1910.95: their thresholds are 80 and 90 dB", () => {
  const found = judgeImported(
    { outsideDb: 92, atEarDb: null },
    ruleSetVersion("us-general-industry", 1)!,
  );
  expect(new Set(found.map(({ verdict }) => verdict))).toEqual(new Set(["not-assessed"]));
  expect(new Set(found.map(({ reason }) => reason))).toEqual(new Set(["imported"]));
});
