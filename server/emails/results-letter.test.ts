import { setupI18n } from "@lingui/core";
import { compileMessage } from "@lingui/message-utils/compileMessage";
import { describe, expect, test } from "vitest";
import { UK_2005 } from "../../shared/rule-sets/uk-2005";
import { US_MINING } from "../../shared/rule-sets/us-mining";
import { type LetterFacts, resultsLetter, resultsMail, type ToldDay } from "./results-letter";

const i18n = setupI18n({ locale: "en", messages: { en: {} } }).setMessagesCompiler(compileMessage);

const criterionOf = (id: string, { criteria } = UK_2005) =>
  criteria.find((criterion) => criterion.id === id) ?? null;

const day: ToldDay = {
  date: "2026-03-02",
  criterion: criterionOf("upper-action"),
  isOver: true,
  levelDb: 91.34,
  dosePct: null,
  bound: "exact",
  atEarDb: 77.6,
};

const letterOf = (facts: Partial<LetterFacts> = {}) =>
  resultsLetter(i18n, "en", {
    workerName: "R. Szabó",
    employeeNumber: "2841",
    ruleSet: UK_2005,
    replacesLetterOf: null,
    days: [day],
    ...facts,
  });

describe("the letter of results", () => {
  test("says what was measured, from what the rules act, what they ask of the employer, and by which rules", () => {
    const { subject, text } = letterOf();
    expect(subject).toBe("Results of measurements at your work");
    expect(text).toContain("R. Szabó, 2841");
    expect(text).toContain(
      "Monday 2 March: 91.3\u00a0dB over eight hours without protection. With your protector about 78\u00a0dB reached your ear.",
    );
    expect(text).toContain("from 85 decibels");
    expect(text).toContain("– Have protectors worn.");
    expect(text).toContain("UK noise regulations, Control of Noise at Work Regulations 2005");
  });

  test("a dose beside its level; a bound with its mark", () => {
    const { text } = letterOf({
      ruleSet: US_MINING,
      days: [
        {
          ...day,
          criterion: criterionOf("action-value", US_MINING),
          levelDb: 90,
          dosePct: 100,
          bound: "lower",
          atEarDb: null,
        },
      ],
    });
    expect(text).toContain(
      "≥90.0\u00a0dB over eight hours without protection, 100 % of the allowed dose.",
    );
    expect(text).not.toContain("reached your ear");
  });

  test("a correction says what it replaces, and that nothing is to be done where nothing is", () => {
    const { text } = letterOf({
      replacesLetterOf: "2026-03-04",
      days: [{ ...day, isOver: false, levelDb: 79 }],
    });
    expect(text).toContain("This replaces our letter of 4 March 2026: the record was corrected.");
    expect(text).toContain("That is less than the rules act from.");
    expect(text).toContain("You need not do anything.");
    expect(text).not.toContain("What your employer has to do");
  });

  test("a day that counts no more", () => {
    const { text } = letterOf({
      days: [{ ...day, criterion: null, isOver: false, levelDb: null }],
    });
    expect(text).toContain("Monday 2 March: the measurement does not count any more.");
  });

  test("as a mail: the link in text and HTML, nothing of the letter left out, marks of HTML as text", () => {
    const letter = letterOf({ workerName: "<b>R</b>" });
    const mail = resultsMail(i18n, "en", letter, {
      link: "https://noise.example.org/acknowledge/…",
      from: "Engine works, North yard",
    });
    for (const paragraph of letter.text.split("\n\n")) expect(mail.text).toContain(paragraph);
    expect(mail.html).toContain('href="https://noise.example.org/acknowledge/…"');
    expect(mail.html).toContain("&#60;b&#62;");
    expect(mail.html).not.toContain("<b>");
  });
});
