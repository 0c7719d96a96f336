import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect, useRef, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { ProtectorChoiceView } from "../../shared/schemas/choice";
import type { Candidate } from "../../shared/schemas/fit";
import { gearWord } from "../../shared/words/register-words";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { SlipsLink } from "../components/slips-link";
import { Status } from "../components/status";
import { GiveForm } from "../features/choosing/give-form";
import { choiceQueries } from "../features/choosing/queries";
import { CandidatesTable, candidateKey } from "../features/fits/candidates-table";
import { jobQueries } from "../features/jobs/queries";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { references } from "../lib/references";
import { paths } from "../paths";
import { ProtectorWays } from "./protector-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/candidates.css";
import "../styles/choosing.css";
import "../styles/findings.css";
import "../styles/register.css";

/** For a task or a job: the register in the order in which it suits the noise, and whom to give the chosen one. */
export function Component() {
  const { i18n } = useLingui();
  const [search, setSearch] = useSearchParams();
  const choice = useSiteChoice();
  const siteId = choice.site?.id ?? choice.sites[0]?.id ?? "";
  const ask = (query: Record<string, string>) =>
    setSearch(Object.entries(query).filter(([, id]) => id !== ""));
  const taskId = search.get("task") ?? undefined;
  const jobId = taskId === undefined ? (search.get("job") ?? undefined) : undefined;
  const tasks = useQuery(references.tasks(siteId));
  const jobs = useQuery(jobQueries.list(siteId));
  const { data, error, refetch, isPending } = useQuery(choiceQueries.choice({ taskId, jobId }));
  const governing = data && ruleSetVersion(data.ruleSetKey, data.ruleSetVersion);
  const isAsked = taskId !== undefined || jobId !== undefined;
  return (
    <>
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Choose")}
          lead={i18n.t("What on the register suits a noise, and why it comes before the next.")}
        />
        <FilterRow label={i18n.t("Which noise")}>
          {choice.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId}
              choices={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => ask({ site: id })}
            />
          )}
          <FilterSelect
            label={i18n.t("Task")}
            value={taskId ?? ""}
            choices={[{ value: "", label: i18n.t("Choose one") }, ...inUse(tasks.data?.rows)]}
            onChange={(id) => ask({ site: siteId, task: id })}
          />
          <FilterSelect
            label={i18n.t("or group, by job")}
            value={jobId ?? ""}
            choices={[{ value: "", label: i18n.t("Choose one") }, ...inUse(jobs.data?.rows)]}
            onChange={(id) => ask({ site: siteId, job: id })}
          />
          {choice.isOfficer && (
            <TextLink to={paths.fitting}>{i18n.t("For one worker: Fit and issue")}</TextLink>
          )}
        </FilterRow>
        {!isAsked ? (
          <Empty title={i18n.t("Nothing is compared yet.")}>
            {i18n.t(
              "Choose a task, or the group of a job: its noise decides the order of the register.",
            )}
          </Empty>
        ) : error ? (
          <Failed error={error} onRetry={() => void refetch()} />
        ) : isPending ? (
          <span className="loading-line" />
        ) : (
          data && <Compared key={`${data.subject.kind} ${data.subject.id}`} choice={data} />
        )}
      </PageBody>
      <Folio>
        {governing && [
          i18n.t(
            "{title}, rule set version {version}. In this order: what may be worn with it, its word while worn, the margin at the ear, own fit, battery, stock.",
            { title: i18n._(governing.title), version: governing.version },
          ),
          " ",
          data?.creditsActivePart
            ? i18n.t("An active part counts where its check is passed on all who would wear it.")
            : i18n.t("Active parts count as off."),
        ]}
      </Folio>
    </>
  );
}

const inUse = (rows: readonly { id: string; name: string; isArchived: boolean }[] = []) =>
  rows.filter(({ isArchived }) => !isArchived).map(({ id, name }) => ({ value: id, label: name }));

function Compared({ choice }: { choice: ProtectorChoiceView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const mayGive = hasRole(useUser(), "officer");
  const [picked, setPicked] = useState<Candidate | null>(null);
  const [given, setGiven] = useState<{
    candidate: Candidate;
    workerIds: readonly string[];
    fromDate: string;
  } | null>(null);
  const giveAt = useRef<HTMLDivElement>(null);
  const saidAt = useRef<HTMLParagraphElement>(null);
  const { subject, noises, requiredGear, targetDb } = choice;
  useEffect(() => {
    if (picked) giveAt.current?.querySelector<HTMLElement>("input, select")?.focus();
  }, [picked]);
  useEffect(() => {
    if (given) saidAt.current?.focus();
  }, [given]);
  const pick = (candidate: Candidate) => {
    setGiven(null);
    setPicked(candidate);
  };
  const table = (caption: string, candidates: Candidate[]) => (
    <CandidatesTable
      caption={caption}
      inHead={i18n.t("In this order")}
      candidates={candidates}
      hasOwnFit={false}
      activeCredit={{
        siteCredits: choice.creditsActivePart,
        checkedOf: (modelId) => ({
          checked: choice.wearers.filter(({ checkedModelIds }) => checkedModelIds.includes(modelId))
            .length,
          all: choice.wearers.length,
        }),
      }}
      chosen={picked ? candidateKey(picked) : ""}
      pickWord={mayGive ? i18n.t("Give") : undefined}
      pickLabel={(protector) => i18n.t("Give {protector}", { protector })}
      onPick={pick}
    />
  );
  return (
    <>
      <p className="lead">
        {noises.length === 0
          ? i18n.t("No noise of {name} is known, or none that asks for a protector.", {
              name: subject.name,
            })
          : noises
              .map(({ taskName, levelDb, durationMin }) =>
                i18n.t("{task} {level} dB(A) for {time}", {
                  task: taskName,
                  level: formatLevel(levelDb, locale),
                  time: formatDuration(durationMin, locale),
                }),
              )
              .join("; ")}
        {targetDb !== null &&
          noises.length > 0 &&
          `. ${i18n.t("{target} may reach the ear.", { target: formatLimit(targetDb, locale) })}`}
      </p>
      {choice.isDurationAssumed && (
        <p className="beneath">
          {i18n.t("It is in no job’s nominal day, so eight hours of it are taken.")}
        </p>
      )}
      {noises.some(({ hasSpectrum }) => !hasSpectrum) && (
        <p className="beneath">
          {i18n.t("Without octave bands of the noise only single numbers can be compared.")}
        </p>
      )}
      {requiredGear.length > 0 && (
        <p>
          {i18n.t("Worn with it: {gear}.", {
            gear: requiredGear.map((gear) => gearWord(i18n, gear)).join(", "),
          })}
        </p>
      )}
      <p className="desk-said" ref={saidAt} tabIndex={-1}>
        <Status>
          {given &&
            i18n.t(
              "{count, plural, one {# person has} other {# people have}} {protector} from {date}.",
              {
                count: given.workerIds.length,
                protector: given.candidate.name,
                date: formatShortDate(given.fromDate, locale),
              },
            )}
        </Status>
      </p>
      {given && (
        <p className="after-table">
          <SlipsLink workerIds={given.workerIds} />
        </p>
      )}
      {picked && mayGive && (
        <Section title={i18n.t("Give {protector}", { protector: picked.name })} id="give">
          <div ref={giveAt}>
            <GiveForm
              key={candidateKey(picked)}
              choice={choice}
              candidate={picked}
              onLeave={() => setPicked(null)}
              onGiven={(workerIds, fromDate) => {
                setGiven({ candidate: picked, workerIds, fromDate });
                setPicked(null);
              }}
            />
          </div>
        </Section>
      )}
      <Section title={i18n.t("One by itself")} id="singles">
        {table(i18n.t("Devices in the order in which they suit this noise"), choice.singles)}
      </Section>
      <Section title={i18n.t("A plug under a muff")} id="pairs">
        {choice.pairs.length === 0 ? (
          <p className="beneath">
            {i18n.t(
              "No two of the register have been tested together, and these rules have no figure for two untested ones.",
            )}
          </p>
        ) : (
          table(i18n.t("Two together, in the order in which they suit this noise"), choice.pairs)
        )}
      </Section>
    </>
  );
}
