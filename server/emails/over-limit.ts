import type { I18n } from "@lingui/core";
import { type FindingFacts, remedyOf, remedyWords } from "../../shared/findings/facts";
import { ORDER_KINDS } from "../../shared/findings/orders";
import { noticedSentence, orderSentence } from "../../shared/findings/sentences";
import { findingWord } from "../../shared/findings/words";
import { workerSentence } from "../../shared/findings/worker-sentence";
import { formatDay } from "../../shared/format/date";
import { formatLevelWithUnit, formatWholeLevel } from "../../shared/format/level";
import type { Locale } from "../../shared/i18n";
import type { FindingKind } from "../../shared/schemas/finding";
import { type Mail, mailHtml } from "./frame";

/** One of the findings that a notice tells of, with the figures of the item's own day. */
export interface NoticedFinding {
  kind: FindingKind;
  facts: FindingFacts;
  isStillOver: boolean;
  /** The date on which it was dealt with; null: it is open. */
  closedOn: string | null;
}

export interface NoticeItem {
  workerName: string;
  employeeNumber: string;
  date: string;
  atEarDb: number | null;
  outsideDb: number | null;
  findings: readonly NoticedFinding[];
}

export interface NoticeFacts {
  audience: "officer" | "supervisor" | "worker";
  recipientName: string;
  organizationName: string;
  siteName: string;
  /** The date of the mail that this one replaces; null where it replaces none. */
  replacesMailOf: string | null;
  items: readonly NoticeItem[];
  link: string;
}

export type { Mail } from "./frame";

/** Subject, text and HTML from one set of facts. The subject holds no level and no medical word: it shows on lock screens. */
export function overLimitMail(i18n: I18n, locale: Locale, facts: NoticeFacts): Mail {
  const lines =
    facts.audience === "worker" ? workerLines(i18n, locale, facts) : crewLines(i18n, locale, facts);
  const greeting = i18n.t("Hello {name},", { name: facts.recipientName });
  const replaces = facts.replacesMailOf
    ? i18n.t("This replaces what we wrote before: the record was corrected.")
    : null;
  const open = i18n.t("Open in Dinward: {link}", { link: facts.link });
  const foot = i18n.t(
    "An aid to screening. Local regulation, a qualified hygienist and a licensed audiologist decide.",
  );
  const from = `${facts.organizationName}, ${facts.siteName}`;
  const paragraphs = [greeting, replaces, ...lines].filter((line) => line !== null);
  const subject = subjectOf(i18n, locale, facts);
  return {
    subject,
    text: [...paragraphs, open, `${from}\n${foot}`].join("\n\n"),
    html: mailHtml(
      locale,
      subject,
      paragraphs,
      { address: facts.link, words: i18n.t("Open in Dinward") },
      [from, foot],
    ),
  };
}

function subjectOf(
  i18n: I18n,
  locale: Locale,
  { audience, items, replacesMailOf }: NoticeFacts,
): string {
  // What was to be done may be undone by it: whom it is about, and what is left to do, is in the text.
  if (replacesMailOf)
    return i18n.t("Correction to our mail of {day}", { day: formatDay(replacesMailOf, locale) });
  if (audience === "worker")
    return i18n.t("About your shift on {day}", { day: formatDay(items[0]?.date ?? "", locale) });
  const workers = new Set(items.map(({ employeeNumber }) => employeeNumber)).size;
  return i18n.t("{workers, plural, one {One person} other {# people}} to look after", { workers });
}

const urgencyOf = ({ kind }: NoticedFinding): number => {
  const place = ORDER_KINDS.indexOf(kind);
  return place < 0 ? ORDER_KINDS.length : place;
};

/** What is still so, most urgent first. */
const stillOver = ({ findings }: NoticeItem): NoticedFinding[] =>
  findings.filter(({ isStillOver }) => isStillOver).toSorted((a, b) => urgencyOf(a) - urgencyOf(b));

const isOpen = ({ closedOn }: NoticedFinding) => closedOn === null;

const closedLast = (findings: readonly NoticedFinding[]): string =>
  findings.reduce((last, { closedOn }) => (closedOn && closedOn > last ? closedOn : last), "");

const isPeak = ({ kind }: NoticedFinding) => kind === "peak-or-ceiling";

function workerLines(i18n: I18n, locale: Locale, { items }: NoticeFacts): string[] {
  return items.flatMap((item) => {
    const day = formatDay(item.date, locale);
    const over = stillOver(item);
    if (over.length === 0)
      return [
        i18n.t("On {day} you were not over the limit after all.", { day }),
        i18n.t("You need not do anything."),
      ];
    const open = over.filter(isOpen);
    if (open.length === 0)
      return [
        i18n.t("On {day} you were over the limit.", { day }),
        i18n.t("That was dealt with on {day}. You need not do anything more.", {
          day: formatDay(closedLast(over), locale),
        }),
      ];
    const bangs = open
      .filter(isPeak)
      .map(({ kind, facts }) =>
        i18n.t("On {day}: {said}", { day, said: workerSentence(i18n, locale, kind, facts) }),
      );
    const noise = open.filter((finding) => !isPeak(finding));
    return [...(noise.length > 0 ? noiseLines(i18n, locale, item, noise) : []), ...bangs];
  });
}

/** Of one day's noise as a whole, to the worker: what was too much, and what to do. */
function noiseLines(
  i18n: I18n,
  locale: Locale,
  { date, atEarDb }: NoticeItem,
  noise: readonly NoticedFinding[],
): string[] {
  const day = formatDay(date, locale);
  const isOf = (kind: FindingKind) => noise.some((finding) => finding.kind === kind);
  const said = isOf("no-protector")
    ? i18n.t("On {day} you worked in loud noise and no hearing protector is assigned to you.", {
        day,
      })
    : isOf("over-limit-at-ear") && atEarDb !== null
      ? i18n.t("On {day} about {level} decibels reached your ear. That is more than is allowed.", {
          day,
          level: formatWholeLevel(atEarDb, locale),
        })
      : i18n.t("On {day} the noise around you was more than is allowed.", { day });
  const [remedy] = noise.flatMap(({ facts }) => remedyOf(facts) ?? []);
  if (remedy)
    return [
      said,
      i18n.t("Please ask your supervisor for {protector} before you work in noise again.", {
        protector: remedyWords(i18n, remedy),
      }),
    ];
  const isProtected = !isOf("no-protector") && !isOf("over-limit-at-ear");
  const [first] = noise;
  return [
    said,
    isProtected && first
      ? workerSentence(i18n, locale, first.kind, first.facts)
      : i18n.t("Please talk to your supervisor before you work in noise again."),
  ];
}

function crewLines(i18n: I18n, locale: Locale, { items }: NoticeFacts): string[] {
  return items.map((item) => {
    const head = i18n.t("{name}, {number}, on {day}:", {
      name: item.workerName,
      number: item.employeeNumber,
      day: formatDay(item.date, locale),
    });
    const over = stillOver(item);
    const what =
      over.length > 0
        ? over.map(({ kind, facts }) =>
            kind === "peak-or-ceiling"
              ? noticedSentence(i18n, locale, kind, facts)
              : findingWord(i18n, kind),
          )
        : [i18n.t("no longer over after the correction")];
    // A peak is of one moment: the day's levels say nothing of it.
    const figures =
      over.every(isPeak) && over.length > 0
        ? ""
        : i18n.t("at the ear {atEar}, without protection {outside}", {
            atEar: formatLevelWithUnit(item.atEarDb, locale),
            outside: formatLevelWithUnit(item.outsideDb, locale),
          });
    const orders = new Set(
      over.map(({ kind, facts, closedOn }) =>
        closedOn === null
          ? `${orderSentence(i18n, locale, kind, facts)}.`
          : i18n.t("{finding}: already dealt with on {day}.", {
              finding: findingWord(i18n, kind),
              day: formatDay(closedOn, locale),
            }),
      ),
    );
    return [`${head} ${[...new Set(what)].join("; ")}`, figures, ...orders]
      .filter(Boolean)
      .join("\n");
  });
}
