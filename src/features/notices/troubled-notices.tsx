import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { NoticeAction, NoticeRow } from "../../../shared/schemas/notice";
import { Button } from "../../components/button";
import { TextButton } from "../../components/link";
import { MarginNote } from "../../components/page";
import { problemText } from "../../lib/problem-text";
import { LookAtNotices } from "./outgoing-notice";
import { useHandleNotices } from "./queries";

/** Why a mail came back, by the status that its server gave (RFC 3463). */
export function bounceReason(i18n: I18n, status: string | null): string {
  const [kind, subject, detail] = (status ?? "").split(".").map(Number);
  if (subject === 1 || (subject === 2 && detail === 1))
    return i18n.t("there is no mailbox of that address, or it is closed");
  if (subject === 2 && detail === 2) return i18n.t("the mailbox is full");
  if (subject === 7) return i18n.t("the other side does not take such mails");
  if (subject === 4 || kind === 4) return i18n.t("the other side could not be reached");
  return i18n.t("the other side gave no reason that is known here");
}

function troubleSentence(i18n: I18n, notice: NoticeRow): string {
  const values = { name: notice.recipientName, tries: notice.tries };
  switch (notice.state) {
    case "bounced":
      return i18n.t("{name}: the mail came back; {reason}. Correct the address, or tell them.", {
        ...values,
        reason: bounceReason(i18n, notice.lastError),
      });
    case "possibly-sent":
      return notice.tries > 1
        ? i18n.t(
            "{name}: possibly sent; twice the mail server did not answer. Ask whether it arrived.",
            values,
          )
        : i18n.t(
            "{name}: possibly sent; the mail server did not answer. It is sent once more.",
            values,
          );
    case "failed":
      return i18n.t(
        "{name}: refused after {tries, plural, one {# try} other {# tries}}; it is not tried again. Tell them yourself.",
        values,
      );
    default:
      return i18n.t(
        "{name}: the mail server refused it; {tries, plural, one {# try} other {# tries}} so far, it is tried again.",
        values,
      );
  }
}

/** Notices that the mail server has not taken, or of which nobody knows whether they arrived. */
export function TroubledNotices({
  notices,
  onSent,
}: {
  notices: readonly NoticeRow[];
  onSent: (people: number) => void;
}) {
  const { i18n } = useLingui();
  return (
    <MarginNote title={i18n.t("Notice not sent")}>
      {notices.map((notice) => (
        <TroubledNotice key={notice.id} notice={notice} onSent={() => onSent(1)} />
      ))}
      <p>{i18n.t("Nothing is lost.")}</p>
    </MarginNote>
  );
}

function TroubledNotice({ notice, onSent }: { notice: NoticeRow; onSent: () => void }) {
  const { i18n } = useLingui();
  const handle = useHandleNotices({ entryId: notice.entryId, noticeId: notice.id }, (action) => {
    if (action !== "give-on-paper") onSent();
  });
  const [isLooking, setIsLooking] = useState(false);
  const canGoAgain = notice.state === "bounced" || notice.state === "failed";
  const act = (action: NoticeAction, label: string) => (
    <TextButton
      aria-disabled={handle.isPending || undefined}
      onClick={() => handle.isPending || handle.mutate(action)}
    >
      {label}
    </TextButton>
  );
  return (
    <div className="troubled">
      <p>{troubleSentence(i18n, notice)}</p>
      <p className="note-links">
        <TextButton onClick={() => setIsLooking(true)}>{i18n.t("Look")}</TextButton>
        {notice.state === "waiting" && act("send-now", i18n.t("Send now"))}
        {canGoAgain && act("send-again", i18n.t("Send again"))}
        {notice.state !== "waiting" && act("give-on-paper", i18n.t("I have told them"))}
      </p>
      {handle.isError && <p role="alert">{problemText(i18n, handle.error)}</p>}
      {isLooking && (
        <LookAtNotices
          notices={[notice]}
          title={notice.sentAt === null ? i18n.t("What they will read") : i18n.t("What was sent")}
          onClose={() => setIsLooking(false)}
          actions={<Button onClick={() => setIsLooking(false)}>{i18n.t("Close")}</Button>}
        />
      )}
    </div>
  );
}
