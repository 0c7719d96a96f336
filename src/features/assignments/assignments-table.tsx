import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { z } from "zod";
import { protectorNames } from "../../../shared/findings/facts";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { AssignmentEnd, type AssignmentView } from "../../../shared/schemas/worker";
import { Button } from "../../components/button";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import {
  DateField,
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton, TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { useEndAssignment } from "./queries";

type Assignment = z.infer<typeof AssignmentView>;

/** Protectors by use; those that have ended stand beneath the ones in use. */
export function AssignmentsTable({
  rows,
  today,
  canAssign,
  onChange,
}: {
  rows: readonly Assignment[];
  today: string;
  canAssign: boolean;
  /** Another protector for the same use. */
  onChange: (assignment: Assignment) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [endingId, setEndingId] = useState<string | null>(null);
  const isOver = ({ toDate }: Assignment) => toDate !== null && toDate < today;
  const sorted = rows.toSorted(
    (a, b) => Number(isOver(a)) - Number(isOver(b)) || (a.fromDate < b.fromDate ? 1 : -1),
  );
  const ending = rows.find(({ id }) => id === endingId);
  const columns: DataColumn<Assignment>[] = [
    {
      id: "use",
      head: i18n.t("Worn"),
      isRowHead: true,
      cell: ({ use, useName }) =>
        use === "everywhere"
          ? i18n.t("everywhere in noise")
          : use === "task"
            ? i18n.t("in the task {name}", { name: useName ?? "" })
            : i18n.t("in the area {name}", { name: useName ?? "" }),
    },
    {
      id: "protector",
      head: i18n.t("Protector"),
      cell: ({ innerModelId, innerName, outerName, size, audioDb }) => (
        <span className="two-lines">
          <TextLink className="is-quiet" to={paths.protector(innerModelId)}>
            {protectorNames(i18n, outerName === null ? [innerName] : [innerName, outerName])}
          </TextLink>
          {(size !== null || audioDb !== null) && (
            <span className="beneath">
              {[
                size !== null && i18n.t("size {size}", { size }),
                audioDb !== null &&
                  i18n.t("radio {level} dB(A)", { level: formatLevel(audioDb, locale) }),
              ]
                .filter(Boolean)
                .join(", ")}
            </span>
          )}
        </span>
      ),
    },
    { id: "from", head: i18n.t("From"), cell: ({ fromDate }) => formatShortDate(fromDate, locale) },
    {
      id: "to",
      head: i18n.t("Until"),
      cell: ({ toDate }) => (toDate ? formatShortDate(toDate, locale) : i18n.t("now")),
    },
    ...(canAssign
      ? [
          {
            id: "change",
            head: <span className="sr-only">{i18n.t("Change")}</span>,
            kind: "right",
            cell: (assignment: Assignment) =>
              isOver(assignment) ? null : (
                <span className="note-links is-end">
                  <TextButton onClick={() => onChange(assignment)}>{i18n.t("Change")}</TextButton>
                  <TextButton onClick={() => setEndingId(assignment.id)}>
                    {i18n.t("End")}
                  </TextButton>
                </span>
              ),
          } satisfies DataColumn<Assignment>,
        ]
      : []),
  ];
  return (
    <>
      <DataTable
        caption={i18n.t("Protectors, with use and dates")}
        columns={columns}
        rows={sorted}
        rowKey={({ id }) => id}
        groupOf={(row) =>
          isOver(row)
            ? { key: "over", label: i18n.t("No longer") }
            : { key: "now", label: i18n.t("In use") }
        }
        empty={
          <Empty title={i18n.t("No protector is assigned.")}>
            {canAssign ? i18n.t("Assign one below.") : null}
          </Empty>
        }
      />
      {ending && (
        <EndForm
          key={ending.id}
          assignment={ending}
          today={today}
          onDone={() => setEndingId(null)}
        />
      )}
    </>
  );
}

function EndForm({
  assignment,
  today,
  onDone,
}: {
  assignment: Assignment;
  today: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const end = useEndAssignment(assignment);
  const form = useSchemaForm(AssignmentEnd, {
    keepAs: assignment.id,
    defaultValues: { toDate: today < assignment.fromDate ? assignment.fromDate : today },
  });
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("End the assignment")}
      onSubmit={form.handleSubmit(({ toDate }) =>
        end.mutate(toDate, { onSuccess: onDone, onError: showIssuesOn(form, i18n) }),
      )}
    >
      <DateField
        form={form}
        name="toDate"
        label={i18n.t("Last day with {protector}", { protector: assignment.innerName })}
        note={i18n.t("Days after it are judged again without the protector.")}
      />
      <FormProblem error={end.error} />
      <FormActions>
        <SubmitButton isBusy={end.isPending}>{i18n.t("End it")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
