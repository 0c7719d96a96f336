import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { dutyKindWord } from "../../shared/findings/duty-words";
import { findingWord } from "../../shared/findings/words";
import { isolate } from "../../shared/i18n/isolate";
import { representativeRights } from "../../shared/rule-sets/representatives";
import { FIGURES_BY, type SiteFiguresView } from "../../shared/schemas/site-figures";
import { gapMeaning, gapWord } from "../../shared/words/gap-words";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { useUser } from "../features/session/session";
import { BandsTable } from "../features/site-figures/bands-table";
import { CountList } from "../features/site-figures/count-list";
import { criterionWords } from "../features/site-figures/criterion-words";
import { byWord, PeopleTable } from "../features/site-figures/people-table";
import { siteFiguresQueries } from "../features/site-figures/queries";
import { useLocale } from "../lib/i18n";
import { Loading } from "./loading";
import "../styles/site-figures.css";

function useChoice() {
  const [search, setSearch] = useSearchParams();
  const choose = (name: string, value: string) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        next.set(name, value);
        return next;
      },
      { replace: true, preventScrollReset: true },
    );
  return { search, choose };
}

/** The year in counts: who is in noise, what is known of them, and what is missing. */
function YearCounts({ figures }: { figures: SiteFiguresView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { total, criteria, gaps, ruleSets } = figures;
  return (
    <CountList
      caption={i18n.t("The year in counts")}
      lines={[
        {
          key: "in-noise",
          label: i18n.t("In noise"),
          count: total.inNoise,
          meaning: i18n.t("people over 80 dB without protection on a day"),
        },
        {
          key: "measured",
          label: i18n.t("Measured"),
          count: total.measured,
          meaning: i18n.t("of those in noise: with a run of their own in the year"),
        },
        {
          key: "by-group",
          label: i18n.t("Measured through their group"),
          count: total.byGroup,
          meaning: i18n.t(
            "of those in noise: not themselves, but by measurements that speak for them",
          ),
        },
        {
          key: "never",
          label: i18n.t("Not measured"),
          count: total.neverMeasured,
          meaning: i18n.t("of those in noise: known by levels of tasks and estimates alone"),
        },
        {
          key: "undecided",
          label: i18n.t("Undecided"),
          count: total.undecided,
          meaning: i18n.t("of those in noise: with a day Can’t tell yet or Not assessed"),
        },
        ...criteria.map((criterion, at) => {
          const { label, rule } = criterionWords(i18n, locale, criterion, ruleSets.length > 1);
          return {
            key: `${criterion.ruleSetKey} ${criterion.id}`,
            label: i18n.t("Over {criterion}", { criterion: label }),
            count: total.over[at] ?? 0,
            meaning: rule ?? i18n.t("people, on a day of the year"),
          };
        }),
        ...gaps.map(({ kind, count, hasNoInterval }) => ({
          key: kind,
          label: gapWord(i18n, kind),
          count,
          meaning: gapMeaning(i18n, kind, hasNoInterval),
        })),
      ]}
    />
  );
}

function Training({ training }: { training: SiteFiguresView["training"] }) {
  const { i18n } = useLingui();
  return (
    <CountList
      caption={i18n.t("Training")}
      lines={[
        {
          key: "owed",
          label: i18n.t("Training owed"),
          count: training.owed,
          meaning: i18n.t("people to whom the rules owe it, now or again"),
        },
        {
          key: "never",
          label: i18n.t("Never trained"),
          count: training.never,
          meaning: i18n.t("of these"),
        },
        {
          key: "overdue",
          label: i18n.t("Overdue for another"),
          count: training.overdue,
          meaning: i18n.t("of these: trained once, and the interval is over"),
        },
        {
          key: "in-time",
          label: i18n.t("Trained in time"),
          count: training.inTime,
          meaning: i18n.t("of these"),
        },
        {
          key: "trained",
          label: i18n.t("Trained in the year"),
          count: training.trained,
          meaning: i18n.t("people"),
        },
        {
          key: "sessions",
          label: i18n.t("Trainings held in the year"),
          count: training.sessions,
          meaning: i18n.t("trainings, not people"),
        },
      ]}
    />
  );
}

function Rights({ ruleSets }: { ruleSets: SiteFiguresView["ruleSets"] }) {
  const { i18n } = useLingui();
  const rights = ruleSets.flatMap(({ key }) => representativeRights(key));
  return (
    <MarginNote title={i18n.t("What the rules give you")}>
      {rights.length === 0 && (
        <p>
          {i18n.t("For the rules of this site nothing is on file here. The law may give more.")}
        </p>
      )}
      {rights.map(({ what, citation, sourceStatus }) => (
        <p key={`${what} ${citation}`}>
          {i18n._(what)} <cite>{citation}</cite>
          {sourceStatus === "from-memory" && `, ${i18n.t("from memory")}`}
        </p>
      ))}
    </MarginNote>
  );
}

/** The site for the workers' representative: counts of people, and nobody's name. */
export function Component() {
  const { i18n } = useLingui();
  const { sites } = useUser();
  const { search, choose } = useChoice();
  const site = sites.find(({ id }) => id === search.get("site")) ?? sites[0];
  const asked = Number(search.get("year"));
  const year = Number.isInteger(asked) && asked > 1969 && asked < 2201 ? asked : null;
  const by = FIGURES_BY.find((one) => one === search.get("by")) ?? "crew";
  const query = useQuery({
    ...siteFiguresQueries.of(site?.id ?? "", year),
    enabled: site !== undefined,
  });
  const figures = query.data;
  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("Fewer than 5")}>
              <p>
                {i18n.t(
                  "A count of fewer than five people is not shown: who knows the crew would know whom. “Not shown” stands where such a count could be worked out from the others.",
                )}
              </p>
            </MarginNote>
            {figures && <Rights ruleSets={figures.ruleSets} />}
          </>
        }
      >
        <PageHead
          title={i18n.t("The site")}
          lead={
            site &&
            i18n.t("{site} in counts of people. Nobody is named.", { site: isolate(site.name) })
          }
        />
        <FilterRow label={i18n.t("Site and year")}>
          {sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={site?.id ?? ""}
              choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => choose("site", id)}
            />
          )}
          <FilterSelect
            label={i18n.t("Year")}
            value={String(figures?.year ?? year ?? "")}
            choices={[...new Set([...(figures ? [figures.year] : []), ...(figures?.years ?? [])])]
              .sort((a, b) => b - a)
              .map((one) => ({ value: String(one), label: String(one) }))}
            onChange={(value) => choose("year", value)}
          />
        </FilterRow>
        {query.isError && <Failed error={query.error} onRetry={() => void query.refetch()} />}
        {query.isPending && site && <Loading />}
        {figures && (
          <>
            <Section title={i18n.t("The year in counts")} id="year">
              <YearCounts figures={figures} />
            </Section>
            <Section title={i18n.t("By crew, job, area and task")} id="people">
              <FilterRow label={i18n.t("Counted by")}>
                <FilterSelect
                  label={i18n.t("Counted by")}
                  value={by}
                  choices={FIGURES_BY.map((one) => ({ value: one, label: byWord(i18n, one) }))}
                  onChange={(value) => choose("by", value)}
                />
              </FilterRow>
              <PeopleTable by={by} figures={figures} />
              <p className="figures-note">
                {i18n.t(
                  "Somebody with days in two crews is counted in both. The whole day is judged, whatever else was done on it.",
                )}
              </p>
            </Section>
            <Section title={i18n.t("Open findings")} id="findings">
              <BandsTable
                caption={i18n.t("Open findings")}
                heads={[
                  i18n.t("Under 30 days"),
                  i18n.t("30 to 89 days"),
                  i18n.t("90 days and more"),
                ]}
                rows={figures.findings.map(({ kind, ...bands }) => ({
                  key: kind,
                  word: findingWord(i18n, kind),
                  ...bands,
                }))}
                empty={i18n.t("No finding is open.")}
              />
              <p className="figures-note">
                {i18n.t(
                  "People, each by their oldest finding of the kind; what is about nobody, as instruments are, by the finding.",
                )}
              </p>
            </Section>
            <Section title={i18n.t("Due")} id="due">
              <BandsTable
                caption={i18n.t("Due")}
                heads={[i18n.t("Overdue"), i18n.t("Within 30 days"), i18n.t("Later")]}
                rows={figures.duties.map(({ kind, ...bands }) => ({
                  key: kind,
                  word: dutyKindWord(i18n, kind),
                  ...bands,
                }))}
                empty={i18n.t("Nothing is due.")}
              />
              <p className="figures-note">
                {i18n.t(
                  "People, each by what is due first; what is due for nobody, as calibrations are, one by one.",
                )}
              </p>
            </Section>
            <Section title={i18n.t("Training")} id="training">
              <Training training={figures.training} />
            </Section>
          </>
        )}
      </PageBody>
      <Folio
        caution={i18n.t(
          "An aid to screening: local regulation, a qualified hygienist and a licensed audiologist decide.",
        )}
      />
    </>
  );
}
