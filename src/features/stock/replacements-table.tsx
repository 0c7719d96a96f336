import { useLingui } from "@lingui/react";
import { useRef, useState } from "react";
import { formatShortDate } from "../../../shared/format/date";
import { isolate } from "../../../shared/i18n/isolate";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import { DateInput } from "../../components/date-input";
import { TextButton, TextLink } from "../../components/link";
import { ProblemIssues } from "../../components/problem-issues";
import { Status } from "../../components/status";
import { ApiError, newChangeKey } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { paths } from "../../paths";
import { type Replacement, useChangeParts } from "./queries";
import { partWord } from "./stock-words";
import { useFolded } from "./use-folded";

const keyOf = ({ issueId, part }: Replacement) => `${issueId} ${part}`;

/** Cushions and tips that want changing; an officer says that they were, for today or the date above. */
export function ReplacementsTable({
  today,
  canChange,
  ...table
}: { today: string; canChange: boolean } & Pick<
  DataTableProps<Replacement>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [changedOn, setChangedOn] = useState(today);
  const [said, setSaid] = useState("");
  const change = useChangeParts();
  const { begin, end } = useOneAtATime();
  // What was lost on the way goes again under its own key.
  const keys = useRef(new Map<string, string>());
  const folded = useFolded(table.rows);

  function enter(row: Replacement) {
    if (!begin()) return;
    const name = `${keyOf(row)} ${changedOn}`;
    const key = keys.current.get(name) ?? newChangeKey();
    keys.current.set(name, key);
    change.mutate(
      { issueId: row.issueId, body: { part: row.part, changedOn }, key },
      {
        onSuccess: () => {
          keys.current.delete(name);
          setSaid(
            i18n.t("{part} of {name} entered as changed on {date}.", {
              part: partWord(i18n, row.part),
              name: isolate(row.workerName),
              date: formatShortDate(changedOn, locale),
            }),
          );
        },
        onError: (error) => {
          setSaid("");
          if (error instanceof ApiError && error.status >= 400 && error.status < 500)
            keys.current.delete(name);
        },
        onSettled: end,
      },
    );
  }

  const word =
    changedOn === today
      ? i18n.t("Changed today")
      : i18n.t("Changed on {date}", { date: formatShortDate(changedOn, locale) });
  const columns: DataColumn<Replacement>[] = [
    {
      id: "worker",
      head: i18n.t("Worker"),
      isRowHead: true,
      cell: ({ workerId, workerName, employeeNumber }) => (
        <span className="two-lines">
          <TextLink to={paths.worker(workerId)}>{isolate(workerName)}</TextLink>
          <span className="beneath">{employeeNumber}</span>
        </span>
      ),
    },
    {
      id: "what",
      head: i18n.t("What"),
      cell: ({ part, modelId, modelName }) => (
        <span className="two-lines">
          {partWord(i18n, part)}
          <TextLink className="beneath" to={paths.protector(modelId)}>
            {modelName}
          </TextLink>
        </span>
      ),
    },
    {
      id: "due",
      head: i18n.t("Due"),
      kind: "right",
      cell: ({ dueOn, lastChangedOn }) => (
        <span className="two-lines">
          <span>
            {dueOn < today
              ? i18n.t("overdue since {date}", { date: formatShortDate(dueOn, locale) })
              : formatShortDate(dueOn, locale)}
          </span>
          <span className="beneath">
            {i18n.t("new on {date}", { date: formatShortDate(lastChangedOn, locale) })}
          </span>
        </span>
      ),
    },
    ...(canChange
      ? [
          {
            id: "change",
            head: <span className="sr-only">{i18n.t("Change")}</span>,
            kind: "right",
            cell: (row: Replacement) => (
              <TextButton
                aria-label={i18n.t("{word}: {part}, {name}", {
                  word,
                  part: partWord(i18n, row.part),
                  name: isolate(row.workerName),
                })}
                aria-disabled={change.isPending}
                onClick={() => enter(row)}
              >
                {word}
              </TextButton>
            ),
          } satisfies DataColumn<Replacement>,
        ]
      : []),
  ];
  return (
    <>
      {canChange && table.rows.length > 0 && (
        <div className="filter-row">
          <span className="filter">
            <label htmlFor="changed-on">{i18n.t("Changed on")}</label>
            <DateInput
              id="changed-on"
              key={changedOn}
              value={changedOn}
              max={today}
              onChoose={setChangedOn}
            />
          </span>
        </div>
      )}
      <p className="stock-said">
        <Status>{said}</Status>
      </p>
      <ProblemIssues error={change.error} />
      <div className="stock-due">
        <DataTable<Replacement>
          {...table}
          {...folded}
          caption={i18n.t("Cushions and tips due, the longest overdue first")}
          rowKey={keyOf}
          columns={columns}
          isTwoLine
          stacksOnPhone
        />
      </div>
    </>
  );
}
