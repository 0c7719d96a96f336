import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { TextButton } from "./link";

export type NoticeLineState = "will-be-told" | "held" | "were-told";

/** Before anybody is told: who and when, and time to look. */
export function NoticeLine({
  state,
  peopleCount,
  time,
  isCorrection = false,
  correctedAt = null,
  detail,
  onLook,
  onHold,
  onSendNow,
}: {
  state: NoticeLineState;
  peopleCount: number;
  /** Local time, "10:40". */
  time: string;
  /** They are told that this replaces an earlier mail. */
  isCorrection?: boolean;
  /** Local date and time at which a correction of it left; null: none has. */
  correctedAt?: string | null;
  detail?: ReactNode;
  onLook?: () => void;
  onHold?: () => void;
  onSendNow?: () => void;
}) {
  const { i18n } = useLingui();
  const aboutCorrection = correctedAt
    ? i18n.t("A correction was sent: {at}.", { at: correctedAt })
    : !isCorrection && i18n.t("A correction sends “This replaces…”");
  return (
    <div className="notice-line" role="status">
      <span>
        <b>
          {state === "will-be-told" &&
            i18n.t(
              "{count, plural, one {# person will be told at {time}} other {# people will be told at {time}}}",
              { count: peopleCount, time },
            )}
          {state === "held" && i18n.t("Held by you.")}
          {state === "were-told" &&
            isCorrection &&
            i18n.t(
              "{count, plural, one {The correction was sent to # person at {time}.} other {The correction was sent to # people at {time}.}}",
              { count: peopleCount, time },
            )}
          {state === "were-told" &&
            !isCorrection &&
            i18n.t(
              "{count, plural, one {# person was told at {time}.} other {# people were told at {time}.}}",
              { count: peopleCount, time },
            )}
        </b>{" "}
        {detail ?? (state === "were-told" && aboutCorrection)}
      </span>
      {state === "will-be-told" && onLook && (
        <TextButton onClick={onLook}>{i18n.t("Look")}</TextButton>
      )}
      {state === "will-be-told" && onHold && (
        <TextButton onClick={onHold}>{i18n.t("Hold")}</TextButton>
      )}
      {state !== "were-told" && onSendNow && (
        <TextButton onClick={onSendNow}>{i18n.t("Send now")}</TextButton>
      )}
    </div>
  );
}
