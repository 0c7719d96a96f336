import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import { formatShortDate } from "../../../shared/format/date";
import { formatShare } from "../../../shared/format/dose";
import { isolate } from "../../../shared/i18n/isolate";
import { WearingRoundStrike, type WearingRoundView } from "../../../shared/schemas/wearing";
import { Button } from "../../components/button";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton, TextLink } from "../../components/link";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { saidWords } from "../../lib/wearing-answers";
import { paths } from "../../paths";
import { useStrikeRound } from "./queries";

/** Rounds with what they saw; the looks of one open beneath. */
export function RoundsTable({
  showsSite,
  ...table
}: { showsSite: boolean } & Pick<
  DataTableProps<WearingRoundView>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [openId, setOpenId] = useState<string | null>(null);
  const open = table.rows.find(({ id }) => id === openId);
  const columns: DataColumn<WearingRoundView>[] = [
    {
      id: "date",
      head: i18n.t("Date"),
      isRowHead: true,
      cell: ({ seenOn, siteName }) => (
        <span className="two-lines">
          {formatShortDate(seenOn, locale)}
          {showsSite && <span className="beneath">{siteName}</span>}
        </span>
      ),
    },
    {
      id: "source",
      head: i18n.t("Where it comes from"),
      cell: ({ source, authorName }) => (
        <span className="two-lines">
          {source === "round"
            ? i18n.t("Seen on a round")
            : i18n.t("Told by the workers themselves")}
          {authorName && (
            <span className="beneath">
              {i18n.t("entered by {name}", { name: isolate(authorName) })}
            </span>
          )}
        </span>
      ),
    },
    {
      id: "note",
      head: i18n.t("Note"),
      cell: ({ note, struckReason, looks }): ReactNode =>
        struckReason === null ? (
          looks.some(({ isReplaced }) => isReplaced) ? (
            <span className="two-lines">
              <b>
                {looks.every(({ isReplaced }) => isReplaced)
                  ? i18n.t("Replaced by a later report, counts nowhere")
                  : i18n.t("Replaced in part by a later report")}
              </b>
              <span className="beneath">{note}</span>
            </span>
          ) : (
            note
          )
        ) : (
          <span className="two-lines">
            <b>{i18n.t("Struck, counts nowhere")}</b>
            <span className="beneath">{struckReason}</span>
          </span>
        ),
    },
    {
      id: "worn",
      head: i18n.t("Worn"),
      kind: "right",
      cell: ({ source, wornCount, seenCount, looks }) => (
        <span className="two-lines">
          {source === "round"
            ? i18n.t("{worn} of {seen} looks", { worn: wornCount, seen: seenCount })
            : looks.length === 1
              ? saidWords(i18n, { wornCount, seenCount })
              : i18n.t("said in {count} answers", { count: looks.length })}
          <span className="beneath">
            {source === "own-report" && i18n.t("own report, nobody looked").concat(", ")}
            {formatShare((100 * wornCount) / seenCount, locale)}
          </span>
        </span>
      ),
    },
    {
      id: "looks",
      head: <span className="sr-only">{i18n.t("Looks")}</span>,
      kind: "right",
      cell: ({ id, source, seenOn }) => (
        <TextButton
          aria-expanded={id === openId}
          aria-label={
            source === "round"
              ? i18n.t("Looks of {date}", { date: formatShortDate(seenOn, locale) })
              : i18n.t("Own report of {date}", { date: formatShortDate(seenOn, locale) })
          }
          onClick={() => setOpenId(id === openId ? null : id)}
        >
          {id === openId
            ? i18n.t("Close")
            : source === "round"
              ? i18n.t("Looks")
              : i18n.t("Answers")}
        </TextButton>
      ),
    },
  ];
  return (
    <>
      <DataTable<WearingRoundView>
        {...table}
        caption={i18n.t("Wearing rounds, the latest first")}
        rowKey={({ id }) => id}
        columns={columns}
        isSelected={({ id }) => id === openId}
        isTwoLine
        stacksOnPhone
      />
      {open && <RoundLooks key={open.id} round={open} />}
    </>
  );
}

function RoundLooks({ round }: { round: WearingRoundView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [isStriking, setStriking] = useState(false);
  const date = formatShortDate(round.seenOn, locale);
  const heading =
    round.source === "round"
      ? i18n.t("Looks of {date}", { date })
      : i18n.t("Own report of {date}", { date });
  return (
    <section className="section" aria-labelledby="round-looks">
      <h2 id="round-looks">{heading}</h2>
      {round.note !== "" && round.struckReason !== null && <p>{round.note}</p>}
      <DataTable<WearingRoundView["looks"][number]>
        caption={heading}
        rows={round.looks}
        rowKey={({ workerId, taskId }) => `${workerId} ${taskId}`}
        columns={[
          {
            id: "worker",
            head: i18n.t("Worker"),
            isRowHead: true,
            cell: ({ workerId, workerName }) => (
              <TextLink to={paths.worker(workerId)}>{isolate(workerName)}</TextLink>
            ),
          },
          { id: "task", head: i18n.t("Task"), cell: ({ taskName }) => taskName },
          {
            id: "worn",
            head: i18n.t("Worn"),
            kind: "right",
            cell: ({ wornCount, seenCount, isReplaced }) => (
              <span className="two-lines">
                {round.source === "round"
                  ? i18n.t("{worn} of {seen} looks", { worn: wornCount, seen: seenCount })
                  : saidWords(i18n, { wornCount, seenCount })}
                {isReplaced && (
                  <span className="beneath">{i18n.t("replaced by a later report")}</span>
                )}
              </span>
            ),
          },
        ]}
      />
      {round.can.strike &&
        round.struckReason === null &&
        (isStriking ? (
          <StrikeForm round={round} onLeave={() => setStriking(false)} />
        ) : (
          <p className="after-table">
            <Button onClick={() => setStriking(true)}>{i18n.t("Strike this round")}</Button>
          </p>
        ))}
    </section>
  );
}

function StrikeForm({ round, onLeave }: { round: WearingRoundView; onLeave: () => void }) {
  const { i18n } = useLingui();
  const strike = useStrikeRound(round);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(WearingRoundStrike, {
    keepAs: round.id,
    defaultValues: { reason: "" },
  });
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("Strike this round")}
      onSubmit={form.handleSubmit((body) => {
        if (!begin()) return;
        strike.mutate(
          { body, key: changeKey.keyFor(body) },
          { onSuccess: onLeave, onError: showIssuesOn(form, i18n), onSettled: end },
        );
      })}
    >
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Reason")}
        rows={2}
        note={i18n.t(
          "The round stays on record and counts nowhere; the days that rest on it are worked out again.",
        )}
      />
      <FormProblem error={strike.error} />
      <FormActions>
        <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike it")}</SubmitButton>
        <Button onClick={onLeave}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
