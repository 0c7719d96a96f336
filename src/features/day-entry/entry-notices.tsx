import { useLingui } from "@lingui/react";
import { useMutation, useQuery, useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { formatInstant, formatTime } from "../../../shared/format/date";
import type { EntryNotices as Notices } from "../../../shared/schemas/notice";
import { NoticeLine, type NoticeLineState } from "../../components/notice-line";
import { useLocale } from "../../lib/i18n";
import { problemText } from "../../lib/problem-text";
import { LookDialog } from "./dialogs";
import { dayEntryQueries, handleNotices } from "./queries";

const LINE: Readonly<Record<Notices["state"], NoticeLineState | null>> = {
  none: null,
  waiting: "will-be-told",
  held: "held",
  part: "held",
  sent: "were-told",
};

/** Soon after their time the notices are gone; until then a look now and then is enough. */
function askAgainMs(notices: Notices | undefined): number | false {
  if (notices?.state !== "waiting" || notices.notBefore === null) return false;
  return Date.parse(notices.notBefore) - Date.now() < 5_000 ? 2_000 : 30_000;
}

/** Before anybody is told: who and when, and time to look, to hold or to send. */
export function EntryNotices({
  notices: given,
  timeZone,
  onChange,
}: {
  notices: Notices;
  timeZone: string;
  onChange: (notices: Notices) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [isLooking, setIsLooking] = useState(false);
  const client = useQueryClient();
  const query = dayEntryQueries.notices(given.entryId);
  const { data: notices = given } = useQuery({
    ...query,
    initialData: given,
    refetchInterval: ({ state: { data } }) => askAgainMs(data),
  });
  const handle = useMutation({
    mutationFn: (action: "hold" | "send-now") => handleNotices(given.entryId, action),
    onSuccess: (next) => {
      client.setQueryData(query.queryKey, next);
      onChange(next);
    },
  });
  const state = LINE[notices.state];
  if (!state || notices.people === 0) return null;
  const names = [
    ...new Set(notices.notices.flatMap(({ workers }) => workers.map(({ name }) => name))),
  ].join(", ");
  const time = notices.notices.find(({ sentAt }) => sentAt !== null)?.sentAt ?? notices.notBefore;
  return (
    <>
      <NoticeLine
        state={state}
        peopleCount={notices.people}
        time={time === null ? "" : formatTime(time, timeZone)}
        isCorrection={notices.notices.some(({ replacesId }) => replacesId !== null)}
        correctedAt={
          notices.correctedAt === null ? null : formatInstant(notices.correctedAt, timeZone, locale)
        }
        detail={
          handle.isError
            ? problemText(i18n, handle.error)
            : state === "held"
              ? i18n.t("Nobody is told about {names}.", { names })
              : undefined
        }
        onLook={() => setIsLooking(true)}
        onHold={() => handle.mutate("hold")}
        onSendNow={() => handle.mutate("send-now")}
      />
      {isLooking && (
        <LookDialog notices={notices} timeZone={timeZone} onClose={() => setIsLooking(false)} />
      )}
    </>
  );
}
