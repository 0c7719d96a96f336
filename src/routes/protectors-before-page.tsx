import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import type { ChosenBefore } from "../../shared/schemas/workplace-change";
import { changeKindTitle } from "../../shared/surveys/words";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FormProblem } from "../components/form-problem";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { useLookAtProtectors, workplaceChangeQueries } from "../features/surveys/queries";
import { useChangeKey } from "../lib/change-key";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import "../styles/surveys.css";

type Row = ChosenBefore["rows"][number];

/** Protectors that were chosen before a change at the workplace: each is looked at again, or assigned anew. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const { data, isPending, error, refetch } = useQuery(workplaceChangeQueries.protectors(id));
  const look = useLookAtProtectors(id);
  const changeKey = useChangeKey();
  const rows = data?.rows ?? [];
  const canLook = data?.change.can.change ?? false;
  const mark = (assignmentIds: readonly string[]) =>
    look.mutate(
      { assignmentIds, key: changeKey.keyFor(assignmentIds) },
      { onSuccess: () => changeKey.forget() },
    );
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Protectors chosen before a change")}
          lead={
            data ? (
              i18n.t("{subject}, {kind}, since {date}: {what}", {
                subject: data.change.subjectName,
                kind: changeKindTitle(i18n, data.change.kind),
                date: formatShortDate(data.change.happenedOn, locale),
                what: data.change.what,
              })
            ) : (
              <span className="loading-line" />
            )
          }
          actions={
            canLook &&
            rows.length > 1 && (
              <Button isBusy={look.isPending} onClick={() => mark(rows.map((row) => row.id))}>
                {i18n.t("All {count} are still right", { count: rows.length })}
              </Button>
            )
          }
        />
        <FormProblem error={look.error} />
        <DataTable<Row>
          caption={i18n.t("Protectors that wait for another look")}
          rows={rows}
          rowKey={(row) => row.id}
          isTwoLine
          stacksOnPhone
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          empty={<Empty title={i18n.t("Each has been looked at, or assigned anew.")} />}
          columns={[
            {
              id: "worker",
              head: i18n.t("Worker"),
              isRowHead: true,
              cell: ({ workerId, workerName, employeeNumber }) => (
                <span className="two-lines">
                  <TextLink className="is-name" to={paths.worker(workerId)}>
                    {workerName}
                  </TextLink>
                  <span className="beneath">{employeeNumber}</span>
                </span>
              ),
            },
            {
              id: "protector",
              head: i18n.t("Protector"),
              cell: ({ innerName, outerName, fromDate }) => (
                <span className="two-lines">
                  {[innerName, outerName].filter(Boolean).join(" + ")}
                  <span className="beneath">
                    {i18n.t("since {date}", { date: formatShortDate(fromDate, locale) })}
                  </span>
                </span>
              ),
            },
            {
              id: "use",
              head: i18n.t("For"),
              cell: ({ useName }) => useName ?? i18n.t("everywhere"),
            },
            {
              id: "look",
              head: <span className="sr-only">{i18n.t("What can be done")}</span>,
              kind: "right",
              cell: (row) =>
                canLook && (
                  <TextButton
                    aria-label={i18n.t("{name}: looked at, still right", { name: row.workerName })}
                    onClick={() => !look.isPending && mark([row.id])}
                  >
                    {i18n.t("Looked at, still right")}
                  </TextButton>
                ),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t("What is assigned anew after the change needs no look: its page is the worker’s.")}
      </Folio>
    </>
  );
}
