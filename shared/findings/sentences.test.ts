import { setupI18n } from "@lingui/core";
import { compileMessage } from "@lingui/message-utils/compileMessage";
import { describe, expect, test } from "vitest";
import { ruleSetVersion } from "../rule-sets";
import { FINDING_KINDS, type FindingKind } from "../schemas/finding";
import { citationOf } from "./basis";
import type { FindingFacts } from "./facts";
import { noticedSentence, orderSentence, remedyFigure } from "./sentences";
import { workerSentence } from "./worker-sentence";

const i18n = setupI18n({ locale: "en", messages: { en: {} } }).setMessagesCompiler(compileMessage);
const remedy = {
  modelIds: ["a", "b"],
  names: ["Fenmuff", "Sedge band"],
  atEarDb: 79.66,
  word: "good",
  wornDb: 78.1,
};

const cases: readonly {
  kind: FindingKind;
  facts: FindingFacts;
  order: string;
  noticed: string;
  worker: string;
}[] = [
  {
    kind: "over-limit-outside",
    facts: { levelDb: 91.24, dosePct: 120, valueDb: 90 },
    order: "Bring the noise down, or the time in it",
    noticed: "91.2 without protection, limit 90",
    worker: "It is very loud where you work. Keep your protector on all the time in noise.",
  },
  {
    kind: "over-limit-at-ear",
    facts: { levelDb: 89.13, dosePct: null, valueDb: 87, remedy },
    order: "Give Fenmuff and Sedge band",
    noticed: "89.1 at the ear, limit 87",
    worker:
      "About 89 decibels reached your ear; that is too much. Ask your supervisor for Fenmuff and Sedge band.",
  },
  {
    kind: "protects-too-little",
    facts: {
      taskName: "Chipping",
      protector: "Sedge band",
      wornDb: 89.9,
      outsideDb: 103,
      remedy: { ...remedy, names: ["Fenmuff"] },
    },
    order: "Give Fenmuff",
    noticed: "Sedge band: 89.9 in Chipping while worn",
    worker: "Sedge band protects too little for your work. Ask your supervisor for Fenmuff.",
  },
  {
    kind: "protects-too-much",
    facts: {
      taskName: "Teardown",
      protector: "Fenmuff low",
      wornDb: 66.3,
      outsideDb: 92,
      remedy: { ...remedy, names: ["Sedge band"] },
    },
    order: "Give Sedge band",
    noticed: "Fenmuff low: 66.3 in Teardown while worn",
    worker:
      "Fenmuff low protects too much: you might miss a warning. Ask your supervisor for Sedge band.",
  },
  {
    kind: "dual-protection",
    facts: { dosePct: 812, levelDb: 105, valueDb: 105, remedy: null },
    order: "Double up: a plug under a muff",
    noticed: "A dose of 812\u00a0% asks for two protectors",
    worker: "Wear two protectors: plugs, and a muff over them.",
  },
  {
    kind: "no-protector",
    facts: { taskName: "Run-up", outsideDb: 102.6, remedy: null },
    order: "Find a protector for Run-up",
    noticed: "Works in Run-up, 102.6, with no protector assigned",
    worker:
      "You work in noise and have no protector yet. Ask your supervisor what to do before you work in noise again.",
  },
  {
    kind: "not-worn-long-enough",
    facts: { taskName: "Grinding", offMin: 8, wornDb: 78.7, inTaskDb: 88.2 },
    order: "Ask why it came off at Grinding",
    noticed: "Enough while worn, but off for 8\u00a0min in Grinding",
    worker: "Keep your protector on the whole time in Grinding. It was off for too long.",
  },
  {
    kind: "wearing-unknown",
    facts: { taskName: "Grinding" },
    order: "Watch how long it is worn in Grinding",
    noticed: "Nobody has said how long it is worn in Grinding",
    worker: "Tell your supervisor how long you wear your protector.",
  },
  {
    kind: "peak-or-ceiling",
    facts: { levelDb: 141.6, dosePct: null, valueDb: 140, what: "peak" },
    order: "Find the impact, and damp it",
    noticed: "Peak 141.6 dB, limit 140",
    worker:
      "There was a bang of about 142 decibels; no more than 140 is allowed. Tell your supervisor where it comes from.",
  },
  {
    kind: "reading-gap",
    facts: { gapDb: -6.42, tasksDb: 94.1 },
    order: "Compare the reading with the tasks; one of them is wrong",
    noticed: "The reading is −6.4 dB from the tasks’ 94.1",
    worker: "You need not do anything. Your safety officer is looking into a measurement.",
  },
  {
    kind: "time-not-accounted",
    facts: { unaccountedMin: 95 },
    order: "Ask what was done in the missing time",
    noticed: "1\u00a0h\u00a035\u00a0min of the shift are not accounted for",
    worker: "Tell your supervisor what you did in the time that is missing from your shift.",
  },
  {
    kind: "reading-missing",
    facts: { criterionId: "limit" },
    order: "Add a reading under the rule’s own settings",
    noticed: "No reading or level serves this criterion exactly",
    worker: "You need not do anything. Your safety officer is looking into a measurement.",
  },
  {
    kind: "instrument",
    facts: {},
    order: "Book the calibration",
    noticed: "Its laboratory calibration runs out",
    worker: "You need not do anything. Your safety officer is looking into a measurement.",
  },
  {
    kind: "problem-reported",
    facts: { text: "The left cup is cracked" },
    order: "Talk to the worker about it",
    noticed: "“The left cup is cracked”",
    worker: "Your safety officer has your report and will talk to you.",
  },
  {
    kind: "fit-failed",
    facts: { protector: "Alder foam", parDb: 12.44, needDb: 18 },
    order: "Fit Alder foam anew, or try another",
    noticed: "Alder foam takes 12.4 dB off on this worker, 18.0 are needed",
    worker: "Alder foam does not fit you well enough. Ask your supervisor to fit it anew.",
  },
  {
    kind: "fit-due",
    facts: { protector: "Alder foam", testedOn: "2025-03-02" },
    order: "Test the fit",
    noticed: "The fit of Alder foam was last tested on 2 March 2025",
    worker: "Your protector’s fit is to be tested. Your supervisor will tell you when.",
  },
];

test.each(cases)(
  "$kind: order, what was noticed, and the worker's sentence",
  ({ kind, facts, order, noticed, worker }) => {
    expect(orderSentence(i18n, "en", kind, facts)).toBe(order);
    expect(noticedSentence(i18n, "en", kind, facts)).toBe(noticed);
    expect(workerSentence(i18n, "en", kind, facts)).toBe(worker);
  },
);

test("every kind of finding stands in the table above", () => {
  expect(cases.map(({ kind }) => kind)).toEqual([...FINDING_KINDS]);
});

describe("facts that an older finding lacks", () => {
  test.each([...FINDING_KINDS])("%s still makes whole sentences", (kind) => {
    for (const sentence of [orderSentence, noticedSentence, workerSentence]) {
      const said = sentence(i18n, "en", kind, {});
      expect(said).not.toMatch(/undefined|null|NaN|\{/);
      expect(said.length).toBeGreaterThan(8);
    }
  });
});

test("a remedy is told with the level and the word it would bring", () => {
  expect(remedyFigure("en", { remedy }, (word) => `[${word}]`)).toBe("79.7, [good]");
  expect(remedyFigure("de", { remedy: { ...remedy, word: null } }, String)).toBe("79,7");
  expect(remedyFigure("en", { remedy: null }, String)).toBeNull();
});

test("a task is named in the order to double up", () => {
  expect(orderSentence(i18n, "en", "dual-protection", { taskName: "Test cell" })).toBe(
    "Double up in Test cell: a plug under a muff",
  );
  expect(orderSentence(i18n, "en", "dual-protection", { remedy })).toBe(
    "Give Fenmuff and Sedge band",
  );
});

test("a ceiling is told apart from a peak", () => {
  const facts = { levelDb: 117.2, valueDb: 115, what: "ceiling" };
  expect(noticedSentence(i18n, "en", "peak-or-ceiling", facts)).toBe(
    "Maximum 117.2 dB, ceiling 115",
  );
  expect(orderSentence(i18n, "en", "peak-or-ceiling", facts)).toBe(
    "Find what was so loud, and bring it down",
  );
  expect(workerSentence(i18n, "en", "peak-or-ceiling", facts)).toBe(
    "For a moment there were about 117 decibels; no more than 115 is allowed. Tell your supervisor where they come from.",
  );
});

test("a peak that rounds to its limit is not said to be as much as is allowed", () => {
  const facts = { levelDb: 140.3, valueDb: 140, what: "peak" };
  expect(workerSentence(i18n, "en", "peak-or-ceiling", facts)).toBe(
    "There was a bang of a little more than 140 decibels; no more than 140 is allowed. Tell your supervisor where it comes from.",
  );
});

const main = { modelIds: ["a"], names: ["Fenmuff"], isHeld: false };
const inTeardown = {
  modelIds: ["b", "c"],
  names: ["Alder foam", "Fenmuff low"],
  isHeld: false,
  taskIds: ["t"],
  taskNames: ["Teardown"],
};

test.each([
  [{ ...main, inTasks: [inTeardown] }, "Give Fenmuff; in Teardown Alder foam and Fenmuff low"],
  [
    { ...main, isHeld: true, inTasks: [{ ...inTeardown, taskNames: ["Teardown", "Run-up"] }] },
    "Give Alder foam and Fenmuff low for Teardown and Run-up",
  ],
  [
    { ...main, inTasks: [{ ...inTeardown, isHeld: true }] },
    "Give Fenmuff; in Teardown Alder foam and Fenmuff low",
  ],
])("a remedy by task is one order, the same on every finding of the day", (by, order) => {
  const worn: FindingKind[] = [
    "over-limit-at-ear",
    "protects-too-little",
    "protects-too-much",
    "no-protector",
  ];
  for (const kind of worn)
    expect(orderSentence(i18n, "en", kind, { remedy: by, taskName: "Rigging" })).toBe(order);
});

test("where nothing is to be given, what is left is said", () => {
  const order = (kind: string) =>
    orderSentence(i18n, "en", "no-protector", { remedy: null, left: { kind, taskName: "Run-up" } });
  expect(order("lower-noise")).toBe(
    "Lower the noise in Run-up first: no protector of the register is enough",
  );
  expect(order("shorten-time")).toBe(
    "Shorten the time in Run-up or lower its noise first: no protector of the register is enough for the day",
  );
  expect(order("other-protector")).toBe(
    "Find another protector for Run-up: none of the register takes the right amount",
  );
  expect(order("wear-throughout")).toBe("Ask why it came off at Run-up");
});

test("a rule with several averages says which one a level is", () => {
  const facts = { levelDb: 92.34, dosePct: 138, valueDb: 90, ruleSetVersion: 1 };
  const noticed = (ruleSetKey: string, criterionId: string) =>
    noticedSentence(i18n, "en", "over-limit-outside", { ...facts, ruleSetKey, criterionId });
  expect(noticed("us-general-industry", "limit")).toBe(
    "92.3 (TWA, threshold 90) without protection, limit 90",
  );
  expect(noticed("us-general-industry", "action-value")).toBe(
    "92.3 (TWA, threshold 80) without protection, limit 90",
  );
  expect(noticed("uk-2005", "limit")).toBe("92.3 without protection, limit 90");
});

test("a source is named once", () => {
  const niosh = ruleSetVersion("niosh-rel", 1)!;
  const dual = niosh.criteria.find(({ id }) => id === "dual-protection")!;
  expect(citationOf(niosh, dual)).toBe("NIOSH 98-126, 1.6");
  const uk = ruleSetVersion("uk-2005", 1)!;
  expect(citationOf(uk, uk.criteria[0]!)).toBe(
    "Control of Noise at Work Regulations 2005, regs. 4(1), 7(1), 10",
  );
});
