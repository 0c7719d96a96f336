import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useMutation, useQuery } from "@tanstack/react-query";
import { type ReactNode, useEffect, useRef, useState } from "react";
import type { z } from "zod";
import type { ProtectorWord, Verdict as VerdictCode } from "../../shared/acoustics/types";
import { formatShortDate } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import {
  ChangePreview,
  RecomputeProgress as RecomputeProgressView,
} from "../../shared/schemas/site";
import { api } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { problemText } from "../lib/problem-text";
import { Button } from "./button";
import { DataTable } from "./data-table";
import { Empty } from "./empty";
import { TextLink } from "./link";
import { protectorWordText } from "./protector-word";
import { Status } from "./status";
import { verdictWord } from "./verdict";

type Change = z.infer<typeof ChangePreview>["changes"][number];

const VERDICTS: ReadonlySet<string> = new Set<VerdictCode>([
  "under",
  "over",
  "cant-tell-yet",
  "not-assessed",
]);
const WORDS: ReadonlySet<string> = new Set<ProtectorWord>([
  "too-little",
  "just-enough",
  "good",
  "strong-side",
  "too-much",
  "enough",
]);

function stateWord(i18n: I18n, state: string): string {
  if (VERDICTS.has(state)) return verdictWord(i18n, state as VerdictCode);
  if (WORDS.has(state)) return protectorWordText(i18n, state as ProtectorWord);
  return i18n.t("none");
}

function lineWord(i18n: I18n, line: Change["line"]): string {
  switch (line) {
    case "without-protection":
      return i18n.t("Without protection");
    case "at-the-ear":
      return i18n.t("At the ear");
    case "protector":
      return i18n.t("Protector while worn");
  }
}

/** "At the ear: 212 days become Can’t tell yet", the most frequent first. */
function tally(
  changes: readonly Change[],
): { line: Change["line"]; after: string; count: number }[] {
  const counts = new Map<string, { line: Change["line"]; after: string; count: number }>();
  for (const { line, after } of changes) {
    const found = counts.get(`${line} ${after}`);
    if (found) found.count += 1;
    else counts.set(`${line} ${after}`, { line, after, count: 1 });
  }
  return [...counts.values()].sort((a, b) => b.count - a.count);
}

/** Asks who would change verdict, before a change is made. */
export function useChangePreview(path: string, onError?: (error: unknown) => void) {
  return useMutation({
    mutationFn: (body: unknown) => api.post(path, { body, schema: ChangePreview }),
    onError,
  });
}

/** What a change would do to verdicts, and the choice to make it. */
export function ChangeReview({
  preview,
  what,
  workerPath,
  onSave,
  onBack,
  isSaving,
  error,
}: {
  preview: z.infer<typeof ChangePreview>;
  /** What is about to be saved, in words. */
  what: ReactNode;
  /** Address of a worker's day. */
  workerPath: (workerId: string, date: string) => string;
  onSave: () => void;
  onBack: () => void;
  isSaving: boolean;
  error: unknown;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const head = useRef<HTMLHeadingElement>(null);
  useEffect(() => head.current?.focus(), []);
  const { days, workers, changes, changedDays, tooMany } = preview;
  const isWhole =
    new Set(changes.map(({ workerId, date }) => `${workerId} ${date}`)).size >= changedDays;
  const many = (count: number) => formatNumber(count, 0, locale);
  return (
    <section className="section review" aria-labelledby="review-head">
      <h2 id="review-head" ref={head} tabIndex={-1}>
        {changedDays === 0
          ? i18n.t("Nobody changes verdict")
          : i18n.t("{days, plural, one {# day changes verdict} other {# days change verdict}}", {
              days: changedDays,
            })}
      </h2>
      <p className="review-lead">
        {what}{" "}
        {i18n.t(
          "{days, plural, one {# day} other {# days}} of {workers, plural, one {# worker} other {# workers}} rest on this and are computed anew.",
          { days, workers },
        )}
        {tooMany > 0 &&
          ` ${i18n.t("{count} earlier days were not looked at here; they are computed anew as well.", { count: many(tooMany) })}`}
      </p>
      {changes.length > 0 && (
        <>
          <ul className="review-tally">
            {tally(changes).map(({ line, after, count }) => (
              <li key={`${line} ${after}`}>
                <span>{lineWord(i18n, line)}</span>
                <b>
                  {isWhole
                    ? i18n.t("{count, plural, one {# day becomes} other {# days become}} {word}", {
                        count,
                        word: stateWord(i18n, after),
                      })
                    : i18n.t(
                        "at least {count, plural, one {# day becomes} other {# days become}} {word}",
                        {
                          count,
                          word: stateWord(i18n, after),
                        },
                      )}
                </b>
              </li>
            ))}
          </ul>
          <DataTable
            caption={i18n.t("Who changes verdict")}
            rows={changes}
            rowKey={(change) => `${change.workerId} ${change.date} ${change.line}`}
            columns={[
              {
                id: "worker",
                head: i18n.t("Worker"),
                isRowHead: true,
                sortValue: (change) => change.workerName,
                cell: (change) => (
                  <TextLink to={workerPath(change.workerId, change.date)}>
                    {change.workerName}
                  </TextLink>
                ),
              },
              {
                id: "date",
                head: i18n.t("Day"),
                sortValue: (change) => change.date,
                cell: (change) => formatShortDate(change.date, locale),
              },
              {
                id: "line",
                head: i18n.t("Judged"),
                sortValue: (change) => change.line,
                cell: (change) => lineWord(i18n, change.line),
              },
              {
                id: "before",
                head: i18n.t("Now"),
                sortValue: (change) => change.before,
                cell: (change) => stateWord(i18n, change.before),
              },
              {
                id: "after",
                head: i18n.t("Then"),
                sortValue: (change) => change.after,
                cell: (change) => <b>{stateWord(i18n, change.after)}</b>,
              },
            ]}
          />
          {!isWhole && (
            <p className="table-foot">
              {i18n.t("The latest {count} changes are listed.", { count: changes.length })}
            </p>
          )}
        </>
      )}
      {changes.length === 0 && days === 0 && <Empty title={i18n.t("No day rests on this yet.")} />}
      {error !== null && error !== undefined && (
        <p className="field-error" role="alert">
          {problemText(i18n, error)}
        </p>
      )}
      <div className="review-actions">
        <Button kind="primary" isBusy={isSaving} onClick={onSave}>
          {i18n.t("Save and compute anew")}
        </Button>
        <Button onClick={onBack}>{i18n.t("Back to the form")}</Button>
      </div>
    </section>
  );
}

const POLL_MS = 1500;

/** After a change: how far the days that rest on it are computed anew. Says nothing where nothing waits. */
export function RecomputeProgress() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [mostLeft, setMostLeft] = useState(0);
  const { data } = useQuery({
    queryKey: ["recompute-progress"],
    queryFn: ({ signal }) =>
      api.get("/recompute-progress", { schema: RecomputeProgressView, signal }),
    refetchInterval: (query) => ((query.state.data?.daysLeft ?? 0) > 0 ? POLL_MS : false),
    staleTime: 0,
  });
  const daysLeft = data?.daysLeft ?? 0;
  if (daysLeft > mostLeft) setMostLeft(daysLeft);
  if (mostLeft === 0) return null;
  const done = mostLeft - daysLeft;
  return (
    <div className="recompute">
      <Status>
        {daysLeft === 0
          ? i18n.t("All days are computed anew.")
          : i18n.t("{done} of {all} days are computed anew. You may leave this page.", {
              done: formatNumber(done, 0, locale),
              all: formatNumber(mostLeft, 0, locale),
            })}
      </Status>
      <div className="recompute-line" aria-hidden="true">
        <span style={{ width: `${(100 * done) / mostLeft}%` }} />
      </div>
    </div>
  );
}
