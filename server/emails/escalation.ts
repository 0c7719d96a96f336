import type { I18n } from "@lingui/core";
import { findingWord } from "../../shared/findings/words";
import { formatDay } from "../../shared/format/date";
import type { Locale } from "../../shared/i18n";
import type { FindingKind } from "../../shared/schemas/finding";
import { type Mail, mailHtml } from "./frame";

export interface EscalationFacts {
  recipientName: string;
  organizationName: string;
  siteName: string;
  findings: readonly {
    kind: FindingKind;
    /** Worker, group or instrument. */
    subject: string | null;
    dueOn: string | null;
    ownerName: string | null;
  }[];
  link: string;
}

/** What is past its date, to the person whom the site names for it. The subject names nobody. */
export function escalationMail(i18n: I18n, locale: Locale, facts: EscalationFacts): Mail {
  const { findings, recipientName, organizationName, siteName, link } = facts;
  const subject = i18n.t(
    "{count, plural, one {One finding is overdue} other {# findings are overdue}}",
    { count: findings.length },
  );
  const paragraphs = [
    i18n.t("Hello {name},", { name: recipientName }),
    i18n.t(
      "these findings are past the date by which somebody was to act. Your site names you for such a case:",
    ),
    ...findings.map(({ kind, subject: who, dueOn, ownerName }) =>
      [
        who === null
          ? findingWord(i18n, kind)
          : i18n.t("{what}: {who}", { what: findingWord(i18n, kind), who }),
        dueOn && i18n.t("due {day}", { day: formatDay(dueOn, locale) }),
        ownerName === null
          ? i18n.t("in nobody’s hands")
          : i18n.t("in hand with {name}", { name: ownerName }),
      ]
        .filter(Boolean)
        .join(", "),
    ),
  ];
  const from = `${organizationName}, ${siteName}`;
  return {
    subject,
    text: [...paragraphs, i18n.t("Open in Dinward: {link}", { link }), from].join("\n\n"),
    html: mailHtml(
      locale,
      subject,
      paragraphs,
      { address: link, words: i18n.t("Open in Dinward") },
      [from],
    ),
  };
}
