import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { type FormEvent, type ReactNode, useEffect, useId, useRef, useState } from "react";
import { findingStateWord } from "../../../shared/findings/words";
import { formatTime } from "../../../shared/format/date";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { ApiError, isUnreached } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useTypedText } from "../../lib/keep-typed";
import { keptActsOf, useKeptActs } from "../../lib/kept-acts";
import { useMoveFocus } from "../../lib/move-focus";
import { useSecondsLeft } from "../../lib/seconds-left";
import { savedMeanwhile } from "../../lib/stale";
import { tooManyText } from "../../lib/too-many";
import { useUser } from "../session/session";
import { findingReply, type OrderStep, type SheetOrder, useOrderStep } from "./queries";
import { StaleOrder } from "./stale-order";

/** A reason of two letters says nothing; the server asks for three as well, and takes no more. */
const SHORTEST_REASON = 3;
const LONGEST_REASON = 2000;
/** So long a tap by mistake can be taken back with another. */
const UNDO_FOR_MS = 10_000;

/** It waits on this device for a connection, or for the same person to sign in again. */
const isToBeKept = (error: unknown): boolean =>
  isUnreached(error) || (error instanceof ApiError && error.status === 401);

/**
 * Sends steps on an order, asks where somebody was quicker, and says what went wrong in its place. What can't be sent now
 * is kept; `onSent` is told which of both it was.
 */
export function useSendStep(
  crewId: string,
  order: Pick<SheetOrder, "findingId" | "revision">,
  workerName: string,
) {
  const acts = keptActsOf(useUser().id);
  const { keyFor, forget: forgetKey } = useChangeKey();
  const change = useOrderStep(crewId, order.findingId);
  const [asked, setAsked] = useState<OrderStep | null>(null);
  const current = asked ? savedMeanwhile(change.error, findingReply) : null;

  const send = (step: OrderStep, onSent: (isKept: boolean) => void, revision = order.revision) => {
    setAsked(step);
    const { findingId } = order;
    const { key } = acts.hold({
      key: keyFor({ step, revision }),
      path: `/findings/${findingId}/steps`,
      body: step,
      revision,
      words: {
        kind: step.kind,
        findingId,
        workerName,
        text: step.kind === "undo" ? "" : step.text,
      },
    });
    change.mutate(
      { step, revision, idempotencyKey: key },
      {
        onSuccess: () => {
          forgetKey();
          setAsked(null);
          onSent(false);
        },
        onError: (error) => {
          if (!isToBeKept(error)) return;
          forgetKey();
          setAsked(null);
          change.reset();
          onSent(true);
        },
        onSettled: (_, error) => acts.release(key, isToBeKept(error)),
      },
    );
  };
  const forget = () => {
    setAsked(null);
    change.reset();
  };
  return {
    send,
    forget,
    asked,
    current,
    isBusy: change.isPending,
    error: current ? null : change.error,
  };
}

export const keptWords = (i18n: I18n): string =>
  i18n.t("Kept on this device. It is sent as soon as there is a connection.");

/** Mark done, large enough for a hand in a glove, and Can’t, because… beneath it. */
export function OrderActions({
  crewId,
  timeZone,
  order,
  workerName,
  onStale,
  words,
  noticed,
}: {
  crewId: string;
  /** Of the site. */
  timeZone: string;
  order: SheetOrder;
  workerName: string;
  /** The sheet is out of date: it is to be read again. */
  onStale: () => void;
  /** The order itself. */
  words: ReactNode;
  /** What was noticed, between the order with its button and the second way out. */
  noticed: ReactNode;
}) {
  const { i18n } = useLingui();
  const { send, forget, asked, current, isBusy, error } = useSendStep(crewId, order, workerName);
  const userId = useUser().id;
  const kept = useKeptActs(userId).find(
    ({ words: act }) =>
      act.kind !== "round" && act.kind !== "comment" && act.findingId === order.findingId,
  );
  const [sent, setSent] = useState<{ kind: "mark-done" | "cannot"; at: Date } | null>(null);
  const secondsLeft = useSecondsLeft(sent && sent.at.getTime() + UNDO_FOR_MS);
  const canUndoSent = sent !== null && secondsLeft > 0 && !kept;
  const canUndo = canUndoSent || (kept?.state === "unsent" && kept.words.kind !== "undo");
  const canStep = order.canMarkDone && !kept && !canUndoSent;
  const [text, setText] = useTypedText(`cannot ${order.findingId}`);
  const [isRefusing, setIsRefusing] = useState(text !== "");
  const [isTooShort, setIsTooShort] = useState(false);
  const [said, setSaid] = useState("");
  const id = useId();
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const toState = () => moveFocus("[data-undo]", "[data-order-state]", "button");
  const toCannot = () => moveFocus("[data-cannot]", "[data-undo]", "[data-order-state]");

  function submit(event: FormEvent) {
    event.preventDefault();
    const reason = text.trim();
    setIsTooShort(reason.length < SHORTEST_REASON);
    if (reason.length < SHORTEST_REASON || reason.length > LONGEST_REASON) {
      document.getElementById(`${id}-reason`)?.focus();
      return;
    }
    send({ kind: "cannot", text: reason }, (isKept) => {
      setIsRefusing(false);
      setText("");
      setSaid(isKept ? keptWords(i18n) : i18n.t("Your reason is with the officer."));
      if (!isKept) setSent({ kind: "cannot", at: new Date() });
      toState();
    });
  }

  // The button comes back with the order's new state, which is later than the answer.
  const wantsButton = useRef(false);
  useEffect(() => {
    if (!canStep || !wantsButton.current) return;
    wantsButton.current = false;
    place.current?.querySelector<HTMLElement>("[data-mark-done]")?.focus();
  }, [canStep, place]);

  // Once the time is up the button goes; the keyboard's place stays where it stood.
  const hasFocus = useRef(false);
  useEffect(() => {
    if (canUndo || !hasFocus.current) return;
    hasFocus.current = false;
    if (document.activeElement === document.body)
      place.current
        ?.querySelector<HTMLElement>("[data-order-state], [data-mark-done]")
        ?.focus({ preventScroll: true });
  }, [canUndo, place]);

  /** What nobody has received is dropped; otherwise a step of its own takes it back. */
  function undo() {
    if (kept) {
      keptActsOf(userId).drop(kept.key);
      setSaid(i18n.t("Taken back; nothing was sent."));
      wantsButton.current = true;
      return;
    }
    send({ kind: "undo" }, (isKept) => {
      setSent(null);
      setSaid(isKept ? keptWords(i18n) : i18n.t("Undone."));
      wantsButton.current = true;
    });
  }

  /** What was typed stays, should it be opened again. */
  function leave() {
    setIsRefusing(false);
    setIsTooShort(false);
    forget();
    toCannot();
  }

  let stateText = findingStateWord(i18n, order.state);
  if (kept) {
    if (kept.words.kind === "mark-done") stateText = i18n.t("Done, not sent yet");
    else if (kept.words.kind === "undo") stateText = i18n.t("Undone, not sent yet");
    else stateText = i18n.t("Can’t, not sent yet");
  } else if (canUndoSent) {
    const time = formatTime(sent.at.toISOString(), timeZone);
    stateText =
      sent.kind === "mark-done"
        ? i18n.t("Done, {time}.", { time })
        : i18n.t("Can’t, {time}.", { time });
  }

  const fault = isTooShort
    ? i18n.t("Say it in a few words.")
    : tooManyText(i18n, text, LONGEST_REASON);
  return (
    <div ref={place} className="contents">
      <div className="sheet-order">
        <div className="sheet-order-words">{words}</div>
        {canStep ? (
          <Button
            kind="big"
            size="supervisor"
            isBusy={isBusy && asked?.kind === "mark-done"}
            data-mark-done
            aria-label={i18n.t("Mark done: {name}", { name: workerName })}
            onClick={() =>
              send({ kind: "mark-done", text: "" }, (isKept) => {
                setSaid(isKept ? keptWords(i18n) : i18n.t("The officer checks it."));
                if (!isKept) setSent({ kind: "mark-done", at: new Date() });
                toState();
              })
            }
          >
            {i18n.t("Mark done")}
          </Button>
        ) : (
          <span className="sheet-state" data-order-state tabIndex={-1}>
            {stateText}
            {canUndo && (
              <span className="sheet-undo">
                <TextButton
                  data-undo
                  onFocus={() => {
                    hasFocus.current = true;
                  }}
                  onBlur={() => {
                    hasFocus.current = false;
                  }}
                  aria-label={i18n.t("Undo: {name}", { name: workerName })}
                  disabled={isBusy}
                  onClick={undo}
                >
                  {i18n.t("Undo")}
                </TextButton>
                {canUndoSent && (
                  <span aria-hidden="true">{i18n.t("({count} s)", { count: secondsLeft })}</span>
                )}
              </span>
            )}
          </span>
        )}
      </div>
      <p className="sheet-noticed">{noticed}</p>
      {order.cannot && !kept && (
        <p className="sheet-noticed">
          {i18n.t("Can’t, because: {text} ({name})", {
            text: order.cannot.text,
            name: order.cannot.byName,
          })}
        </p>
      )}
      {canStep && !isRefusing && (
        <TextButton
          className="sheet-cannot"
          data-cannot
          aria-label={i18n.t("Can’t, because… {name}", { name: workerName })}
          onClick={() => {
            setIsRefusing(true);
            moveFocus("textarea");
          }}
        >
          {i18n.t("Can’t, because…")}
        </TextButton>
      )}
      {isRefusing && (
        <form
          className="sheet-form"
          onSubmit={submit}
          onKeyDown={(event) => {
            if (event.key === "Escape" && !event.nativeEvent.isComposing && !isBusy) leave();
          }}
          noValidate
        >
          <label htmlFor={`${id}-reason`}>{i18n.t("Why can’t it be done?")}</label>
          <textarea
            id={`${id}-reason`}
            className="input"
            rows={3}
            aria-required="true"
            aria-invalid={fault ? true : undefined}
            aria-describedby={fault && `${id}-error`}
            value={text}
            onChange={(event) => {
              setText(event.target.value);
              setIsTooShort(false);
            }}
          />
          {fault && (
            <p className="field-error" id={`${id}-error`}>
              {fault}
            </p>
          )}
          <div className="sheet-form-actions">
            <Button type="submit" kind="primary" size="supervisor" isBusy={isBusy}>
              {i18n.t("Send to the officer")}
            </Button>
            <Button size="supervisor" onClick={leave}>
              {i18n.t("Cancel")}
            </Button>
          </div>
        </form>
      )}
      <FormProblem error={error} />
      <p className="status sheet-said" role="status">
        {said}
      </p>
      {current && asked && (
        <StaleOrder
          current={current}
          step={asked}
          workerName={workerName}
          isBusy={isBusy}
          onKeep={() => {
            forget();
            setIsRefusing(false);
            onStale();
            toState();
          }}
          onSend={() =>
            send(
              asked,
              () => {
                setIsRefusing(false);
                setText("");
                if (asked.kind === "mark-done") toState();
                else toCannot();
              },
              current.revision,
            )
          }
        />
      )}
    </div>
  );
}
