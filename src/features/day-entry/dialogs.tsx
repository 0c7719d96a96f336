import { useLingui } from "@lingui/react";
import { useQueries } from "@tanstack/react-query";
import { useMemo, useState } from "react";
import { z } from "zod";
import { formatTime } from "../../../shared/format/date";
import { formatMinutes } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { Reason } from "../../../shared/schemas/common";
import type { EntryNotices } from "../../../shared/schemas/notice";
import type { GridRow } from "../../../shared/schemas/shift";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
import { Failed } from "../../components/failed";
import { Form, TextAreaField, useSchemaForm } from "../../components/form";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import { editText } from "./cells";
import type { GridColumn } from "./columns";
import { type Difference, differences, mergeRow, savedRow } from "./conflicts";
import type { RowDraft } from "./draft";
import type { RowEvaluation } from "./evaluate-rows";
import { dayEntryQueries } from "./queries";
import type { DayEntryState } from "./use-day-entry";
import { cellName, unaccountedWords } from "./words";

/** Saved shifts change: why, once for all of them. */
export function ReasonDialog({
  count,
  onReason,
  onClose,
}: {
  count: number;
  onReason: (reason: string) => void;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const form = useSchemaForm(z.object({ reason: Reason }), { defaultValues: { reason: "" } });
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t(
        "{count, plural, one {Why does # saved shift change?} other {Why do # saved shifts change?}}",
        { count },
      )}
      lead={i18n.t("The earlier revision stays; the reason stands beside the new one.")}
      actions={
        <>
          <Button type="submit" form="reason-form" kind="primary">
            {i18n.t("Save with this reason")}
          </Button>
          <Button onClick={onClose}>{i18n.t("Back to the grid")}</Button>
        </>
      }
    >
      <Form
        id="reason-form"
        labels="above"
        onSubmit={form.handleSubmit(({ reason }) => onReason(reason))}
      >
        <TextAreaField form={form} name="reason" label={i18n.t("Reason")} rows={3} />
      </Form>
    </Dialog>
  );
}

/** Shifts that have not ended: whether they are recorded ahead of that. */
export function OpenEndsDialog({
  names,
  onConfirm,
  onClose,
}: {
  names: readonly string[];
  onConfirm: () => void;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t(
        "{count, plural, one {# shift is not over yet} other {# shifts are not over yet}}",
        { count: names.length },
      )}
      lead={i18n.t(
        "A shift is recorded as it was. Save it ahead of its end only if it will surely end as it stands here.",
      )}
      actions={
        <>
          <Button kind="primary" onClick={onConfirm}>
            {i18n.t("It will end so: save")}
          </Button>
          <Button onClick={onClose}>{i18n.t("Back to the grid")}</Button>
        </>
      }
    >
      <p>{names.join(", ")}.</p>
    </Dialog>
  );
}

/** Two people saved one shift: field by field, what stands. */
export function ConflictDialog({
  entry,
  row,
  gridRow,
  columns,
  taskName,
  onChosen,
  onClose,
}: {
  entry: DayEntryState;
  row: RowDraft;
  gridRow: GridRow;
  columns: readonly GridColumn[];
  taskName: (id: string) => string;
  onChosen: (row: RowDraft) => void;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const words = unaccountedWords(i18n);
  const { view, evaluate } = entry;
  const { saved } = gridRow;
  const theirs = useMemo(
    () => (saved ? savedRow(gridRow, saved, view) : null),
    [gridRow, saved, view],
  );
  const taskIds = columns.flatMap(({ task }) => task?.id ?? []);
  const differing = theirs ? differences(row, theirs, taskIds) : [];
  const [taken, setTaken] = useState<ReadonlySet<Difference["cell"]>>(new Set());
  const name = gridRow.worker.name;

  if (!saved || !theirs) {
    return (
      <Dialog
        isOpen
        onClose={onClose}
        title={i18n.t("Someone struck this shift before you")}
        lead={i18n.t("{name}: it stands no longer. Nothing of yours is lost.", { name })}
        actions={
          <>
            <Button
              kind="primary"
              onClick={() => onChosen({ ...row, base: null, isTouched: true })}
            >
              {i18n.t("Keep mine as a new shift")}
            </Button>
            <Button onClick={onClose}>{i18n.t("Decide later")}</Button>
          </>
        }
      />
    );
  }
  const chosen = mergeRow(row, theirs, taken);
  const atEar = (one: RowDraft) => evaluate(one).summary;
  const figure = (one: RowDraft) =>
    formatLevel(atEar(one)?.atEarDb ?? null, locale, atEar(one)?.atEarBound);
  const text = (value: Difference["yours"]) =>
    (typeof value === "string" ? value : editText(value, locale, words)) || "–";
  const chosenSummary = atEar(chosen);
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t("Someone saved this shift before you")}
      lead={i18n.t("{author}, {time}. Nothing of yours is lost; choose what stands.", {
        author: saved.authorName ?? i18n.t("Somebody"),
        time: formatTime(saved.savedAt, view.crew.timeZone),
      })}
      actions={
        <>
          {taken.size > 0 && (
            <Button kind="primary" onClick={() => onChosen(chosen)}>
              {i18n.t("Save as chosen, revision {revision}", { revision: saved.revision + 1 })}
            </Button>
          )}
          <Button
            kind={taken.size > 0 ? "plain" : "primary"}
            onClick={() => onChosen(mergeRow(row, theirs, new Set()))}
          >
            {i18n.t("Keep revision {revision}", { revision: saved.revision })}
          </Button>
        </>
      }
    >
      <table className="choice-table">
        <thead>
          <tr>
            <th scope="col">{name}</th>
            <th scope="col">{i18n.t("Yours")}</th>
            <th scope="col">
              {i18n.t("Saved, revision {revision}", { revision: saved.revision })}
            </th>
          </tr>
        </thead>
        <tbody>
          {differing.map(({ cell, yours, saved: kept }) => {
            const label = cell === "note" ? i18n.t("Note") : cellName(i18n, cell, taskName);
            const isMine = taken.has(cell);
            const choose = (mine: boolean) => {
              const next = new Set(taken);
              if (mine) next.add(cell);
              else next.delete(cell);
              setTaken(next);
            };
            return (
              <tr key={cell}>
                <th scope="row">{label}</th>
                {[true, false].map((mine) => (
                  <td key={String(mine)}>
                    <label className="choice">
                      <input
                        type="radio"
                        name={`choice-${cell}`}
                        checked={isMine === mine}
                        onChange={() => choose(mine)}
                        aria-label={
                          mine
                            ? i18n.t("{label}: yours, {value}", { label, value: text(yours) })
                            : i18n.t("{label}: saved, {value}", { label, value: text(kept) })
                        }
                      />
                      <span className={isMine === mine ? "mono is-chosen" : "mono"}>
                        {text(mine ? yours : kept)}
                      </span>
                    </label>
                  </td>
                ))}
              </tr>
            );
          })}
          <tr>
            <th scope="row">{i18n.t("At the ear, dB")}</th>
            <td className="mono">{figure(row)}</td>
            <td className="mono">{figure(theirs)}</td>
          </tr>
          <tr>
            <th scope="row">
              <b>{i18n.t("As chosen")}</b>
            </th>
            <td colSpan={2}>
              <b className="mono">{figure(chosen)}</b>{" "}
              {chosenSummary && <Verdict verdict={chosenSummary.verdictAtEar} />}
            </td>
          </tr>
        </tbody>
      </table>
    </Dialog>
  );
}

/** A look at every row that was only filled in, before all of them are confirmed. */
export function ConfirmDialog({
  rows,
  nameOf,
  onConfirm,
  onClose,
}: {
  rows: readonly RowEvaluation[];
  nameOf: (workerId: string) => string;
  onConfirm: () => void;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t(
        "{count, plural, one {Confirm # row as filled in?} other {Confirm # rows as filled in?}}",
        { count: rows.length },
      )}
      lead={i18n.t("Only roster and nominal day speak for them so far. Look through them once.")}
      actions={
        <>
          <Button kind="primary" onClick={onConfirm}>
            {i18n.t("They worked as filled in")}
          </Button>
          <Button onClick={onClose}>{i18n.t("Back to the grid")}</Button>
        </>
      }
    >
      <table className="choice-table is-list">
        <thead>
          <tr>
            <th scope="col">{i18n.t("Worker")}</th>
            <th scope="col">{i18n.t("Start")}</th>
            <th scope="col">{i18n.t("Sum, min")}</th>
            <th scope="col">{i18n.t("At the ear, dB")}</th>
          </tr>
        </thead>
        <tbody>
          {rows.map(({ row, sumMin, values, summary, unaccountedMin }) => (
            <tr key={row.workerId}>
              <th scope="row">{nameOf(row.workerId)}</th>
              <td className="mono">{values?.localStart}</td>
              <td className="mono">
                {formatMinutes(sumMin, locale)}
                {unaccountedMin !== null && unaccountedMin >= 0.5 && (
                  <> + {formatMinutes(unaccountedMin, locale)}</>
                )}
              </td>
              <td>
                <span className="mono">
                  {formatLevel(summary?.atEarDb ?? null, locale, summary?.atEarBound)}
                </span>{" "}
                {summary && <Verdict verdict={summary.verdictAtEar} isQuiet />}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </Dialog>
  );
}

/** Whom a saving will tell, and in which words. */
export function LookDialog({
  notices,
  timeZone,
  onClose,
}: {
  notices: EntryNotices;
  timeZone: string;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const texts = useQueries({
    queries: notices.notices.map(({ id }) => dayEntryQueries.noticeText(id)),
  });
  const audience = (of: EntryNotices["notices"][number]["audience"]) =>
    of === "worker"
      ? i18n.t("worker")
      : of === "supervisor"
        ? i18n.t("supervisor")
        : i18n.t("safety officer");
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t("{count, plural, one {# person will be told} other {# people will be told}}", {
        count: notices.people,
      })}
      lead={
        notices.notBefore
          ? i18n.t("At {time}, unless you hold it.", {
              time: formatTime(notices.notBefore, timeZone),
            })
          : undefined
      }
      actions={<Button onClick={onClose}>{i18n.t("Close")}</Button>}
    >
      {notices.notices.map((notice, index) => {
        const text = texts[index];
        return (
          <section key={notice.id} className="mail">
            <h3>
              {notice.recipientName}, {audience(notice.audience)}
            </h3>
            {text?.data && (
              <>
                <p>
                  <b>{text.data.subject}</b>
                </p>
                <p className="mail-text">{text.data.text}</p>
              </>
            )}
            {text?.isPending && <span className="loading-line" />}
            {text?.isError && <Failed error={text.error} onRetry={() => void text.refetch()} />}
          </section>
        );
      })}
    </Dialog>
  );
}
