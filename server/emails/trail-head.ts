import type { I18n } from "@lingui/core";
import { formatInstant } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import type { Locale } from "../../shared/i18n";
import type { TrailHead } from "../../shared/schemas/trail-check";
import { type Mail, mailHtml } from "./frame";

interface KeeperFacts {
  name: string;
  organizationName: string;
  timeZone: string;
  link: string;
}

/** What somebody outside keeps, so that whoever rewrites the whole trail can be told from it. */
export function trailHeadMail(
  i18n: I18n,
  locale: Locale,
  { head, ...facts }: KeeperFacts & { head: TrailHead },
): Mail {
  const number = String(head.number);
  const subject = i18n.t("{organization}: head of the trail, seal {number}", {
    organization: facts.organizationName,
    number,
  });
  return asMail(locale, subject, i18n, facts, [
    i18n.t("Hello {name},", { name: facts.name }),
    i18n.t(
      "This is the head of the trail in which {organization} records every change of its noise-exposure records. Please keep this mail: nobody there can change what lies with you.",
      { organization: facts.organizationName },
    ),
    [
      i18n.t("Seal: {number}", { number }),
      i18n.t("Hash (SHA-256): {hash}", { hash: head.hash }),
      i18n.t("Sealed: {at} ({zone})", {
        at: formatInstant(head.sealedAt, facts.timeZone, locale),
        zone: facts.timeZone,
      }),
      i18n.t("Events and changes of rows that it covers: {count}", {
        count: formatNumber(head.number, 0, locale),
      }),
    ].join("\n"),
    i18n.t(
      "To compare, whoever runs the system calls {command}. Where the hash that it prints is another than this one, the trail was rewritten.",
      { command: `npm run verify:trail -- --seal=${number}` },
    ),
  ]);
}

/** To whoever kept the head until now. It names no successor: that may be the one who should not be named. */
export function keeperGoneMail(i18n: I18n, locale: Locale, facts: KeeperFacts): Mail {
  const subject = i18n.t("{organization}: the head of the trail goes elsewhere", {
    organization: facts.organizationName,
  });
  return asMail(locale, subject, i18n, facts, [
    i18n.t("Hello {name},", { name: facts.name }),
    i18n.t(
      "From now on the head of the trail of {organization} is not sent to you any more. An administrator there changed that, and the trail says who and when. If you do not expect this, ask. Please keep the mails that you have.",
      { organization: facts.organizationName },
    ),
  ]);
}

function asMail(
  locale: Locale,
  subject: string,
  i18n: I18n,
  { organizationName, link }: KeeperFacts,
  paragraphs: readonly string[],
): Mail {
  return {
    subject,
    text: [...paragraphs, i18n.t("Open in Dinward: {link}", { link }), organizationName].join(
      "\n\n",
    ),
    html: mailHtml(
      locale,
      subject,
      paragraphs,
      { address: link, words: i18n.t("Open in Dinward") },
      [organizationName],
    ),
  };
}
