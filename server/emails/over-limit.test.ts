import { setupI18n } from "@lingui/core";
import { compileMessage } from "@lingui/message-utils/compileMessage";
import { describe, expect, test } from "vitest";
import { type NoticedFinding, type NoticeFacts, overLimitMail } from "./over-limit";

const i18n = setupI18n({ locale: "en", messages: { en: {} } }).setMessagesCompiler(compileMessage);

const peak: NoticedFinding = {
  kind: "peak-or-ceiling",
  facts: { levelDb: 141.6, valueDb: 140, what: "peak" },
  isStillOver: true,
  closedOn: null,
};
const ceiling: NoticedFinding = {
  kind: "peak-or-ceiling",
  facts: { levelDb: 117.2, valueDb: 115, what: "ceiling" },
  isStillOver: true,
  closedOn: null,
};
const atEar: NoticedFinding = {
  kind: "over-limit-at-ear",
  facts: {
    levelDb: 89.4,
    valueDb: 87,
    remedy: { modelIds: ["a"], names: ["Fenmuff"], isHeld: false },
  },
  isStillOver: true,
  closedOn: null,
};

function mailOf(
  audience: NoticeFacts["audience"],
  findings: NoticedFinding[],
  atEarDb = 67.9,
  replacesMailOf: string | null = null,
) {
  return overLimitMail(i18n, "en", {
    audience,
    recipientName: "D. Tavernor",
    organizationName: "Engine works",
    siteName: "North yard",
    replacesMailOf,
    items: [
      {
        workerName: "D. Tavernor",
        employeeNumber: "2841",
        date: "2026-03-02",
        atEarDb,
        outsideDb: 91.3,
        findings,
      },
    ],
    link: "https://noise.example.org/",
  });
}
const textOf = (...facts: Parameters<typeof mailOf>) => mailOf(...facts).text;

test("a peak is told to the worker as a peak, not as the day's level at the ear", () => {
  const text = textOf("worker", [peak]);
  expect(text).toContain(
    "There was a bang of about 142 decibels; no more than 140 is allowed. Tell your supervisor where it comes from.",
  );
  expect(text).not.toMatch(/reached your ear|68/);
});

test("a ceiling is told to the worker as a moment", () => {
  const text = textOf("worker", [ceiling]);
  expect(text).toContain(
    "For a moment there were about 117 decibels; no more than 115 is allowed.",
  );
  expect(text).not.toMatch(/reached your ear|68/);
});

test("noise and a peak of one day are both told, each with its own figure", () => {
  const text = textOf("worker", [peak, atEar], 89.4);
  expect(text).toContain("about 89 decibels reached your ear");
  expect(text).toContain("ask your supervisor for Fenmuff");
  expect(text).toContain("a bang of about 142 decibels");
});

test("over the limit without protection says nothing of the level at the ear", () => {
  const outside: NoticedFinding = {
    kind: "over-limit-outside",
    facts: { levelDb: 91.3, valueDb: 90 },
    isStillOver: true,
    closedOn: null,
  };
  const text = textOf("worker", [outside]);
  expect(text).toContain("the noise around you was more than is allowed");
  expect(text).toContain("Keep your protector on all the time in noise.");
  expect(text).not.toContain("68");
});

test.each(["officer", "supervisor"] as const)(
  "the %s reads the value, the limit and what is to be done",
  (audience) => {
    const text = textOf(audience, [peak]);
    expect(text).toContain("Peak 141.6 dB, limit 140");
    expect(text).toContain("Find the impact, and damp it.");
    expect(text).not.toContain("67.9");
    const other = textOf(audience, [ceiling, atEar]);
    expect(other).toContain("Maximum 117.2 dB, ceiling 115");
    expect(other).toContain("Find what was so loud, and bring it down.");
    expect(other).toContain("Give Fenmuff.");
    expect(other).toContain("at the ear 67.9\u00a0dB");
  },
);

test("a peak that a correction took away is no longer told of", () => {
  const gone = { ...peak, isStillOver: false };
  expect(textOf("worker", [gone])).toContain("not over the limit after all");
  expect(textOf("officer", [gone])).toContain("no longer over after the correction");
});

describe("a correction", () => {
  const corrected = (audience: NoticeFacts["audience"], ...findings: NoticedFinding[]) =>
    mailOf(audience, findings, 89.4, "2026-12-01");

  test.each(["officer", "supervisor", "worker"] as const)(
    "to the %s names the mail that it corrects, and asks for nothing in its subject",
    (audience) => {
      const { subject } = corrected(audience, { ...atEar, isStillOver: false });
      expect(subject).toMatch(/^Correction to our mail of .*1 December/);
      expect(subject).not.toContain("look after");
    },
  );

  const closed = { ...atEar, closedOn: "2026-03-04" };

  test("gives no order for what is closed, but says when it was dealt with", () => {
    const { text } = corrected("supervisor", closed);
    expect(text).not.toContain("Give Fenmuff");
    expect(text).toMatch(/already dealt with on .*4 March/);
    const both = corrected("officer", closed, peak).text;
    expect(both).toContain("Find the impact, and damp it.");
    expect(both).not.toContain("Give Fenmuff");
  });

  test("asks nothing of the worker for what is closed", () => {
    const { text } = corrected("worker", closed);
    expect(text).not.toMatch(/ask your supervisor|talk to your supervisor/);
    expect(text).toMatch(/dealt with on .*4 March.* You need not do anything more/);
    expect(corrected("worker", closed, peak).text).toContain("Tell your supervisor");
  });
});
