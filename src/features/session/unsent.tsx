import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useCallback, useEffect, useState } from "react";
import { findingStateWord } from "../../../shared/findings/words";
import { formatDayMonth, formatInstant } from "../../../shared/format/date";
import { isolate } from "../../../shared/i18n/isolate";
import { codeText } from "../../../shared/problems/code-text";
import type { FindingState } from "../../../shared/schemas/finding";
import { Button } from "../../components/button";
import { TextButton } from "../../components/link";
import { connectionEvents } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import {
  type ActWords,
  hasWordsToPassOn,
  type KeptAct,
  keptActsOf,
  type Settled,
  useKeptActs,
} from "../../lib/kept-acts";
import { useNewVersion } from "../../lib/service-worker";
import { useUser } from "./session";
import "../../styles/unsent.css";

/** While something waits, the server is asked so often whether it is there again. */
const TRY_EVERY_MS = 15_000;

function useActText(): (words: ActWords) => string {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (words) => {
    if (words.kind === "round")
      return i18n.t("Wearing round, {crew}, {day}: {looks, plural, one {# look} other {# looks}}", {
        crew: isolate(words.crewName),
        day: formatDayMonth(words.date, locale),
        looks: words.looks,
      });
    const name = isolate(words.workerName);
    if (words.kind === "mark-done") return i18n.t("Mark done: {name}", { name });
    if (words.kind === "undo") return i18n.t("Undo: {name}", { name });
    return words.kind === "cannot"
      ? i18n.t("Can’t, because: {text} ({name})", { text: words.text, name })
      : i18n.t("Question: {text} ({name})", { text: words.text, name });
  };
}

function settledText(i18n: I18n, { outcome }: Settled, act: string): string {
  return outcome === "sent"
    ? i18n.t("Sent. {act}", { act })
    : i18n.t("{act}. It was already done.", { act });
}

/** At the foot of the screen: what this person did and nobody has received yet, and whether a newer version is there. */
export function Unsent() {
  const { i18n } = useLingui();
  const user = useUser();
  const client = useQueryClient();
  const acts = useKeptActs(user.id);
  const actText = useActText();
  const [settled, setSettled] = useState<readonly Settled[]>([]);
  const reload = useNewVersion();
  const waits = acts.some(({ state }) => state === "unsent");

  const sendAll = useCallback(async () => {
    const done = await keptActsOf(user.id).sendAll();
    if (done.length === 0) return;
    setSettled(done);
    for (const name of ["crew-sheet", "wearing", "findings", "waiting"])
      void client.invalidateQueries({ queryKey: [name] });
  }, [client, user.id]);

  useEffect(() => {
    const lost = () => connectionEvents.tell("offline");
    const back = () => void sendAll();
    window.addEventListener("offline", lost);
    window.addEventListener("online", back);
    return () => {
      window.removeEventListener("offline", lost);
      window.removeEventListener("online", back);
    };
  }, [sendAll]);
  useEffect(() => {
    if (!waits) return;
    void sendAll();
    const timer = setInterval(() => void sendAll(), TRY_EVERY_MS);
    return () => clearInterval(timer);
  }, [waits, sendAll]);

  const standing = acts.filter(({ state }) => state !== "unsent").length;
  return (
    <div className="unsent-place">
      {reload && (
        <p className="unsent-line">
          {i18n.t("A new version is there.")}{" "}
          <TextButton onClick={reload}>{i18n.t("Reload")}</TextButton>
        </p>
      )}
      <div role="status" className="unsent-line" hidden={settled.length === 0 || acts.length > 0}>
        {settled.map((done) => (
          <p key={done.key}>{settledText(i18n, done, actText(done.words))}</p>
        ))}
      </div>
      {acts.length > 0 && (
        <details className="unsent-line" open={standing > 0 || undefined}>
          <summary>
            {i18n.t("{count, plural, one {# thing} other {# things}} not sent yet", {
              count: acts.length,
            })}
            {standing > 0 &&
              ` · ${i18n.t("{count, plural, one {# needs} other {# need}} your choice", {
                count: standing,
              })}`}
          </summary>
          <ul>
            {acts.map((act) => (
              <UnsentAct key={act.key} act={act} text={actText(act.words)} onAgain={sendAll} />
            ))}
          </ul>
        </details>
      )}
    </div>
  );
}

function UnsentAct({
  act,
  text,
  onAgain,
}: {
  act: KeptAct;
  text: string;
  onAgain: () => Promise<void>;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const acts = keptActsOf(user.id);
  const { stands } = act;
  const timeZone = user.sites[0]?.timeZone ?? "UTC";
  return (
    <li>
      <b>{text}</b>
      <span className="beneath block">
        {i18n.t("Done by you on {time}", { time: formatInstant(act.at, timeZone, locale) })}
      </span>
      {stands && (
        <p>
          {stands.byName
            ? i18n.t("{name} was quicker. What stands there now: {state}", {
                name: isolate(stands.byName),
                state: findingStateWord(i18n, stands.state as FindingState),
              })
            : i18n.t("It has changed since. What stands there now: {state}", {
                state: findingStateWord(i18n, stands.state as FindingState),
              })}
          {stands.text && <span className="beneath block">{stands.text}</span>}
        </p>
      )}
      {act.state === "refused" && (
        <p>
          {i18n.t("It was not taken.")} {codeText(i18n, act.code ?? "", {})}
        </p>
      )}
      {act.state !== "unsent" && (
        <div className="unsent-choice">
          <Button size="supervisor" onClick={() => acts.drop(act.key)}>
            {i18n.t("Drop mine")}
          </Button>
          {stands && stands.state !== "closed" && act.words.kind !== "undo" && (
            <Button
              size="supervisor"
              onClick={() => {
                acts.again(act.key);
                void onAgain();
              }}
            >
              {i18n.t("Do it again on what stands")}
            </Button>
          )}
          {hasWordsToPassOn(act) && (
            <Button
              size="supervisor"
              onClick={() => {
                acts.asComment(act.key);
                void onAgain();
              }}
            >
              {i18n.t("Pass the words on as a comment")}
            </Button>
          )}
        </div>
      )}
    </li>
  );
}
