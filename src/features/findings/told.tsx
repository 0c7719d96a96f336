import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { NEWS_FOR_DAYS } from "../../../shared/findings/notified";
import { isOverdue } from "../../../shared/findings/overdue";
import { formatDate, formatInstant } from "../../../shared/format/date";
import type { FindingView } from "../../../shared/schemas/finding";
import { toldWord } from "../../../shared/words/told-word";
import { TextButton, TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { hasRole, useUser } from "../session/session";

function untoldWords(i18n: I18n, untold: NonNullable<FindingView["untold"]>): string {
  switch (untold) {
    case "not-by-mail":
      return i18n.t("Nobody by mail; it waits on this page.");
    case "corrected":
      return i18n.t("Nobody: the days that showed it were corrected before anybody was told.");
    case "long-ago":
      return i18n.t(
        "Nobody by mail: its last day lay more than {days} days back when it was noticed.",
        { days: NEWS_FOR_DAYS },
      );
    case "no-address":
      return i18n.t("Nobody: nobody who is to be told of it has an address for mail.");
  }
}

/** It is overdue, and its site names nobody to whom it would go up. */
function NobodyAbove({ siteId }: Pick<FindingView, "siteId">) {
  const { i18n } = useLingui();
  const user = useUser();
  return (
    <p>
      {i18n.t("It is overdue, and the site names nobody to whom overdue findings go up.")}{" "}
      {hasRole(user, "officer") && (
        <TextLink to={`${paths.site(siteId)}#escalation`}>
          {i18n.t("Say whom they go up to")}
        </TextLink>
      )}
    </p>
  );
}

export interface ToldNotice {
  readonly id: string;
  readonly recipientName: string;
}

/** Who was told of it by mail, and whom it went up to. */
export function Told({
  finding,
  today,
  onLook,
}: {
  finding: FindingView;
  /** At its site. */
  today: string;
  /** At a notice as it went. */
  onLook: (notice: ToldNotice) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const timeZone = user.sites.find(({ id }) => id === finding.siteId)?.timeZone ?? "UTC";
  const isStuck = isOverdue(finding, today) && !finding.wentUp && !finding.goesUp;
  return (
    <div className="told-list">
      {finding.untold && !(isStuck && finding.untold === "not-by-mail") && (
        <p>{untoldWords(i18n, finding.untold)}</p>
      )}
      {isStuck && <NobodyAbove siteId={finding.siteId} />}
      {finding.told.map((told) => (
        <p key={told.noticeId}>
          <b className="label-ink">{told.name}</b> {toldWord(i18n, told.state)}
          {told.at && ` ${formatInstant(told.at, timeZone, locale)}`}.{" "}
          <TextButton onClick={() => onLook({ id: told.noticeId, recipientName: told.name })}>
            {i18n.t("Look")}
          </TextButton>
        </p>
      ))}
      {finding.wentUp && (
        <p>
          {i18n.t("Overdue, it went up to {name} on {date}.", {
            name: finding.wentUp.name,
            date: formatDate(finding.wentUp.on, locale),
          })}
          {finding.wentUp.hasBounced && (
            <span className="field-error">
              {" "}
              {i18n.t("That mail came back undeliverable: tell them yourself.")}
            </span>
          )}
        </p>
      )}
    </div>
  );
}
