import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { WorkerPage } from "../../shared/schemas/worker";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { crewQueries } from "../features/crews/queries";
import { DuesTable } from "../features/training/dues-table";
import { trainingQueries } from "../features/training/queries";
import { TrainingForm } from "../features/training/training-form";
import { TrainingsTable } from "../features/training/trainings-table";
import { api } from "../lib/api";
import { useEditParam } from "../lib/edit-param";
import { paths } from "../paths";
import { SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";
import "../styles/training.css";

/** Crews of a site, and the employee numbers of who is in one today. */
export function useCrewNumbers() {
  const crews = useQuery(crewQueries.list());
  return {
    crewsOf: (siteId: string) =>
      (crews.data?.rows ?? [])
        .filter((crew) => crew.siteId === siteId && !crew.isArchived)
        .map(({ id, name }) => ({ value: id, label: name })),
    numbersOfCrew: async (crewId: string) => {
      const { rows } = await api.get("/workers", {
        query: { crewId, limit: 200 },
        schema: WorkerPage,
      });
      return rows.map(({ employeeNumber }) => employeeNumber);
    },
  };
}

/** Who is owed training, and what was held. */
export function Component() {
  const { i18n } = useLingui();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const crews = useCrewNumbers();
  const siteId = choice.site?.id;
  const dues = useInfiniteQuery(trainingQueries.dues(siteId));
  const list = useInfiniteQuery(trainingQueries.list(siteId));
  const sites = (choice.site ? [choice.site] : choice.sites).map(({ id, name }) => ({
    value: id,
    label: name,
  }));
  const tableOf = (query: typeof dues | typeof list) => ({
    state: query.isSuccess
      ? ("ready" as const)
      : query.isError
        ? ("failed" as const)
        : ("loading" as const),
    error: query.error,
    onRetry: () => void query.refetch(),
    more: {
      hasMore: query.hasNextPage,
      isLoading: query.isFetchingNextPage,
      onMore: () => void query.fetchNextPage(),
    },
  });
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.workers}>{i18n.t("Workers")}</TextLink>}
          title={i18n.t("Training")}
          lead={i18n.t(
            "Who works in noise that the rules ask training for, when it is due, and what was held.",
          )}
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("Enter a training")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {choice.isOfficer && editing === "new" && (
          <Section title={i18n.t("New training")} id="new-training">
            <TrainingForm
              key={siteId ?? ""}
              training={null}
              sites={sites}
              today={choice.todayAt(sites[0]?.value ?? "")}
              {...crews}
              onDone={close}
            />
          </Section>
        )}
        <Section title={i18n.t("Due")} id="training-dues">
          <DuesTable
            {...tableOf(dues)}
            rows={dues.data?.pages.flatMap(({ rows }) => rows) ?? []}
            todayAt={choice.todayAt}
            empty={
              <Empty title={i18n.t("Nobody is owed training.")}>
                {i18n.t(
                  "Either nobody was in such noise within a year, everybody was trained, or the site’s rules set no such duty.",
                )}
              </Empty>
            }
          />
        </Section>
        <Section title={i18n.t("Training held")} id="trainings-held">
          <TrainingsTable
            {...tableOf(list)}
            rows={list.data?.pages.flatMap(({ rows }) => rows) ?? []}
            showsSite={choice.site === null && choice.sites.length > 1}
            empty={
              <Empty title={i18n.t("No training is on record.")}>
                {i18n.t("Enter one with who was there; it counts from its own day.")}
              </Empty>
            }
          />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "Terms and intervals are those of each site’s governing rule set, most from memory.",
        )}
      </Folio>
    </>
  );
}
