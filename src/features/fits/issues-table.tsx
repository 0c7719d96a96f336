import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { IssueEnd, type IssueView } from "../../../shared/schemas/fit";
import { Button } from "../../components/button";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import {
  DateField,
  Form,
  FormActions,
  RadioGroup,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton, TextLink } from "../../components/link";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { endedWord } from "./fit-words";
import { useAcknowledgeIssue, useEndIssue } from "./queries";

/** What was handed out, with what became of it. */
export function IssuesTable({
  hidesWorker = false,
  today,
  ...table
}: {
  hidesWorker?: boolean;
  today: string;
} & Pick<DataTableProps<IssueView>, "rows" | "state" | "error" | "onRetry" | "more" | "empty">) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [endingId, setEndingId] = useState<string | null>(null);
  const acknowledge = useAcknowledgeIssue();
  const ending = table.rows.find(({ id }) => id === endingId);
  const canAct = table.rows.some(({ can }) => can.end || can.acknowledge);
  const columns: DataColumn<IssueView>[] = [
    ...(hidesWorker
      ? []
      : [
          {
            id: "worker",
            head: i18n.t("Worker"),
            isRowHead: true,
            cell: ({ workerId, workerName, employeeNumber }) => (
              <span className="two-lines">
                <TextLink className="is-quiet is-name" to={paths.worker(workerId)}>
                  {workerName}
                </TextLink>
                <span className="beneath">{employeeNumber}</span>
              </span>
            ),
          } satisfies DataColumn<IssueView>,
        ]),
    {
      id: "device",
      head: i18n.t("Protector"),
      isRowHead: hidesWorker,
      cell: ({ modelId, modelName, size, useName }) => (
        <span className="two-lines">
          <TextLink className="is-quiet is-name" to={paths.protector(modelId)}>
            {modelName}
          </TextLink>
          <span className="beneath">
            {[
              size !== null && i18n.t("size {size}", { size }),
              useName ?? i18n.t("everywhere in noise"),
            ]
              .filter(Boolean)
              .join(", ")}
          </span>
        </span>
      ),
    },
    {
      id: "issued",
      head: i18n.t("Issued"),
      cell: ({ issuedOn, authorName }) => (
        <span className="two-lines">
          {formatShortDate(issuedOn, locale)}
          {authorName && (
            <span className="beneath">{i18n.t("by {name}", { name: authorName })}</span>
          )}
        </span>
      ),
    },
    {
      id: "par",
      head: i18n.t("PAR"),
      unit: "dB",
      kind: "figure",
      cell: ({ parDb }) => formatLevel(parDb, locale),
    },
    {
      id: "offered",
      head: i18n.t("Offered"),
      cell: ({ offered, reason }) => (
        <span className="two-lines">
          {offered.join(", ")}
          {reason && <span className="beneath">{reason}</span>}
        </span>
      ),
    },
    {
      id: "said",
      head: i18n.t("Instruction, receipt"),
      cell: ({ wasInstructed, acknowledgedHow }) => (
        <span className="two-lines">
          <span className={wasInstructed ? undefined : "is-fault"}>
            {wasInstructed ? i18n.t("shown how") : i18n.t("not shown how")}
          </span>
          <span className="beneath">
            {acknowledgedHow === null
              ? i18n.t("not acknowledged yet")
              : acknowledgedHow === "in-person"
                ? i18n.t("acknowledged in person")
                : i18n.t("acknowledged by the worker")}
          </span>
        </span>
      ),
    },
    {
      id: "ended",
      head: i18n.t("Now"),
      cell: ({ endedOn, endedHow }): ReactNode =>
        endedOn === null || endedHow === null
          ? i18n.t("with the worker")
          : `${endedWord(i18n, endedHow)}, ${formatShortDate(endedOn, locale)}`,
    },
    ...(canAct
      ? [
          {
            id: "action",
            head: <span className="sr-only">{i18n.t("Change")}</span>,
            kind: "right",
            cell: (row: IssueView) => (
              <span className="note-links is-end">
                {row.can.acknowledge && (
                  <TextButton
                    aria-label={i18n.t("Acknowledged: {protector}", { protector: row.modelName })}
                    onClick={() => acknowledge.mutate(row)}
                  >
                    {i18n.t("Acknowledged")}
                  </TextButton>
                )}
                {row.can.end && (
                  <TextButton
                    aria-label={i18n.t("End: {protector}", { protector: row.modelName })}
                    onClick={() => setEndingId(row.id)}
                  >
                    {i18n.t("End")}
                  </TextButton>
                )}
              </span>
            ),
          } satisfies DataColumn<IssueView>,
        ]
      : []),
  ];
  return (
    <>
      <DataTable<IssueView>
        {...table}
        caption={i18n.t("Devices handed out, the latest first")}
        rowKey={({ id }) => id}
        columns={columns}
        isTwoLine
        stacksOnPhone
      />
      <FormProblem error={acknowledge.error} />
      {ending && (
        <EndForm key={ending.id} issue={ending} today={today} onDone={() => setEndingId(null)} />
      )}
    </>
  );
}

function EndForm({
  issue,
  today,
  onDone,
}: {
  issue: IssueView;
  today: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const end = useEndIssue(issue);
  const changeKey = useChangeKey();
  const form = useSchemaForm(IssueEnd, { defaultValues: { endedOn: today, how: "returned" } });
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("End of the issue")}
      onSubmit={form.handleSubmit((body) =>
        end.mutate(
          { body, key: changeKey.keyFor(body) },
          { onSuccess: onDone, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <RadioGroup
        form={form}
        name="how"
        label={issue.modelName}
        choices={(["returned", "replaced", "damaged", "lost"] as const).map((how) => ({
          value: how,
          label: endedWord(i18n, how),
          note:
            how === "returned"
              ? i18n.t(
                  "Goes back into the stock; the assignment ends. Issue another to whoever still works in noise.",
                )
              : how === "replaced"
                ? i18n.t("Another of the same takes its place; the assignment stays.")
                : i18n.t("The assignment ends; issue another so that nobody is without."),
        }))}
      />
      <DateField form={form} name="endedOn" label={i18n.t("Date")} />
      <FormProblem error={end.error} />
      <FormActions>
        <SubmitButton isBusy={end.isPending}>{i18n.t("End it")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
