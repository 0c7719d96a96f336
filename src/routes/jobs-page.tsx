import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import type { z } from "zod";
import { formatDuration, formatMinutes } from "../../shared/format/duration";
import type { JobView } from "../../shared/schemas/task";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextButton } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { crewQueries } from "../features/crews/queries";
import { JobForm } from "../features/jobs/job-form";
import { jobQueries } from "../features/jobs/queries";
import { taskQueries } from "../features/tasks/queries";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { RuleWays, SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";

type Job = z.infer<typeof JobView>;

/** Work patterns with their nominal days. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const { data, isPending, error, refetch } = useQuery(jobQueries.list(choice.site?.id));
  const tasks = useQuery(taskQueries.list());
  const crews = useQuery(crewQueries.list());
  const taskName = (id: string) =>
    tasks.data?.rows.find((task) => task.id === id)?.name ?? i18n.t("Task");
  const rows = (data?.rows ?? []).toSorted(
    (a, b) =>
      Number(a.isArchived) - Number(b.isArchived) ||
      choice.siteName(a.siteId).localeCompare(choice.siteName(b.siteId), i18n.locale) ||
      a.name.localeCompare(b.name, i18n.locale),
  );
  const changed = rows.find(({ id, can }) => id === editing && can.change);
  const sumMin = ({ tasks: day }: Job) =>
    day.reduce((sum, { durationMin }) => sum + durationMin, 0);
  const used = new Set(changed?.tasks.map(({ taskId }) => taskId));
  return (
    <>
      <PageBody>
        <PageHead
          way={<RuleWays />}
          title={i18n.t("Jobs")}
          lead={i18n.t(
            "A day opens filled with the nominal day of the worker’s job, so that only departures are typed.",
          )}
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("New job")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {((choice.isOfficer && editing === "new") || changed) && tasks.data && (
          <Section
            title={changed ? i18n.t("Change {name}", { name: changed.name }) : i18n.t("New job")}
            id="job-form"
          >
            <JobForm
              key={changed?.id ?? "new"}
              job={changed ?? null}
              siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
              sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              tasksOf={(siteId) =>
                tasks.data.rows
                  .filter(
                    (task) => task.siteId === siteId && (!task.isArchived || used.has(task.id)),
                  )
                  .map(({ id, name }) => ({ value: id, label: name }))
              }
              crews={(crews.data?.rows ?? []).filter(({ isArchived }) => !isArchived)}
              onDone={close}
            />
          </Section>
        )}
        <DataTable<Job>
          caption={i18n.t("Jobs")}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          rows={rows}
          rowKey={({ id }) => id}
          isSelected={({ id }) => id === editing}
          groupOf={({ siteId, isArchived }) =>
            isArchived
              ? { key: "archived", label: i18n.t("No longer in use") }
              : { key: siteId, label: choice.siteName(siteId) }
          }
          empty={<Empty title={i18n.t("No job is described yet.")} />}
          columns={[
            {
              id: "name",
              head: i18n.t("Job"),
              isRowHead: true,
              sortValue: ({ name }) => name,
              cell: ({ name }) => name,
            },
            {
              id: "day",
              head: i18n.t("Nominal day"),
              unit: "min",
              cell: ({ tasks: day }) =>
                day.length === 0 ? (
                  <span className="not-assessed">{i18n.t("none")}</span>
                ) : (
                  day.map(({ taskId, durationMin }, index) => (
                    <span key={taskId}>
                      {index > 0 && ", "}
                      {taskName(taskId)}{" "}
                      <span className="mono">{formatMinutes(durationMin, locale)}</span>
                    </span>
                  ))
                ),
            },
            {
              id: "sum",
              head: i18n.t("Together"),
              kind: "figure",
              sortValue: sumMin,
              cell: (job) => formatDuration(sumMin(job), locale),
            },
            {
              id: "workers",
              hidesOnPhone: true,
              head: i18n.t("Workers"),
              kind: "figure",
              sortValue: ({ workersCount }) => workersCount,
              cell: ({ workersCount }) => (
                <span className={workersCount === 0 ? "is-zero" : undefined}>{workersCount}</span>
              ),
            },
            {
              id: "change",
              head: <span className="sr-only">{i18n.t("What can be done")}</span>,
              kind: "right",
              cell: ({ id, name, can }) =>
                can.change && (
                  <TextButton
                    aria-label={i18n.t("Change {name}", { name })}
                    onClick={() => edit(id)}
                  >
                    {i18n.t("Change")}
                  </TextButton>
                ),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "A nominal day fills in days to come; days that are saved stay as they were recorded.",
        )}
      </Folio>
    </>
  );
}
