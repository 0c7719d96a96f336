import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { formatInstant } from "../../../shared/format/date";
import type { SentPage } from "../../../shared/schemas/mail-choice";
import { Empty } from "../../components/empty";
import { Failed } from "../../components/failed";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { mailQueries } from "./queries";

function stateWords(i18n: I18n, state: SentPage["rows"][number]["state"]): string {
  switch (state) {
    case null:
    case "on-paper":
      return i18n.t("on paper");
    case "sent":
      return i18n.t("by mail");
    case "bounced":
      return i18n.t("by mail, which came back");
    case "failed":
      return i18n.t("by mail, which was refused");
    default:
      return i18n.t("by mail, not certain that it arrived");
  }
}

/** Every letter and mail, to be read again as it was sent. */
export function SentToMe({ timeZone }: { timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { data, error, refetch, hasNextPage, fetchNextPage, isFetchingNextPage } = useInfiniteQuery(
    mailQueries.sent,
  );
  if (error) return <Failed error={error} onRetry={() => void refetch()} />;
  if (!data) return <span className="loading-line" />;
  const rows = data.pages.flatMap((page) => page.rows);
  if (rows.length === 0) return <Empty title={i18n.t("Nothing was sent to you yet.")} />;
  return (
    <>
      {rows.map(({ id, at, state, subject, text }) => (
        <details key={id} className="sent-mail">
          <summary>
            <bdi>{subject}</bdi>
            <span className="beneath">
              {formatInstant(at, timeZone, locale)}, {stateWords(i18n, state)}
            </span>
          </summary>
          <div className="letter-text">{text}</div>
        </details>
      ))}
      {hasNextPage && (
        <TextButton
          aria-disabled={isFetchingNextPage || undefined}
          onClick={() => isFetchingNextPage || void fetchNextPage()}
        >
          {i18n.t("and more")}
        </TextButton>
      )}
    </>
  );
}
