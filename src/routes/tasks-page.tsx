import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useNavigate } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import { formatLevel } from "../../shared/format/level";
import type { TaskView } from "../../shared/schemas/task";
import { gradeWord, metricWord, zoneWord } from "../../shared/words/register-words";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { areaQueries } from "../features/areas/queries";
import { taskQueries } from "../features/tasks/queries";
import { TaskHeadForm } from "../features/tasks/task-head-form";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { RuleWays, SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";

/** The tasks of the sites with the noise that is in force for each. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const navigate = useNavigate();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const { data, isPending, error, refetch } = useQuery(taskQueries.list(choice.site?.id));
  const areas = useQuery(areaQueries.list());
  const place = (task: TaskView) =>
    [
      choice.sites.length > 1 && !choice.site ? choice.siteName(task.siteId) : null,
      task.areaName ?? i18n.t("No area"),
    ]
      .filter(Boolean)
      .join(", ");
  const key = (task: TaskView) =>
    task.isArchived
      ? "archived"
      : `${choice.siteName(task.siteId)} ${task.areaName ?? ""} ${task.areaId}`;
  const rows = (data?.rows ?? []).toSorted(
    (a, b) =>
      Number(a.isArchived) - Number(b.isArchived) ||
      key(a).localeCompare(key(b), i18n.locale) ||
      a.name.localeCompare(b.name, i18n.locale),
  );
  const without = rows.filter((task) => !task.isArchived && task.level === null).length;
  const used = rows.filter((task) => !task.isArchived).length;
  return (
    <>
      <PageBody>
        <PageHead
          way={<RuleWays />}
          title={i18n.t("Tasks")}
          lead={
            data &&
            (without > 0
              ? i18n.t(
                  "{used, plural, one {# task} other {# tasks}}; {without, plural, one {# has} other {# have}} no level yet, so that days with them are not assessed.",
                  { used, without },
                )
              : i18n.t(
                  "{used, plural, one {# task, and it has its level.} other {# tasks, each with its level.}}",
                  { used },
                ))
          }
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("New task")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {choice.isOfficer && editing === "new" && (
          <Section title={i18n.t("New task")} id="new-task">
            <TaskHeadForm
              task={null}
              siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
              sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              areasOf={(siteId) =>
                (areas.data?.rows ?? [])
                  .filter((area) => area.siteId === siteId && !area.isArchived)
                  .map(({ id, name }) => ({ value: id, label: name }))
              }
              onSaved={(task) => void navigate(`${paths.task(task.id)}?edit=level`)}
              onLeave={close}
            />
          </Section>
        )}
        <DataTable<TaskView>
          caption={i18n.t("Tasks")}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          rows={rows}
          rowKey={({ id }) => id}
          groupOf={(task) => ({
            key: key(task),
            label: task.isArchived ? (
              i18n.t("No longer in use")
            ) : (
              <>
                {place(task)}
                {task.zone !== "none" && (
                  <span className="beneath"> · {zoneWord(i18n, task.zone)}</span>
                )}
              </>
            ),
          })}
          empty={
            <Empty title={i18n.t("No task is described yet.")}>
              {i18n.t(
                "A task is a part of the day with its own noise; days are entered as minutes in tasks.",
              )}
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Task"),
              isRowHead: true,
              sortValue: (task) => task.name,
              cell: (task) => <TextLink to={paths.task(task.id)}>{task.name}</TextLink>,
            },
            {
              id: "level",
              head: i18n.t("Level"),
              unit: "dB(A)",
              kind: "figure",
              sortValue: (task) => task.level?.levelDb ?? null,
              cell: (task) => formatLevel(task.level?.levelDb ?? null, locale),
            },
            {
              id: "metric",
              hidesOnPhone: true,
              head: i18n.t("Metric"),
              cell: (task) =>
                task.level ? (
                  metricWord(i18n, task.level.metric)
                ) : (
                  <span className="not-assessed">{i18n.t("no level yet")}</span>
                ),
            },
            {
              id: "grade",
              head: i18n.t("Grade"),
              sortValue: (task) => task.level?.grade ?? null,
              cell: (task) => task.level && gradeWord(i18n, task.level.grade),
            },
            {
              id: "spectrum",
              head: i18n.t("Octave bands"),
              hidesOnPhone: true,
              cell: (task) =>
                task.level && (task.level.octaveBandsDb ? i18n.t("measured") : i18n.t("none")),
            },
            {
              id: "peak",
              head: i18n.t("Peak"),
              unit: "dB",
              kind: "figure",
              hidesOnPhone: true,
              cell: (task) =>
                task.level?.peak
                  ? `${formatLevel(task.level.peak.levelDb, locale)} ${task.level.peak.weighting}`
                  : formatLevel(null, locale),
            },
            {
              id: "since",
              head: i18n.t("In force since"),
              hidesOnPhone: true,
              sortValue: (task) => task.level?.effectiveFrom ?? null,
              cell: (task) => task.level && formatShortDate(task.level.effectiveFrom, locale),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "A level carries its metric: an energy mean and a 5 dB mean can’t be turned into one another.",
        )}
      </Folio>
    </>
  );
}
