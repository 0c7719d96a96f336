import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { findingWord } from "../../../shared/findings/words";
import { formatTime } from "../../../shared/format/date";
import { withinSentence } from "../../../shared/format/words";
import type { FindingKind } from "../../../shared/schemas/finding";
import type { EntryNotices, NoticeRow } from "../../../shared/schemas/notice";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { Failed } from "../../components/failed";
import { TextButton } from "../../components/link";
import { MarginNote } from "../../components/page";
import { useMoveFocus } from "../../lib/move-focus";
import { problemText } from "../../lib/problem-text";
import { noticeTextQuery, useHandleNotices } from "./queries";

/** Before anybody is told: who, when and about whom, and time to look. */
export function OutgoingNotice({
  entry,
  timeZone,
  ownName,
  onSent,
}: {
  entry: EntryNotices;
  timeZone: string;
  ownName: string;
  /** It was let go, and this note will not stand here much longer. */
  onSent?: (people: number) => void;
}) {
  const { i18n } = useLingui();
  const [isLooking, setIsLooking] = useState(false);
  const [place, moveFocus] = useMoveFocus<HTMLParagraphElement>();
  const handle = useHandleNotices({ entryId: entry.entryId }, (action) => {
    if (action === "send-now") onSent?.(entry.people);
    else moveFocus("[data-send-now]");
  });
  const isHeld = entry.state === "held";
  const recipients = [...new Set(entry.notices.map(({ recipientName }) => recipientName))].map(
    (name) => (name === ownName ? i18n.t("you") : name),
  );
  const workers = [
    ...new Map(
      entry.notices.flatMap((notice) => notice.workers).map((worker) => [worker.id, worker]),
    ).values(),
  ];
  const kinds = [...new Set(workers.flatMap((worker) => worker.kinds))] as FindingKind[];
  return (
    <MarginNote
      isRuled
      title={
        isHeld
          ? i18n.t(
              "Held: {count, plural, one {# person is not told} other {# people are not told}}",
              { count: entry.people },
            )
          : i18n.t(
              "{count, plural, one {# person will be told at {time}} other {# people will be told at {time}}}",
              {
                count: entry.people,
                time: entry.notBefore ? formatTime(entry.notBefore, timeZone) : "–",
              },
            )
      }
    >
      <p>
        {recipients.join(", ")}
        {workers.length > 0 &&
          i18n.t(", about {names}", { names: workers.map(({ name }) => name).join(", ") })}
        {kinds.length > 0 &&
          `: ${kinds.map((kind) => withinSentence(findingWord(i18n, kind), i18n.locale)).join(", ")}`}
        .
      </p>
      <p className="note-links" ref={place}>
        <TextButton onClick={() => setIsLooking(true)}>{i18n.t("Look")}</TextButton>
        {!isHeld && (
          <TextButton
            aria-disabled={handle.isPending || undefined}
            onClick={() => handle.isPending || handle.mutate("hold")}
          >
            {i18n.t("Hold")}
          </TextButton>
        )}
        <TextButton
          data-send-now
          aria-disabled={handle.isPending || undefined}
          onClick={() => handle.isPending || handle.mutate("send-now")}
        >
          {i18n.t("Send now")}
        </TextButton>
      </p>
      {handle.isError && <p role="alert">{problemText(i18n, handle.error)}</p>}
      {isLooking && (
        <LookAtNotices
          title={i18n.t("What they will read")}
          notices={entry.notices}
          onClose={() => setIsLooking(false)}
          actions={
            <>
              <Button
                kind="primary"
                onClick={() => {
                  handle.mutate("send-now");
                  setIsLooking(false);
                }}
              >
                {i18n.t("Send now")}
              </Button>
              {!isHeld && (
                <Button
                  onClick={() => {
                    handle.mutate("hold");
                    setIsLooking(false);
                  }}
                >
                  {i18n.t("Hold")}
                </Button>
              )}
              <Button onClick={() => setIsLooking(false)}>{i18n.t("Leave as it is")}</Button>
            </>
          }
        />
      )}
    </MarginNote>
  );
}

/** Every mail of an entry, one after the other: as it would read now, or as it went. */
export function LookAtNotices({
  notices,
  title,
  onClose,
  actions,
}: {
  notices: readonly Pick<NoticeRow, "id" | "recipientName">[];
  title: string;
  onClose: () => void;
  actions: React.ReactNode;
}) {
  return (
    <Dialog isOpen onClose={onClose} title={title} actions={actions}>
      {notices.map((notice) => (
        <NoticeLetter key={notice.id} id={notice.id} recipientName={notice.recipientName} />
      ))}
    </Dialog>
  );
}

export function NoticeLetter({ id, recipientName }: { id: string; recipientName: string }) {
  const { i18n } = useLingui();
  const { data, error, refetch } = useQuery(noticeTextQuery(id));
  return (
    <article className="letter">
      <h3>{i18n.t("To {name}", { name: recipientName })}</h3>
      {error && <Failed error={error} onRetry={() => void refetch()} />}
      {data ? (
        <>
          <p>
            <b>{data.subject}</b>
          </p>
          <div className="letter-text">{data.text}</div>
        </>
      ) : (
        !error && <span className="loading-line" />
      )}
    </article>
  );
}
