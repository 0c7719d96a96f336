import { expect, test } from "vitest";
import { issueText } from "../../shared/problems/issue-text";
import { testI18n } from "../../src/lib/test-i18n";
import { buildSite, buildUser, signInAs, testApp } from "../factories";

testApp();

const shift = { id: "a", lengthMin: 480, tasks: [] };
const day = {
  date: "2026-12-01",
  shifts: [shift],
  site: {},
};

async function evaluate(body: object) {
  const { organizationId } = await buildSite();
  const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const answer = await client.post("/evaluate", body);
  const [first] = answer.body.issues ?? [];
  return {
    status: answer.status,
    path: first?.path,
    code: first?.code,
    text: first && issueText(testI18n(), first),
  };
}

test.each([
  [
    "a shift without length",
    { day: { ...day, shifts: [{ ...shift, lengthMin: 0 }] }, governingRuleSet: "osha-1910.95" },
    ["day", "shifts", 0, "lengthMin"],
    "too_small",
    "More than 0.",
  ],
  [
    "a rule set that nobody knows",
    { day, governingRuleSet: "no-such-rule" },
    ["governingRuleSet"],
    "rule-set-unknown",
    "There is no such rule set.",
  ],
  ["a list", [day], [], "invalid_type", "An object with named members is needed."],
])("%s is refused by its field, and what is needed is said", async (_, body, path, code, text) => {
  expect(await evaluate(body)).toEqual({ status: 422, path, code, text });
});
