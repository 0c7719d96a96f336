import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams, useSearchParams } from "react-router-dom";
import { formatMinutes } from "../../shared/format/duration";
import { formatLevel } from "../../shared/format/level";
import { withoutStop } from "../../shared/format/words";
import type { GroupView } from "../../shared/schemas/group";
import { ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { AsInForce, GroupBudget } from "../features/groups/group-budget";
import { belongingWords, GroupFigures, MembersAlike } from "../features/groups/group-statistics";
import { groupQueries } from "../features/groups/queries";
import { useLocale } from "../lib/i18n";
import { isOffNominal } from "../lib/nominal-check";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/register.css";
import "../styles/surveys.css";

/** A group: its result with its uncertainty, and whether its members belong together. */
export function Component() {
  const { i18n } = useLingui();
  const { jobId = "" } = useParams();
  const choice = useSiteChoice();
  const [search, setSearch] = useSearchParams();
  const surveyId = search.get("survey") ?? undefined;
  const { data: group, error, refetch } = useQuery(groupQueries.one(jobId, surveyId));
  if (!group)
    return (
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Group")}
          lead={error ? undefined : <span className="loading-line" />}
        />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const taskName = (id: string) =>
    group.nominalDay.find(({ taskId }) => taskId === id)?.taskName ?? i18n.t("a task");
  const { basis, blocks, isOtherQuantity } = group;
  const [mainBlock] = blocks;
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={group.jobName}
          lead={i18n.t("{count, plural, one {# worker} other {# workers}}, {site}. {verdict}", {
            count: group.workersCount,
            site: group.siteName,
            verdict: mainBlock?.statistics
              ? belongingWords(i18n, mainBlock.statistics.belonging)
              : i18n.t("Nothing was measured on its members yet."),
          })}
          actions={
            choice.isOfficer && (
              <>
                <ButtonLink to={paths.tryChangesFor("job", group.jobId)}>
                  {i18n.t("Try changes")}
                </ButtonLink>{" "}
                <ButtonLink
                  kind="primary"
                  to={`${paths.newSurvey}?site=${group.siteId}&job=${group.jobId}`}
                >
                  {i18n.t("Plan a survey")}
                </ButtonLink>
              </>
            )
          }
        />
        <Section title={i18n.t("Nominal day, and as worked")} id="nominal">
          <NominalDay group={group} />
        </Section>
        {group.budgets.map((budget) => (
          <Section
            key={budget.surveyId ?? "in-force"}
            title={
              budget.surveyId ? (
                <>
                  {i18n.t("How sure it is, by survey")}{" "}
                  <TextLink to={paths.survey(budget.surveyId)}>{budget.surveyName}</TextLink>
                </>
              ) : (
                i18n.t("How sure the nominal day is, with the levels in force")
              )
            }
            id={`budget-${budget.surveyId ?? "in-force"}`}
          >
            {budget.isAsInForce && budget.budget ? (
              <AsInForce budget={budget.budget} keptReasons={budget.keptReasons} />
            ) : (
              <GroupBudget of={budget} taskName={taskName} />
            )}
          </Section>
        ))}
        <Section title={i18n.t("What its members’ samples say")} id="statistics">
          {group.surveys.length > 0 && (
            <FilterRow label={i18n.t("Taken from")}>
              <FilterSelect
                label={i18n.t("Taken from")}
                value={basis.surveyId ?? ""}
                choices={[
                  { value: "", label: i18n.t("Days measured on the workers, last 12 months") },
                  ...group.surveys.map(({ id, name }) => ({ value: id, label: name })),
                ]}
                onChange={(value) =>
                  setSearch(value === "" ? {} : { survey: value }, { replace: true })
                }
              />
            </FilterRow>
          )}
          {group.surveys.length === 0 && mainBlock?.statistics && (
            <p className="group-kept">{i18n.t("Days measured on the workers, last 12 months")}.</p>
          )}
          {basis.leftOutCount > 0 && (
            <p className="group-kept">
              {i18n.t(
                "{count, plural, one {# sample does} other {# samples do}} not count and stay out.",
                { count: basis.leftOutCount },
              )}
            </p>
          )}
          {isOtherQuantity && (
            <p className="group-kept">
              {i18n.t(
                "A survey’s samples are energy levels, and the rules here count a dose: its values have no share above them.",
              )}
            </p>
          )}
          {basis.keptReasons.map((reason) => (
            <p key={reason} className="group-kept">
              <b>{i18n.t("Kept: {reason}.", { reason: withoutStop(reason) })}</b>{" "}
              {i18n.t("The result no longer bears the standard’s name.")}
            </p>
          ))}
          {blocks.every(({ statistics }) => statistics === null) && (
            <Empty title={i18n.t("No day was measured on a member in the last 12 months.")}>
              {i18n.t(
                "A dosimeter worn over a shift, or a survey by job or full days, gives samples.",
              )}
            </Empty>
          )}
        </Section>
        {blocks.map((block, place) => (
          <GroupFigures
            key={`${block.quantity} ${block.exchangeRateDb} ${block.thresholdDb}`}
            block={block}
            place={place}
          />
        ))}
        {mainBlock?.statistics && <MembersAlike statistics={mainBlock.statistics} />}
      </PageBody>
      <Folio>
        {i18n.t("{ruleSet}. Levels without protection, taken as normally distributed.", {
          ruleSet: i18n._(group.ruleSetTitle),
        })}
      </Folio>
    </>
  );
}

function NominalDay({ group }: { group: GroupView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <>
      <DataTable<GroupView["nominalDay"][number]>
        caption={i18n.t("Nominal day, and as worked")}
        rows={group.nominalDay}
        rowKey={({ taskId }) => taskId}
        empty={
          <Empty title={i18n.t("Its nominal day names no task.")}>
            <TextLink to={`${paths.jobs}?edit=${group.jobId}`}>{i18n.t("Change the job")}</TextLink>
          </Empty>
        }
        columns={[
          {
            id: "task",
            head: i18n.t("Task"),
            isRowHead: true,
            cell: ({ taskId, taskName }) => <TextLink to={paths.task(taskId)}>{taskName}</TextLink>,
          },
          {
            id: "level",
            head: i18n.t("Level in force"),
            unit: "dB(A)",
            kind: "figure",
            cell: ({ levelDb }) => formatLevel(levelDb, locale),
          },
          {
            id: "nominal",
            head: i18n.t("Nominal"),
            unit: "min",
            kind: "figure",
            cell: ({ durationMin }) => formatMinutes(durationMin, locale),
          },
          {
            id: "observed",
            head: i18n.t("As worked"),
            unit: i18n.t("min, last 3 months"),
            kind: "figure",
            cell: ({ observed, durationMin }) =>
              observed === null ? (
                "–"
              ) : (
                <span
                  className={isOffNominal(durationMin, observed.meanMin) ? "is-fault" : undefined}
                >
                  {observed.sdMin === null
                    ? formatMinutes(observed.meanMin, locale)
                    : i18n.t("{mean} ± {sd}", {
                        mean: formatMinutes(observed.meanMin, locale),
                        sd: formatMinutes(observed.sdMin, locale),
                      })}
                </span>
              ),
          },
          {
            id: "shifts",
            head: i18n.t("Shifts with it"),
            kind: "figure",
            hidesOnPhone: true,
            cell: ({ observed }) =>
              observed === null ? "–" : `${observed.count} / ${observed.shiftsCount}`,
          },
        ]}
      />
      <p className="table-foot">
        {i18n.t(
          "Bold: more than 15 % off the nominal time. The spread of what was worked is the duration’s part of the uncertainty.",
        )}
      </p>
    </>
  );
}
