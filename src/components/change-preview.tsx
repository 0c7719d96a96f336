import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useMutation, useQuery } from "@tanstack/react-query";
import { type ReactNode, useEffect, useRef, useState } from "react";
import type { z } from "zod";
import type { ProtectorWord, Verdict as VerdictCode } from "../../shared/acoustics/types";
import { formatShortDate } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import { startsSentence } from "../../shared/format/words";
import {
  type ChangePreview,
  RecomputeProgress as RecomputeProgressView,
} from "../../shared/schemas/site";
import { api, type ReplySchema } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { Button } from "./button";
import { DataTable } from "./data-table";
import { Empty } from "./empty";
import { FormProblem } from "./form-problem";
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

/** A verdict, a word for a protector, or that there is none. */
export function stateWord(i18n: I18n, state: string): string {
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

const changeKey = ({ workerId, line, before, after }: Change) =>
  `${workerId} ${line} ${before} ${after}`;

/** Asks who would change verdict, before a change is made. */
export function useChangePreview<View>(
  path: string,
  schema: ReplySchema<View>,
  onError?: (error: unknown) => void,
) {
  const running = useRef<AbortController | null>(null);
  const preview = useMutation({
    mutationFn: (body: unknown) => {
      running.current = new AbortController();
      return api.post(path, { body, schema, signal: running.current.signal });
    },
    onError,
  });
  useEffect(() => () => running.current?.abort(), []);
  return {
    ...preview,
    /** Nothing is stored by a look: it can be left at any time. */
    stop() {
      // Detached first: what was given up is no error.
      preview.reset();
      running.current?.abort();
    },
  };
}

/** Days on record that change verdict, by worker; the gravest first. */
export function ChangesTable({
  preview: { changes, changesCount },
  workerPath,
}: {
  preview: Pick<z.infer<typeof ChangePreview>, "changes" | "changesCount">;
  /** Address of a worker's day. */
  workerPath: (workerId: string, date: string) => string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const many = (count: number) => formatNumber(count, 0, locale);
  return (
    <>
      <DataTable<Change>
        caption={i18n.t("Who changes verdict")}
        rows={changes}
        rowKey={changeKey}
        columns={[
          {
            id: "worker",
            head: i18n.t("Worker"),
            isRowHead: true,
            sortValue: (row) => row.workerName,
            cell: (row) => (
              <TextLink to={workerPath(row.workerId, row.lastDate)}>{row.workerName}</TextLink>
            ),
          },
          {
            id: "line",
            head: i18n.t("Judged"),
            sortValue: (row) => row.line,
            cell: (row) => lineWord(i18n, row.line),
          },
          {
            id: "before",
            head: i18n.t("Now"),
            sortValue: (row) => row.before,
            cell: (row) => stateWord(i18n, row.before),
          },
          {
            id: "after",
            head: i18n.t("Then"),
            sortValue: (row) => row.after,
            cell: (row) => <b>{stateWord(i18n, row.after)}</b>,
          },
          {
            id: "days",
            head: i18n.t("Days"),
            kind: "figure",
            sortValue: (row) => row.days,
            cell: (row) => many(row.days),
          },
          {
            id: "dates",
            head: i18n.t("From, to"),
            sortValue: (row) => row.lastDate,
            cell: (row) =>
              row.firstDate === row.lastDate
                ? formatShortDate(row.lastDate, locale)
                : i18n.t("{from} to {to}", {
                    from: formatShortDate(row.firstDate, locale),
                    to: formatShortDate(row.lastDate, locale),
                  }),
          },
        ]}
      />
      {changesCount > changes.length && (
        <p className="table-foot">
          {i18n.t("{count} of {all} such changes are listed, the gravest first.", {
            count: many(changes.length),
            all: many(changesCount),
          })}
        </p>
      )}
    </>
  );
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
  const { days, workers, changes, changedDays, overDays, cantTellDays, tally, people, tooMany } =
    preview;
  const many = (count: number) => formatNumber(count, 0, locale);
  const isLowerBound = tooMany > 0;
  const changing =
    changedDays === 0
      ? i18n.t("Nobody changes verdict")
      : i18n.t("{days, plural, one {# day changes verdict} other {{figure} days change verdict}}", {
          days: changedDays,
          figure: many(changedDays),
        });
  const becoming = (count: number, word: string) =>
    isLowerBound
      ? i18n.t("at least {days, plural, one {# day becomes} other {{figure} days become}} {word}", {
          days: count,
          figure: many(count),
          word,
        })
      : i18n.t("{days, plural, one {# day becomes} other {{figure} days become}} {word}", {
          days: count,
          figure: many(count),
          word,
        });
  // Who comes over a limit is said first, then where it can't be told any more, then all the rest.
  const gravest = [
    ...(overDays > 0 ? [becoming(overDays, verdictWord(i18n, "over"))] : []),
    ...(cantTellDays > 0 ? [becoming(cantTellDays, verdictWord(i18n, "cant-tell-yet"))] : []),
  ];
  const linesDays = tally.reduce((sum, line) => sum + line.days, 0);
  const actions = (
    <>
      <FormProblem error={error} />
      <div className="review-actions">
        <Button kind="primary" isBusy={isSaving} onClick={onSave}>
          {i18n.t("Save and compute anew")}
        </Button>
        <Button onClick={onBack}>{i18n.t("Back to the form")}</Button>
      </div>
    </>
  );
  return (
    <section className="section review" aria-labelledby="review-head">
      <h2 id="review-head" ref={head} tabIndex={-1}>
        {gravest.length > 0 ? startsSentence(gravest.join(", ")) : changing}
      </h2>
      <p className="review-lead">
        {what}{" "}
        {i18n.t(
          "{days, plural, one {# day} other {{figure} days}} of {workers, plural, one {# worker} other {# workers}} rest on this and are computed anew.",
          { days, workers, figure: many(days) },
        )}{" "}
        {i18n.t(
          "{people, plural, =0 {Nobody is told by mail.} one {# person will be told by mail.} other {{figure} people will be told by mail.}}",
          { people, figure: many(people) },
        )}
        {tooMany > 0 &&
          ` ${i18n.t("{count} earlier days were not looked at here; they are computed anew as well.", { count: many(tooMany) })}`}
      </p>
      {changes.length > 0 && (
        <>
          <ul className="review-tally">
            {tally.map(({ line, after, days: count }) => (
              <li key={`${line} ${after}`}>
                <span>{lineWord(i18n, line)}</span>
                <b>{becoming(count, stateWord(i18n, after))}</b>
              </li>
            ))}
          </ul>
          {linesDays > changedDays && (
            <p className="review-lead">
              {i18n.t("A day that changes in more than one line is counted in each.")}
            </p>
          )}
          {actions}
          <h3 className="mt-7 mb-1">{i18n.t("Who changes verdict")}</h3>
          <ChangesTable preview={preview} workerPath={workerPath} />
        </>
      )}
      {changes.length === 0 && days === 0 && <Empty title={i18n.t("No day rests on this yet.")} />}
      {changes.length === 0 && actions}
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
