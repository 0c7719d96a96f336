import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { TextButton } from "./link";

export type NoticeLineState = "will-be-told" | "held" | "were-told";

/** Before anybody is told: who and when, and time to look. */
export function NoticeLine({
  state,
  peopleCount,
  time,
  detail,
  onLook,
  onHold,
  onSendNow,
}: {
  state: NoticeLineState;
  peopleCount: number;
  /** Local time, "10:40". */
  time: string;
  detail?: ReactNode;
  onLook?: () => void;
  onHold?: () => void;
  onSendNow?: () => void;
}) {
  const { i18n } = useLingui();
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
            i18n.t(
              "{count, plural, one {# person was told at {time}.} other {# people were told at {time}.}}",
              { count: peopleCount, time },
            )}
        </b>{" "}
        {detail ?? (state === "were-told" ? i18n.t("A correction sends “This replaces…”") : null)}
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
