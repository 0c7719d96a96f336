import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useEffect, useRef } from "react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { withinSentence } from "../../../shared/format/words";
import { isolate } from "../../../shared/i18n/isolate";
import type { GivingPreview } from "../../../shared/schemas/choice";
import { Button } from "../../components/button";
import { ChangesTable, stateWord } from "../../components/change-preview";
import { DataTable } from "../../components/data-table";
import { FormProblem } from "../../components/form-problem";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

type Change = GivingPreview["changes"][number];

const NONE = "none";
const LINES = ["verdictAtEar", "word"] as const;
type Line = (typeof LINES)[number];

/** How many go from which state to which, per line, in the order of the list: the gravest first. */
export function countFromTo(
  changes: readonly Change[],
): { line: Line; before: string; after: string; count: number }[] {
  return LINES.flatMap((line) => {
    const counts = new Map<string, { line: Line; before: string; after: string; count: number }>();
    for (const { before, after } of changes) {
      if (before[line] === after[line]) continue;
      const [from, to] = [before[line] ?? NONE, after[line] ?? NONE];
      const counted = counts.get(`${from} ${to}`);
      if (counted) counted.count += 1;
      else counts.set(`${from} ${to}`, { line, before: from, after: to, count: 1 });
    }
    return [...counts.values()];
  });
}

const lineWord = (i18n: I18n, line: Line): string =>
  line === "word" ? i18n.t("Protector while worn") : i18n.t("At the ear");

/** Whom a protector would move to another verdict, whether the stock goes round, and the choice to give it. */
export function GiveReview({
  preview: { changes, daysCount, withoutDayCount, recorded, stock },
  protector,
  count,
  fromDate,
  isSaving,
  error,
  onGive,
  onBack,
}: {
  preview: GivingPreview;
  protector: string;
  /** To how many. */
  count: number;
  fromDate: string;
  isSaving: boolean;
  error: unknown;
  onGive: () => void;
  onBack: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const head = useRef<HTMLHeadingElement>(null);
  useEffect(() => head.current?.focus(), []);
  const short = stock.filter(
    ({ neededCount, stockCount }) => stockCount !== null && stockCount < neededCount,
  );
  const tally = countFromTo(changes);
  const dayCell = (line: Line) => {
    const cell = ({ verdictAtEar, word, atEarDb }: Change["before"]) =>
      line === "word"
        ? stateWord(i18n, word ?? NONE)
        : `${stateWord(i18n, verdictAtEar)}${atEarDb === null ? "" : ` ${formatLevel(atEarDb, locale)}`}`;
    return cell;
  };
  const bothOf = (day: Change["before"]) => (
    <span className="two-lines">
      {dayCell("verdictAtEar")(day)}
      <span className="beneath">{dayCell("word")(day)}</span>
    </span>
  );
  return (
    <section className="review" aria-labelledby="review-head">
      <h3 id="review-head" ref={head} tabIndex={-1}>
        {changes.length === 0
          ? i18n.t("Nobody’s usual day changes verdict")
          : i18n.t(
              "{count, plural, one {The usual day of # person changes} other {The usual days of # people change}} verdict or word",
              { count: changes.length },
            )}
      </h3>
      <p className="review-lead">
        {i18n.t(
          "{protector} for {count, plural, one {# person} other {# people}} from {date}. Looked at: {days, plural, one {# usual day} other {# usual days}}, by the nominal day of the job.",
          { protector, count, date: formatShortDate(fromDate, locale), days: daysCount },
        )}
        {withoutDayCount > 0 &&
          ` ${i18n.t(
            "{count, plural, one {# person has} other {# people have}} no nominal day: of them nothing can be said beforehand.",
            { count: withoutDayCount },
          )}`}
      </p>
      {short.map(({ siteName, modelId, modelName, neededCount, assignedCount, stockCount }) => (
        <p key={`${siteName} ${modelId}`} className="review-lead">
          <b>
            {i18n.t("{needed} of {protector} to hand out at {site}, {stock} in stock.", {
              needed: neededCount,
              protector: modelName,
              site: siteName,
              stock: Math.max(stockCount ?? 0, 0),
            })}
          </b>{" "}
          {assignedCount > 0 &&
            `${i18n.t(
              "{count, plural, one {# of them has it assigned, but not issued here.} other {# of them have it assigned, but not issued here.}}",
              { count: assignedCount },
            )} `}
          {i18n.t("It can be given all the same; who has none in hand yet has to wait for it.")}
        </p>
      ))}
      {changes.length > 0 && (
        <ul className="review-tally">
          {LINES.map((line) => [line, tally.filter((one) => one.line === line)] as const)
            .filter(([, ofLine]) => ofLine.length > 0)
            .map(([line, ofLine]) => (
              <li key={line}>
                <span>{lineWord(i18n, line)}</span>
                <span className="review-tally-counts">
                  {ofLine.map(({ before, after, count: people }) => (
                    <b key={`${before} ${after}`}>
                      {i18n.t(
                        "{count, plural, one {# person} other {# people}} from “{before}” to “{after}”",
                        {
                          count: people,
                          before: withinSentence(stateWord(i18n, before), locale),
                          after: withinSentence(stateWord(i18n, after), locale),
                        },
                      )}
                    </b>
                  ))}
                </span>
              </li>
            ))}
        </ul>
      )}
      <FormProblem error={error} />
      <div className="review-actions">
        <Button kind="primary" isBusy={isSaving} onClick={onGive}>
          {i18n.t("Give {protector}", { protector })}
        </Button>
        <Button onClick={onBack}>{i18n.t("Back to the form")}</Button>
      </div>
      {changes.length > 0 && (
        <>
          <h4 className="mt-7 mb-1">{i18n.t("Usual days, the gravest first")}</h4>
          <DataTable<Change>
            caption={i18n.t("Usual days, the gravest first")}
            rows={changes}
            rowKey={({ workerId }) => workerId}
            isTwoLine
            columns={[
              {
                id: "worker",
                head: i18n.t("Worker"),
                isRowHead: true,
                cell: ({ workerId, workerName }) => (
                  <TextLink to={paths.worker(workerId)}>{isolate(workerName)}</TextLink>
                ),
              },
              { id: "before", head: i18n.t("Now"), cell: ({ before }) => bothOf(before) },
              { id: "after", head: i18n.t("Then"), cell: ({ after }) => <b>{bothOf(after)}</b> },
            ]}
          />
        </>
      )}
      {recorded.days > 0 && (
        <>
          <h4 className="mt-7 mb-1">
            {recorded.changedDays === 0
              ? i18n.t("Of the days on record since then none changes verdict")
              : i18n.t(
                  "{days, plural, one {# day on record since then changes} other {# days on record since then change}} verdict",
                  { days: recorded.changedDays },
                )}
          </h4>
          {recorded.changes.length > 0 && (
            <ChangesTable preview={recorded} workerPath={paths.result} />
          )}
        </>
      )}
    </section>
  );
}
