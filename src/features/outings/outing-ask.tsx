import { useLingui } from "@lingui/react";
import { useEffect, useId, useRef, useState } from "react";
import { formatDayMonth, formatTime } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { localDate } from "../../../shared/time/zone";
import { Button } from "../../components/button";
import { TextButton, TextLink } from "../../components/link";
import type { Issue } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { doubtSentence } from "./doubt-words";
import type { Overlap } from "./overlap";

/** What has to be answered before a row is sent, or what was in its way. */
export type Ask =
  | { kind: "late"; backAt: string; expectedBackAt: string }
  | { kind: "long"; backAt: string; outForMin: number }
  | { kind: "twice"; cell: "outTime" | "backTime"; time: string; first: string; second: string }
  | ({ kind: "overlap" } & Overlap)
  | { kind: "doubts"; doubts: readonly Issue[]; canDiscard: boolean }
  | { kind: "undo" }
  | { kind: "met"; text: string }
  | { kind: "problem"; text: string };

const LEAST_REASON = 3;

const asksCovers = (doubts: readonly Issue[]) =>
  doubts.some(({ code }) => code === "shorter-than-shift" || code === "outside-shift");

/** A question beneath the row that it is about; the keys go on to it, and back when it is left. */
export function OutingAsk({
  ask,
  timeZone,
  isBusy,
  onTwice,
  onWornUntil,
  onCovers,
  onKeep,
  onDiscard,
  onUndo,
  onShowAnew,
  onLeave,
}: {
  ask: Ask;
  timeZone: string;
  isBusy: boolean;
  onTwice: (cell: "outTime" | "backTime", instant: string) => void;
  onWornUntil: (instant: string) => void;
  onCovers: (covers: "projected" | "part") => void;
  onKeep: (reason: string) => void;
  onDiscard: (reason: string) => void;
  onUndo: (reason: string) => void;
  onShowAnew: () => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const box = useRef<HTMLDivElement>(null);
  const titleId = useId();
  const time = (at: string) => formatTime(at, timeZone);
  const instant = (at: string) =>
    `${formatDayMonth(localDate(new Date(at), timeZone), locale)}, ${time(at)}`;
  useEffect(() => {
    box.current?.querySelector<HTMLElement>("textarea, button")?.focus();
  }, []);
  const leave = <TextButton onClick={onLeave}>{i18n.t("Back to the row")}</TextButton>;
  return (
    // biome-ignore lint/a11y/useSemanticElements: a question with its answers, not a set of fields
    <div
      className="outing-ask"
      role="group"
      aria-labelledby={titleId}
      ref={box}
      onKeyDown={(event) => {
        if (event.key === "Escape") onLeave();
      }}
    >
      {ask.kind === "late" && (
        <>
          <p id={titleId} className="outing-ask-title">
            {i18n.t("Back at {back}; the shift ended at {end}. Was it worn until then?", {
              back: time(ask.backAt),
              end: time(ask.expectedBackAt),
            })}
          </p>
          <div className="outing-ask-acts">
            <Button onClick={() => onWornUntil(ask.backAt)}>
              {i18n.t("Yes, until {time}", { time: time(ask.backAt) })}
            </Button>
            <Button onClick={() => onWornUntil(ask.expectedBackAt)}>
              {i18n.t("No, until {time}", { time: time(ask.expectedBackAt) })}
            </Button>
            {leave}
          </div>
        </>
      )}
      {ask.kind === "long" && (
        <>
          <p id={titleId} className="outing-ask-title">
            {i18n.t("That is {back}, {length} after it went out. Is it?", {
              back: instant(ask.backAt),
              length: formatDuration(ask.outForMin, locale),
            })}
          </p>
          <div className="outing-ask-acts">
            <Button onClick={() => onWornUntil(ask.backAt)}>
              {i18n.t("Yes, until {time}", { time: time(ask.backAt) })}
            </Button>
            {leave}
          </div>
        </>
      )}
      {ask.kind === "twice" && (
        <>
          <p id={titleId} className="outing-ask-title">
            {i18n.t("The clock was set back: {time} came twice. Which one?", { time: ask.time })}
          </p>
          <div className="outing-ask-acts">
            <Button onClick={() => onTwice(ask.cell, ask.first)}>{i18n.t("The first")}</Button>
            <Button onClick={() => onTwice(ask.cell, ask.second)}>{i18n.t("The second")}</Button>
            {leave}
          </div>
        </>
      )}
      {ask.kind === "doubts" && (
        <>
          <ul id={titleId} className="outing-ask-title">
            {ask.doubts.map(({ code, params }) => (
              <li key={code}>{doubtSentence(i18n, code, params, locale)}</li>
            ))}
          </ul>
          {asksCovers(ask.doubts) && (
            <div className="outing-ask-acts">
              {i18n.t("What does it cover?")}
              {!ask.doubts.some(({ code }) => code === "outside-shift") && (
                <Button isBusy={isBusy} onClick={() => onCovers("projected")}>
                  {i18n.t("A part; the rest was like it")}
                </Button>
              )}
              <Button isBusy={isBusy} onClick={() => onCovers("part")}>
                {i18n.t("A part; only evidence")}
              </Button>
            </div>
          )}
          <WithReason
            label={i18n.t("Because")}
            note={i18n.t(
              "Kept, its reason stands wherever its number goes, and no result made of it bears the standard’s name.",
            )}
            isBusy={isBusy}
            acts={[
              { label: i18n.t("Keep it, because…"), onAct: onKeep },
              ...(ask.canDiscard
                ? [{ label: i18n.t("Discard it, because…"), onAct: onDiscard }]
                : []),
            ]}
          >
            {leave}
          </WithReason>
        </>
      )}
      {ask.kind === "undo" && (
        <>
          <p id={titleId} className="outing-ask-title">
            {i18n.t("It never went out: the run is struck, and stays on record.")}
          </p>
          <WithReason
            label={i18n.t("Because")}
            isBusy={isBusy}
            acts={[{ label: i18n.t("Strike the run"), onAct: onUndo }]}
          >
            {leave}
          </WithReason>
        </>
      )}
      {ask.kind === "overlap" && (
        <>
          <p id={titleId} className="outing-ask-title" role="alert">
            {ask.to === null
              ? i18n.t("The instrument has been out since {from}: there is another run.", {
                  from: instant(ask.from),
                })
              : i18n.t("The instrument has another run from {from} to {to}.", {
                  from: instant(ask.from),
                  to: instant(ask.to),
                })}
          </p>
          <div className="outing-ask-acts">
            {ask.runId && (
              <TextLink to={paths.run(ask.runId)}>{i18n.t("Look at that run")}</TextLink>
            )}
            {leave}
          </div>
        </>
      )}
      {(ask.kind === "met" || ask.kind === "problem") && (
        <>
          <p id={titleId} className="outing-ask-title" role="alert">
            {ask.text}
          </p>
          <div className="outing-ask-acts">
            {ask.kind === "met" && (
              <Button onClick={onShowAnew}>{i18n.t("Show it as it stands")}</Button>
            )}
            {leave}
          </div>
        </>
      )}
    </div>
  );
}

function WithReason({
  label,
  note,
  isBusy,
  acts,
  children,
}: {
  label: string;
  note?: string;
  isBusy: boolean;
  acts: readonly { label: string; onAct: (reason: string) => void }[];
  children: React.ReactNode;
}) {
  const { i18n } = useLingui();
  const id = useId();
  const [reason, setReason] = useState("");
  const [isMissing, setIsMissing] = useState(false);
  return (
    <>
      <label htmlFor={id} className="outing-ask-label">
        {label}
      </label>
      <textarea
        id={id}
        className="input"
        rows={2}
        value={reason}
        aria-invalid={isMissing || undefined}
        aria-describedby={isMissing ? `${id}-error` : note ? `${id}-note` : undefined}
        onChange={(event) => {
          setReason(event.target.value);
          setIsMissing(false);
        }}
      />
      {isMissing && (
        <p className="field-error" id={`${id}-error`}>
          {i18n.t("A reason is needed, in a few words.")}
        </p>
      )}
      {note && (
        <p className="field-note" id={`${id}-note`}>
          {note}
        </p>
      )}
      <div className="outing-ask-acts">
        {acts.map((act) => (
          <Button
            key={act.label}
            isBusy={isBusy}
            onClick={() => {
              if (reason.trim().length < LEAST_REASON) setIsMissing(true);
              else act.onAct(reason.trim());
            }}
          >
            {act.label}
          </Button>
        ))}
        {children}
      </div>
    </>
  );
}
