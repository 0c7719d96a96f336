import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { type FormEvent, type ReactNode, useId, useState } from "react";
import { findingStateWord } from "../../../shared/findings/words";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { ApiError, isUnreached } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useTypedText } from "../../lib/keep-typed";
import { keptActsOf, useKeptActs } from "../../lib/kept-acts";
import { useMoveFocus } from "../../lib/move-focus";
import { savedMeanwhile } from "../../lib/stale";
import { tooManyText } from "../../lib/too-many";
import { useUser } from "../session/session";
import { findingReply, type OrderStep, type SheetOrder, useOrderStep } from "./queries";
import { StaleOrder } from "./stale-order";

/** A reason of two letters says nothing; the server asks for three as well, and takes no more. */
const SHORTEST_REASON = 3;
const LONGEST_REASON = 2000;

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
      words: { kind: step.kind, findingId, workerName, text: step.text },
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
  order,
  workerName,
  onStale,
  words,
  noticed,
}: {
  crewId: string;
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
  const kept = useKeptActs(useUser().id).find(
    ({ words: act }) =>
      act.kind !== "round" && act.kind !== "comment" && act.findingId === order.findingId,
  );
  const canStep = order.canMarkDone && !kept;
  const [text, setText] = useTypedText(`cannot ${order.findingId}`);
  const [isRefusing, setIsRefusing] = useState(text !== "");
  const [isTooShort, setIsTooShort] = useState(false);
  const [said, setSaid] = useState("");
  const id = useId();
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const toState = () => moveFocus("[data-order-state]", "button");
  const toCannot = () => moveFocus("[data-cannot]", "[data-order-state]");

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
      toCannot();
    });
  }

  /** What was typed stays, should it be opened again. */
  function leave() {
    setIsRefusing(false);
    setIsTooShort(false);
    forget();
    toCannot();
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
            aria-label={i18n.t("Mark done: {name}", { name: workerName })}
            onClick={() =>
              send({ kind: "mark-done", text: "" }, (isKept) => {
                setSaid(isKept ? keptWords(i18n) : i18n.t("The officer checks it."));
                toState();
              })
            }
          >
            {i18n.t("Mark done")}
          </Button>
        ) : (
          <span className="sheet-state" data-order-state tabIndex={-1}>
            {kept
              ? kept.words.kind === "mark-done"
                ? i18n.t("Done, not sent yet")
                : i18n.t("Can’t, not sent yet")
              : findingStateWord(i18n, order.state)}
          </span>
        )}
      </div>
      <p className="sheet-noticed">{noticed}</p>
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
