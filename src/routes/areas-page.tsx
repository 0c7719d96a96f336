import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import type { z } from "zod";
import type { AreaView } from "../../shared/schemas/site";
import { zoneWord } from "../../shared/words/register-words";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { AreaForm } from "../features/areas/area-form";
import { areaQueries } from "../features/areas/queries";
import { taskQueries } from "../features/tasks/queries";
import { useEditParam } from "../lib/edit-param";
import { paths } from "../paths";
import { RuleWays, SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";

type Area = z.infer<typeof AreaView>;

/** The areas of the sites, which of them are protection zones, and what is done there. */
export function Component() {
  const { i18n } = useLingui();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const { data, isPending, error, refetch } = useQuery(areaQueries.list(choice.site?.id));
  const tasks = useQuery(taskQueries.list());
  const rows = (data?.rows ?? []).toSorted(
    (a, b) =>
      Number(a.isArchived) - Number(b.isArchived) ||
      choice.siteName(a.siteId).localeCompare(choice.siteName(b.siteId), i18n.locale) ||
      a.name.localeCompare(b.name, i18n.locale),
  );
  const changed = rows.find(({ id, can }) => id === editing && can.change);
  const zones = rows.filter(({ zone, isArchived }) => zone !== "none" && !isArchived).length;
  return (
    <>
      <PageBody>
        <PageHead
          way={<RuleWays />}
          title={i18n.t("Areas")}
          lead={
            data &&
            i18n.t(
              "{areas, plural, one {# area} other {# areas}}, {zones, plural, =0 {none of them a protection zone} one {one of them a protection zone} other {# of them protection zones}}.",
              { areas: rows.filter(({ isArchived }) => !isArchived).length, zones },
            )
          }
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("New area")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {((choice.isOfficer && editing === "new") || changed) && (
          <Section
            title={changed ? i18n.t("Change {name}", { name: changed.name }) : i18n.t("New area")}
            id="area-form"
          >
            <AreaForm
              key={changed?.id ?? "new"}
              area={changed ?? null}
              siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
              sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onDone={close}
            />
          </Section>
        )}
        <DataTable<Area>
          stacksOnPhone
          caption={i18n.t("Areas")}
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
          empty={
            <Empty title={i18n.t("No area is described yet.")}>
              {i18n.t("Areas hold the protection zones; a task lies in one of them.")}
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Area"),
              isRowHead: true,
              sortValue: ({ name }) => name,
              cell: ({ name }) => name,
            },
            {
              id: "zone",
              head: i18n.t("Protection zone"),
              sortValue: ({ zone }) => zone,
              cell: ({ zone }) =>
                zone === "none" ? zoneWord(i18n, zone) : <b>{zoneWord(i18n, zone)}</b>,
            },
            {
              id: "tasks",
              head: i18n.t("Tasks there"),
              cell: ({ id }) => (
                <span className="flex flex-wrap gap-x-4">
                  {(tasks.data?.rows ?? [])
                    .filter((task) => task.areaId === id && !task.isArchived)
                    .map((task) => (
                      <TextLink key={task.id} to={paths.task(task.id)}>
                        {task.name}
                      </TextLink>
                    ))}
                </span>
              ),
            },
            {
              id: "change",
              head: <span className="sr-only">{i18n.t("What can be done")}</span>,
              kind: "right",
              cell: ({ id, name, zone, isArchived, can }) => (
                <span className="flex flex-wrap justify-end gap-x-4">
                  {zone !== "none" && !isArchived && (
                    <TextLink
                      aria-label={i18n.t("Sign of {name}", { name })}
                      to={paths.zoneSign(id)}
                    >
                      {i18n.t("Sign")}
                    </TextLink>
                  )}
                  {can.change && (
                    <TextButton
                      aria-label={i18n.t("Change {name}", { name })}
                      onClick={() => edit(id)}
                    >
                      {i18n.t("Change")}
                    </TextButton>
                  )}
                </span>
              ),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "A protector counts as worn in the tasks of a zone, and in those that reach the site’s level.",
        )}
      </Folio>
    </>
  );
}
