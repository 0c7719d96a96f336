import type { I18n } from "@lingui/core";
import { type ProposedRemedy, remedyWords } from "../../shared/findings/facts";
import { findingWord } from "../../shared/findings/words";
import { formatDay } from "../../shared/format/date";
import { formatLevelWithUnit, formatWholeLevel } from "../../shared/format/level";
import type { Locale } from "../../shared/i18n";
import type { FindingKind } from "../../shared/schemas/finding";

export interface NoticeFacts {
  audience: "officer" | "supervisor" | "worker";
  recipientName: string;
  organizationName: string;
  siteName: string;
  /** Said where this replaces what was sent before. */
  replaces: boolean;
  items: readonly {
    workerName: string;
    employeeNumber: string;
    date: string;
    kinds: readonly FindingKind[];
    atEarDb: number | null;
    outsideDb: number | null;
    /** What to give out, where the finding proposes something. */
    remedy: ProposedRemedy | null;
    isStillOver: boolean;
  }[];
  link: string;
}

export interface Mail {
  subject: string;
  text: string;
  html: string;
}

const escapeHtml = (text: string) => text.replace(/[&<>"']/g, (mark) => `&#${mark.charCodeAt(0)};`);

/** Subject, text and HTML from one set of facts. The subject holds no level and no medical word: it shows on lock screens. */
export function overLimitMail(i18n: I18n, locale: Locale, facts: NoticeFacts): Mail {
  const lines =
    facts.audience === "worker" ? workerLines(i18n, locale, facts) : crewLines(i18n, locale, facts);
  const greeting = i18n.t("Hello {name},", { name: facts.recipientName });
  const replaces = facts.replaces
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
    subject: facts.replaces ? i18n.t("Correction: {subject}", { subject }) : subject,
    text: [...paragraphs, open, `${from}\n${foot}`].join("\n\n"),
    html: `<!doctype html><html lang="${locale}"><head><meta charset="utf-8"><title>${escapeHtml(subject)}</title></head>
<body style="margin:0;background:#F5F0E4;color:#211D17;font:17px/1.45 'Atkinson Hyperlegible Next',Verdana,sans-serif">
<div style="max-width:560px;margin:0 auto;padding:20px;border-top:3px solid #211D17">
${paragraphs.map((paragraph) => `<p>${escapeHtml(paragraph).replaceAll("\n", "<br>")}</p>`).join("\n")}
<p><a href="${escapeHtml(facts.link)}" style="color:#135A50">${escapeHtml(i18n.t("Open in Dinward"))}</a></p>
<p style="border-top:1px solid #211D17;padding-top:8px;font-size:14px;color:#5B5346">${escapeHtml(from)}<br>${escapeHtml(foot)}</p>
</div></body></html>`,
  };
}

function subjectOf(i18n: I18n, locale: Locale, { audience, items }: NoticeFacts): string {
  if (audience === "worker")
    return i18n.t("About your shift on {day}", { day: formatDay(items[0]?.date ?? "", locale) });
  const workers = new Set(items.map(({ employeeNumber }) => employeeNumber)).size;
  return i18n.t("{workers, plural, one {One person} other {# people}} to look after", { workers });
}

function workerLines(i18n: I18n, locale: Locale, { items }: NoticeFacts): string[] {
  return items.flatMap(({ date, kinds, atEarDb, remedy, isStillOver }) => {
    const day = formatDay(date, locale);
    const level = formatWholeLevel(atEarDb, locale);
    const said = !isStillOver
      ? i18n.t("On {day} you were not over the limit after all.", { day })
      : kinds.includes("no-protector")
        ? i18n.t("On {day} you worked in loud noise and no hearing protector is assigned to you.", {
            day,
          })
        : atEarDb !== null
          ? i18n.t(
              "On {day} about {level} decibels reached your ear. That is more than is allowed.",
              { day, level },
            )
          : i18n.t("On {day} the noise around you was more than is allowed.", { day });
    const todo = !isStillOver
      ? i18n.t("You need not do anything.")
      : remedy
        ? i18n.t("Please ask your supervisor for {protector} before you work in noise again.", {
            protector: remedyWords(i18n, remedy),
          })
        : i18n.t("Please talk to your supervisor before you work in noise again.");
    return [said, todo];
  });
}

function crewLines(i18n: I18n, locale: Locale, { items }: NoticeFacts): string[] {
  return items.map(
    ({ workerName, employeeNumber, date, kinds, atEarDb, outsideDb, remedy, isStillOver }) => {
      const head = i18n.t("{name}, {number}, on {day}:", {
        name: workerName,
        number: employeeNumber,
        day: formatDay(date, locale),
      });
      const what = isStillOver
        ? kinds.map((kind) => findingWord(i18n, kind)).join(", ")
        : i18n.t("no longer over after the correction");
      const figures = i18n.t("at the ear {atEar}, without protection {outside}", {
        atEar: formatLevelWithUnit(atEarDb, locale),
        outside: formatLevelWithUnit(outsideDb, locale),
      });
      const todo =
        isStillOver && remedy
          ? i18n.t("Give {protector}.", { protector: remedyWords(i18n, remedy) })
          : "";
      return [`${head} ${what}`, figures, todo].filter(Boolean).join("\n");
    },
  );
}
