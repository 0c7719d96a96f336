import type { I18n } from "@lingui/core";
import type { Criterion, RuleSetVersion } from "../../shared/acoustics/types";
import { formatDate, formatDay } from "../../shared/format/date";
import { formatLevel, formatLimit, formatWholeLevel } from "../../shared/format/level";
import { formatNumber } from "../../shared/format/number";
import type { Locale } from "../../shared/i18n";
import { levelOf } from "../../shared/rule-sets";
import { type Mail, mailHtml } from "./frame";

/** One day that was measured on the worker. */
export interface ToldDay {
  date: string;
  /** Null: the rules of that day are not known any more, or the result has no such criterion. */
  criterion: Criterion | null;
  isOver: boolean;
  /** The level that is compared, dB. */
  levelDb: number | null;
  dosePct: number | null;
  bound: "exact" | "upper" | "lower";
  atEarDb: number | null;
}

export interface LetterFacts {
  workerName: string;
  employeeNumber: string;
  ruleSet: RuleSetVersion;
  /** The date of the letter that this one replaces. */
  replacesLetterOf: string | null;
  days: readonly ToldDay[];
}

export interface Letter {
  subject: string;
  text: string;
}

/**
 * The letter with the results of measurements to the worker they were made on: what was measured, against what, and what
 * the employer now has to do. The subject holds no level and no medical word: it shows on lock screens.
 */
export function resultsLetter(i18n: I18n, locale: Locale, facts: LetterFacts): Letter {
  const { days, ruleSet, replacesLetterOf } = facts;
  const over = days.filter(({ isOver }) => isOver);
  const reached = new Map(
    over.flatMap(({ criterion }) => (criterion ? [[criterion.id, criterion] as const] : [])),
  );
  const duties = [...new Set([...reached.values()].flatMap((criterion) => criterion.duties))];
  const paragraphs = [
    i18n.t("{name}, {number}", { name: facts.workerName, number: facts.employeeNumber }),
    replacesLetterOf &&
      i18n.t("This replaces our letter of {date}: the record was corrected.", {
        date: formatDate(replacesLetterOf, locale),
      }),
    i18n.t("The noise at your work was measured on you. This is the result:"),
    days.map((day) => dayLine(i18n, locale, day)).join("\n"),
    reached.size > 0 &&
      i18n.t(
        "The rules ask your employer to act from {values} decibels. You were in that much or more.",
        {
          values: [...reached.values()]
            .map((criterion) => formatLimit(levelOf(criterion), locale))
            .join(", "),
        },
      ),
    duties.length > 0 &&
      [i18n.t("What your employer has to do:"), ...duties.map((duty) => `– ${i18n._(duty)}.`)].join(
        "\n",
      ),
    over.length > 0
      ? i18n.t(
          "Wear your hearing protector wherever it is loud, the whole time. Ask your supervisor or the safety officer if it does not fit, or if anything here is unclear.",
        )
      : i18n.t("You need not do anything."),
    i18n.t("Rules: {title}, {citation}.", {
      title: i18n._(ruleSet.title),
      citation: ruleSet.citation,
    }),
  ];
  return {
    subject: i18n.t("Results of measurements at your work"),
    text: paragraphs.filter(Boolean).join("\n\n"),
  };
}

function dayLine(i18n: I18n, locale: Locale, day: ToldDay): string {
  const date = formatDay(day.date, locale);
  const level =
    day.levelDb === null ? null : `${formatLevel(day.levelDb, locale, day.bound)}\u00a0dB`;
  const said = !level
    ? i18n.t("{date}: the measurement does not count any more.", { date })
    : day.criterion?.quantity !== "lex-8h" && day.dosePct !== null
      ? i18n.t(
          "{date}: {level} over eight hours without protection, {dose} % of the allowed dose.",
          {
            date,
            level,
            dose: formatNumber(day.dosePct, 0, locale),
          },
        )
      : i18n.t("{date}: {level} over eight hours without protection.", { date, level });
  const below = day.isOver ? null : i18n.t("That is less than the rules act from.");
  const atEar =
    day.atEarDb !== null && day.levelDb !== null && day.atEarDb < day.levelDb
      ? i18n.t("With your protector about {level} reached your ear.", {
          level: `${formatWholeLevel(day.atEarDb, locale)}\u00a0dB`,
        })
      : null;
  return [said, below, atEar].filter(Boolean).join(" ");
}

/** The letter as a mail, with the link by which the worker says that it was read. */
export function resultsMail(
  i18n: I18n,
  locale: Locale,
  { subject, text }: Letter,
  { link, from }: { link: string; from: string },
): Mail {
  const confirm = i18n.t(
    "Please say that you have read this letter. The link is for you alone and works once.",
  );
  const foot = i18n.t(
    "An aid to screening. Local regulation, a qualified hygienist and a licensed audiologist decide.",
  );
  const paragraphs = [...text.split("\n\n"), confirm];
  return {
    subject,
    text: [...paragraphs, link, `${from}\n${foot}`].join("\n\n"),
    html: mailHtml(
      locale,
      subject,
      paragraphs,
      { address: link, words: i18n.t("I have read it") },
      [from, foot],
    ),
  };
}
