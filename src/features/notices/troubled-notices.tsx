import { useLingui } from "@lingui/react";
import { useState } from "react";
import { formatTime } from "../../../shared/format/date";
import type { NoticeRow } from "../../../shared/schemas/notice";
import { Button } from "../../components/button";
import { TextButton } from "../../components/link";
import { MarginNote } from "../../components/page";
import { problemText } from "../../lib/problem-text";
import { LookAtNotices } from "./outgoing-notice";
import { useHandleNotices } from "./queries";

/** Notices that the mail server has not taken, or of which nobody knows whether they arrived. */
export function TroubledNotices({
  notices,
  timeZoneOf,
  onSent,
}: {
  notices: readonly NoticeRow[];
  timeZoneOf: (notice: NoticeRow) => string;
  onSent: (people: number) => void;
}) {
  const { i18n } = useLingui();
  return (
    <MarginNote title={i18n.t("Notice not sent")}>
      {notices.map((notice) => (
        <TroubledNotice
          key={notice.id}
          notice={notice}
          timeZone={timeZoneOf(notice)}
          onSent={() => onSent(1)}
        />
      ))}
      <p>{i18n.t("Nothing is lost.")}</p>
    </MarginNote>
  );
}

function TroubledNotice({
  notice,
  timeZone,
  onSent,
}: {
  notice: NoticeRow;
  timeZone: string;
  onSent: () => void;
}) {
  const { i18n } = useLingui();
  const handle = useHandleNotices(notice.entryId, onSent);
  const [isLooking, setIsLooking] = useState(false);
  const values = {
    name: notice.recipientName,
    tries: notice.tries,
    time: formatTime(notice.notBefore, timeZone),
  };
  return (
    <div className="troubled">
      <p>
        {notice.state === "possibly-sent"
          ? notice.tries > 1
            ? i18n.t(
                "{name}: possibly sent; twice the mail server did not answer. Ask whether it arrived.",
                values,
              )
            : i18n.t(
                "{name}: possibly sent; the mail server did not answer. It is sent once more.",
                values,
              )
          : notice.state === "failed"
            ? i18n.t(
                "{name}: refused after {tries, plural, one {# try} other {# tries}}; it is not tried again. Tell them yourself.",
                values,
              )
            : i18n.t(
                "{name}: the mail server refused it; {tries, plural, one {# try} other {# tries}} so far, it is tried again.",
                values,
              )}
      </p>
      <p className="note-links">
        <TextButton onClick={() => setIsLooking(true)}>{i18n.t("Look")}</TextButton>
        {notice.state === "waiting" && (
          <TextButton
            aria-disabled={handle.isPending || undefined}
            onClick={() => handle.isPending || handle.mutate("send-now")}
          >
            {i18n.t("Send now")}
          </TextButton>
        )}
      </p>
      {handle.isError && <p role="alert">{problemText(i18n, handle.error)}</p>}
      {isLooking && (
        <LookAtNotices
          notices={[notice]}
          onClose={() => setIsLooking(false)}
          actions={<Button onClick={() => setIsLooking(false)}>{i18n.t("Close")}</Button>}
        />
      )}
    </div>
  );
}
