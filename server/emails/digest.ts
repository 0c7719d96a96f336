import type { I18n } from "@lingui/core";
import { orderSentence } from "../../shared/findings/sentences";
import { formatDay } from "../../shared/format/date";
import type { Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import type { FindingKind } from "../../shared/schemas/finding";
import { type Mail, mailHtml } from "./frame";

export interface DigestFacts {
  recipientName: string;
  organizationName: string;
  siteName: string;
  date: string;
  crews: readonly {
    name: string;
    /** HH:MM */
    usualStart: string;
    /** Of whom the sheet speaks: a shift that is over is expected no more. */
    expectedDate: string;
    expected: number;
    absentNames: readonly string[];
    lent: readonly { name: string; crewName: string }[];
    orders: readonly { name: string; kind: FindingKind; facts: Record<string, unknown> }[];
    handOverBy: string | null;
  }[];
  link: string;
  /** Where the mail is stopped. */
  accountLink: string;
}

/** What stands on one's crews' sheets today. The subject names nobody. */
export function digestMail(i18n: I18n, locale: Locale, facts: DigestFacts): Mail {
  const { crews, date, recipientName, organizationName, siteName, link, accountLink } = facts;
  const day = formatDay(date, locale);
  const subject = i18n.t(
    "{count, plural, =0 {{day}: no order is open} one {{day}: one order is open} other {{day}: # orders are open}}",
    { count: crews.reduce((sum, { orders }) => sum + orders.length, 0), day },
  );
  const paragraphs = [
    i18n.t("Hello {name},", { name: recipientName }),
    ...crews.map((crew) =>
      [
        i18n.t("{crew}, {start}. Expected: {count}.", {
          crew: crew.name,
          start:
            crew.expectedDate === date
              ? crew.usualStart
              : `${formatDay(crew.expectedDate, locale)}, ${crew.usualStart}`,
          count: crew.expected,
        }),
        ...crew.orders.map(({ name, kind, facts: of }) =>
          i18n.t("{name}: {what}", { name, what: orderSentence(i18n, locale, kind, of) }),
        ),
        crew.orders.length === 0 && i18n.t("No order is open."),
        crew.absentNames.length > 0 &&
          i18n.t("Not in: {names}.", { names: crew.absentNames.map(isolate).join(", ") }),
        ...crew.lent.map(({ name, crewName }) =>
          i18n.t("{name}: {what}", { name, what: i18n.t("lent to {crew}", { crew: crewName }) }),
        ),
        crew.handOverBy !== null && i18n.t("Handed to you by {name}", { name: crew.handOverBy }),
      ]
        .filter(Boolean)
        .join("\n"),
    ),
  ];
  const why = i18n.t("This mail comes because you chose it. You stop it on your account page:");
  const from = `${organizationName}, ${siteName}`;
  return {
    subject,
    text: [
      ...paragraphs,
      i18n.t("Open in Dinward: {link}", { link }),
      `${why} ${accountLink}`,
      from,
    ].join("\n\n"),
    html: mailHtml(
      locale,
      subject,
      paragraphs,
      { address: link, words: i18n.t("Open in Dinward") },
      [why, { address: accountLink, words: i18n.t("My account") }, from],
    ),
  };
}
