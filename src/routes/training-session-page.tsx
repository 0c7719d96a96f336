import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { formatDate } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { trainingQueries } from "../features/training/queries";
import { StrikeTraining } from "../features/training/strike-form";
import { TrainingForm } from "../features/training/training-form";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import { useCrewNumbers } from "./training-page";
import "../styles/training.css";

/** One training, with who was there. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const { editing, edit, close } = useEditParam();
  const { todayAt } = useSiteChoice();
  const crews = useCrewNumbers();
  const { data, error, refetch } = useQuery(trainingQueries.one(id));
  const way = <TextLink to={paths.trainings}>{i18n.t("Training")}</TextLink>;
  if (!data)
    return (
      <PageBody>
        <PageHead way={way} title={error ? i18n.t("Training") : " "} />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const mayChange = data.can.change && data.struckReason === null;
  return (
    <>
      <PageBody>
        <PageHead
          way={way}
          title={data.title}
          lead={
            <>
              {i18n.t("{date}, {duration}, {site}.", {
                date: formatDate(data.heldOn, locale),
                duration: formatDuration(data.durationMin, locale),
                site: data.siteName,
              })}{" "}
              {data.struckReason !== null && (
                <b>{i18n.t("Struck out: {reason}", { reason: data.struckReason })}</b>
              )}{" "}
              {data.fileId !== null && (
                <a className="link" href={`/api/files/${data.fileId}`} download>
                  {data.fileName}
                </a>
              )}
            </>
          }
          actions={
            mayChange &&
            editing === null && (
              <>
                <Button kind="primary" onClick={() => edit("change")}>
                  {i18n.t("Put right")}
                </Button>
                <Button onClick={() => edit("strike")}>{i18n.t("Strike out")}</Button>
              </>
            )
          }
        />
        {mayChange && editing === "change" && (
          <Section title={i18n.t("Put the training right")} id="change-training">
            <TrainingForm
              key={data.revision}
              training={data}
              sites={[{ value: data.siteId, label: data.siteName }]}
              today={todayAt(data.siteId)}
              {...crews}
              onDone={close}
            />
          </Section>
        )}
        {mayChange && editing === "strike" && <StrikeTraining training={data} onDone={close} />}
        <DataTable
          caption={i18n.t("Who was there")}
          rows={data.attendance}
          rowKey={(worker) => worker.id}
          columns={[
            {
              id: "name",
              head: i18n.t("Name"),
              isRowHead: true,
              cell: (worker) => <TextLink to={paths.worker(worker.id)}>{worker.name}</TextLink>,
            },
            {
              id: "number",
              head: i18n.t("Number"),
              cell: ({ employeeNumber }) => employeeNumber,
            },
          ]}
        />
      </PageBody>
      <Folio>{data.authorName && i18n.t("entered by {name}", { name: data.authorName })}</Folio>
    </>
  );
}
