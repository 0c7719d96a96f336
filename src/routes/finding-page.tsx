import { useLingui } from "@lingui/react";
import { type UseQueryResult, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import type { RuleSetVersion } from "../../shared/acoustics/types";
import { citationOf, criterionValue, levelBasis, ruleSetOf } from "../../shared/findings/basis";
import {
  factsToday,
  handoutsOf,
  listWords,
  protectorNames,
  remedyOf,
} from "../../shared/findings/facts";
import { isOverdue } from "../../shared/findings/overdue";
import { noticedSentence, orderToday } from "../../shared/findings/sentences";
import { findingStateWord, findingWord } from "../../shared/findings/words";
import { formatDate, formatInstant, formatShortDate } from "../../shared/format/date";
import { formatLevel } from "../../shared/format/level";
import { formatNumber } from "../../shared/format/number";
import { isolate } from "../../shared/i18n/isolate";
import { RULE_SETS, ruleSetVersion } from "../../shared/rule-sets";
import type { FindingView } from "../../shared/schemas/finding";
import type { FollowUpView } from "../../shared/schemas/follow-up";
import { gradeWord } from "../../shared/words/register-words";
import { Button, ButtonLink } from "../components/button";
import { type DataColumn, DataTable } from "../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  isBoundReason,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../components/day-figures";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextButton, TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { ProtectorWord, protectorWordText } from "../components/protector-word";
import { BetweenFindings } from "../features/findings/between-findings";
import { Measures } from "../features/findings/measures";
import { Papers } from "../features/findings/papers";
import { ProofTable } from "../features/findings/proof";
import { findingQueries } from "../features/findings/queries";
import { StepForm } from "../features/findings/step-form";
import { Told, type ToldNotice } from "../features/findings/told";
import { TrustTable } from "../features/findings/trust";
import { LookAtNotices } from "../features/notices/outgoing-notice";
import { OfficeLink } from "../features/session/office-link";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";
import "../styles/waiting.css";

export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(findingQueries.one(id));
  if (error && !data) {
    return (
      <PageBody>
        <PageHead title={i18n.t("Finding")} />
        <Failed error={error} onRetry={() => void refetch()} />
      </PageBody>
    );
  }
  if (!data) {
    return (
      <PageBody>
        <PageHead title={i18n.t("Finding")} lead={<span className="loading-line" />} />
      </PageBody>
    );
  }
  return <Finding finding={data} />;
}

function Finding({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { worker, kind, facts } = finding;
  const remedy = finding.today?.is === "in-order" ? null : remedyOf(factsToday(finding));
  const ruleSet = ruleSetBehind(finding);
  const who = worker?.name ?? finding.subjectName;
  const followUp = useQuery(findingQueries.followUp(finding.id));
  const { todayAt } = useSiteChoice();
  const user = useUser();
  const timeZone = user.sites.find(({ id }) => id === finding.siteId)?.timeZone ?? "UTC";
  const mayReadPapers = user.roles.some((role) => role !== "worker" && role !== "administrator");
  return (
    <>
      <PageBody margin={<Margin finding={finding} />} marginWidthPx={240}>
        <PageHead
          way={
            <>
              <OfficeLink to={paths.findings}>{i18n.t("Findings")}</OfficeLink> /{" "}
              {worker ? (
                <TextLink
                  to={paths.worker(worker.id)}
                >{`${isolate(worker.name)}, ${worker.employeeNumber}`}</TextLink>
              ) : (
                who
              )}
            </>
          }
          title={
            who
              ? i18n.t("{what}: {who}", { what: findingWord(i18n, kind), who })
              : findingWord(i18n, kind)
          }
          lead={
            <>
              <b>{findingStateWord(i18n, finding.state)}.</b>{" "}
              {noticedSentence(i18n, locale, kind, facts)}
              {finding.rulesUntil &&
                `, ${i18n.t("under the rules before {date}", { date: formatDate(finding.rulesUntil, locale) })}`}
              .
            </>
          }
          actions={
            remedy && worker && finding.can.handle && finding.state !== "closed"
              ? handoutsOf(remedy).map((handout, at) => (
                  <ButtonLink
                    key={handout.modelIds.join()}
                    kind={at === 0 ? "primary" : "plain"}
                    to={paths.assign(worker.id, handout)}
                  >
                    {handout.taskNames.length > 0
                      ? i18n.t("Assign {protector} for {tasks}", {
                          protector: protectorNames(i18n, handout.names),
                          tasks: listWords(i18n, handout.taskNames),
                        })
                      : i18n.t("Assign {protector}", {
                          protector: protectorNames(i18n, handout.names),
                        })}
                  </ButtonLink>
                ))
              : isAboutFit(finding) &&
                worker &&
                finding.can.handle &&
                finding.state !== "closed" && (
                  <ButtonLink kind="primary" to={paths.fittingOf(worker.id)}>
                    {i18n.t("Fit and issue")}
                  </ButtonLink>
                )
          }
        />
        <BetweenFindings id={finding.id} />
        <Section title={i18n.t("What was exceeded")} id="exceeded">
          <Evidence finding={finding} />
        </Section>
        <Section title={i18n.t("Can it be trusted?")} id="trust">
          <Trust finding={finding} followUp={followUp} />
        </Section>
        <Section title={i18n.t("Who has been told")} id="told">
          <WhoWasTold finding={finding} today={todayAt(finding.siteId)} />
        </Section>
        {finding.state !== "closed" && (
          <Section title={i18n.t("What to do today")} id="today">
            <WhatToDo finding={finding} />
          </Section>
        )}
        {isAboutNoise(finding) && (
          <>
            <Section title={i18n.t("What would mend it for good")} id="measures">
              {followUp.data ? (
                <Measures
                  findingId={finding.id}
                  measures={followUp.data.measures}
                  owners={followUp.data.owners}
                  today={todayAt(finding.siteId)}
                  canChange={finding.can.handle}
                  tryPath={worker && paths.tryChangesFor("worker", worker.id)}
                />
              ) : (
                <FollowUpState query={followUp} />
              )}
            </Section>
            <Section title={i18n.t("The proof, measured")} id="proof">
              {followUp.data ? (
                <ProofTable proof={followUp.data.proof} shown={finding.figures} />
              ) : (
                <FollowUpState query={followUp} />
              )}
            </Section>
          </>
        )}
        {mayReadPapers && (
          <Section title={i18n.t("Papers")} id="papers">
            {followUp.data ? (
              <Papers
                findingId={finding.id}
                files={followUp.data.files}
                timeZone={timeZone}
                canChange={finding.can.handle}
              />
            ) : (
              <FollowUpState query={followUp} />
            )}
          </Section>
        )}
        <Section title={i18n.t("What was done")} id="steps">
          <Steps finding={finding} />
          <StepForm finding={finding} />
        </Section>
      </PageBody>
      <Folio>
        {ruleSet &&
          i18n.t("{title}, rule set version {version}.", {
            title: i18n._(ruleSet.title),
            version: ruleSet.version,
          })}
      </Folio>
    </>
  );
}

function WhatToDo({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { order, figure } = orderToday(i18n, locale, finding, (word) =>
    protectorWordText(i18n, word),
  );
  const isInOrder = finding.today?.is === "in-order";
  return (
    <p className="finding-order">
      <b>{order}.</b>{" "}
      {isInOrder &&
        i18n.t("Nothing has to be given: with what is worn now the usual day is in order.")}{" "}
      {figure &&
        (isInOrder
          ? i18n.t("It would be {figure}.", { figure })
          : i18n.t("Worn throughout that would be {figure}.", { figure }))}
    </p>
  );
}

/** Measures against noise mend what a day showed; a fit, an instrument or a gap in the record is mended otherwise. */
const isAboutNoise = ({ kind }: FindingView) =>
  kind === "over-limit-outside" ||
  kind === "over-limit-at-ear" ||
  kind === "protects-too-little" ||
  kind === "protects-too-much" ||
  kind === "dual-protection" ||
  kind === "no-protector" ||
  kind === "not-worn-long-enough" ||
  kind === "peak-or-ceiling" ||
  kind === "problem-reported";

function FollowUpState({ query: { error, refetch } }: { query: UseQueryResult<FollowUpView> }) {
  return error ? (
    <Failed error={error} onRetry={() => void refetch()} />
  ) : (
    <p>
      <span className="loading-line" />
    </p>
  );
}

function Trust({
  finding,
  followUp,
}: {
  finding: FindingView;
  followUp: UseQueryResult<FollowUpView>;
}) {
  const { i18n } = useLingui();
  const user = useUser();
  const locale = useLocale();
  const { figures } = finding;
  if (!followUp.data) return <FollowUpState query={followUp} />;
  const { grade, runs } = followUp.data;
  return (
    <>
      {grade && (
        <p className="finding-grade">
          {i18n.t("The day’s level is {grade}.", { grade: gradeWord(i18n, grade) })}{" "}
          {figures?.uncertaintyDb != null
            ? i18n.t("It is known to plus or minus {uncertainty} dB.", {
                uncertainty: formatLevel(figures.uncertaintyDb, locale),
              })
            : i18n.t("No uncertainty is stated for it.")}
        </p>
      )}
      <TrustTable
        runs={runs}
        mayOpen={user.roles.some((role) => role === "officer" || role === "auditor")}
      />
    </>
  );
}

const isAboutFit = ({ kind }: FindingView) => kind === "fit-failed" || kind === "fit-due";

/** What a finding rests on, kept with it; one that is older has it from its last day. */
function ruleSetBehind({ facts, figures }: FindingView): RuleSetVersion | null {
  const kept = ruleSetOf(facts);
  if (kept || !figures) return kept;
  return ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion) ?? null;
}

/** The rule set and, where it is about one, the criterion, with their source. */
function Basis({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const ruleSet = ruleSetBehind(finding);
  if (!ruleSet) return null;
  const [, criterionId] = finding.criterion.split(":");
  const criterion = ruleSet.criteria.find(({ id }) => id === criterionId) ?? null;
  const basis = criterion && levelBasis(i18n, locale, criterion);
  return (
    <MarginNote title={i18n.t("What it rests on")} isRuled>
      <p>
        {i18n.t("{title}, rule set version {version}.", {
          title: i18n._(ruleSet.title),
          version: ruleSet.version,
        })}
      </p>
      {criterion && (
        <p>
          {i18n.t("{label} {value}", {
            label: i18n._(criterion.label),
            value: criterionValue(locale, criterion),
          })}
          {basis && ` (${basis})`}
          {"."}
        </p>
      )}
      <p>{`${citationOf(ruleSet, criterion)}.`}</p>
      {finding.rulesUntil && (
        <p>
          {i18n.t("Other rules govern the site since {date}. The days below were judged before.", {
            date: formatDate(finding.rulesUntil, locale),
          })}
        </p>
      )}
    </MarginNote>
  );
}

/** Days that stand at once; the others a click away, so that what follows from them is not far below. */
const DAYS_SHOWN = 6;

function Evidence({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { evidence, worker } = finding;
  const [showsAll, setShowsAll] = useState(false);
  const shown = showsAll ? evidence : evidence.slice(0, DAYS_SHOWN);
  const frame = useTableFrame(shown);
  const columns: DataColumn<FindingView["evidence"][number]>[] = [
    {
      id: "wrong",
      head: worker ? i18n.t("Day") : i18n.t("Day, and whose"),
      isRowHead: true,
      cell: (day) => (
        <span className="two-lines">
          <TextLink to={paths.result(day.worker.id, day.date)}>
            {formatShortDate(day.date, locale)}
          </TextLink>
          {!worker && <span className="beneath">{day.worker.name}</span>}
        </span>
      ),
      sortValue: ({ date }) => date,
    },
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("day, dB"),
      cell: (day) => <AtEarFigure figures={day} />,
      sortValue: ({ atEarDb }) => atEarDb,
    },
    {
      id: "strip",
      kind: "strip",
      head: <TableStripScale frame={frame} />,
      widthPx: 216,
      filler: <TableStripGround frame={frame} />,
      cell: (day) => <DayStrip figures={day} isHidden />,
    },
    {
      id: "outside",
      head: i18n.t("Without protection"),
      unit: i18n.t("day, dB"),
      cell: (day) => <OutsideFigure figures={day} />,
      sortValue: ({ outsideDb }) => outsideDb,
    },
    {
      id: "todo",
      head: i18n.t("Protector, while worn"),
      cell: (day) =>
        day.hasProtector === "no" ? (
          <b>{i18n.t("No protector")}</b>
        ) : (
          <ProtectorWord
            word={day.word}
            isOpen={isBoundReason(day.reason)}
            beneath={
              day.whileWornDb === null
                ? undefined
                : [day.decidingTaskName, formatLevel(day.whileWornDb, locale, day.whileWornBound)]
                    .filter(Boolean)
                    .join(" ")
            }
          />
        ),
    },
  ];
  return (
    <div className="stacked-table evidence-table">
      <DataTable
        caption={i18n.t("Days that show it, latest first")}
        columns={columns}
        rows={shown}
        rowKey={({ resultId }) => resultId}
        isTwoLine
        empty={
          <Empty title={i18n.t("No day stands behind this finding.")}>
            {finding.kind === "problem-reported"
              ? i18n.t("The worker reported it.")
              : isAboutFit(finding)
                ? i18n.t("It is about a fit, not about a day.")
                : finding.kind === "instrument"
                  ? i18n.t("It is about the instrument, not about a day.")
                  : finding.steps.some(({ kind }) => kind === "rules-changed")
                    ? i18n.t("The days that showed it were judged again, by other rules.")
                    : i18n.t("The days that showed it were corrected.")}
          </Empty>
        }
      />
      {!showsAll && evidence.length > DAYS_SHOWN && (
        <p className="table-foot no-print">
          <TextButton onClick={() => setShowsAll(true)}>
            {i18n.t("Show all {count} days", { count: evidence.length })}
          </TextButton>
        </p>
      )}
      {showsAll && finding.daysCount > evidence.length && evidence.length > 0 && (
        <p className="table-foot">
          {i18n.t("The latest {count} of {all} days are listed.", {
            count: evidence.length,
            all: formatNumber(finding.daysCount, 0, locale),
          })}
        </p>
      )}
    </div>
  );
}

function stepWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  step: FindingView["steps"][number],
  isOfFit: boolean,
): string {
  switch (step.kind) {
    case "comment":
      return i18n.t("Comment");
    case "marked-done":
      return i18n.t("Marked done");
    case "cannot":
      return i18n.t("Can’t, because");
    case "undone":
      return i18n.t("Undone");
    case "handed-over":
      return i18n.t("Handed over");
    case "escalated":
      return i18n.t("Overdue: went up");
    case "evidence-gone":
      return isOfFit
        ? i18n.t("The fit test that showed it was corrected or struck out")
        : i18n.t("The day that showed it was corrected");
    case "rules-changed": {
      const now = RULE_SETS.find(({ key }) => key === step.text);
      return now
        ? i18n.t("Its days are judged by {rules} now and no longer show it: to be checked", {
            rules: i18n._(now.title),
          })
        : i18n.t("Its days are judged by other rules now and no longer show it: to be checked");
    }
    case "state":
      return step.fromState === null && step.toState === "new"
        ? i18n.t("Noticed")
        : step.toState === "in-hand" && step.fromState === "done"
          ? i18n.t("Reopened")
          : step.toState
            ? findingStateWord(i18n, step.toState)
            : i18n.t("Changed");
  }
}

function Steps({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const timeZone = user.sites.find(({ id }) => id === finding.siteId)?.timeZone ?? "UTC";
  return (
    <ol className="steps">
      {finding.steps.map((step) => (
        <li key={step.id}>
          <time dateTime={step.at}>{formatInstant(step.at, timeZone, locale)}</time>
          <span>
            <b>{stepWords(i18n, step, isAboutFit(finding))}</b>{" "}
            <span className="by">
              {step.authorName
                ? i18n.t("by {name}", { name: step.authorName })
                : step.kind === "state" ||
                    step.kind === "rules-changed" ||
                    step.kind === "escalated"
                  ? i18n.t("by the program")
                  : ""}
            </span>
            {step.text && step.kind !== "evidence-gone" && step.kind !== "rules-changed" && (
              <span className="said block">
                {step.kind === "handed-over" || step.kind === "escalated"
                  ? i18n.t("to {name}", { name: step.text })
                  : (ownReasonWords(i18n, step.text) ?? step.text)}
              </span>
            )}
          </span>
        </li>
      ))}
    </ol>
  );
}

/** A reason that a person gave, or what the program itself closed it for. */
function closingWords(i18n: ReturnType<typeof useLingui>["i18n"], reason: string | null): string {
  if (reason === null || reason === "evidence-gone") return ".";
  const own = ownReasonWords(i18n, reason);
  return own === null ? `: ${reason}` : `: ${own}.`;
}

/** What the program itself closes a finding for; null for what a person wrote. */
function ownReasonWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  reason: string | null,
): string | null {
  switch (reason) {
    case "calibrated":
      return i18n.t("the instrument was calibrated");
    case "refitted":
      return i18n.t("it was fitted anew");
    case "no-longer-worn":
      return i18n.t("The protector is worn no longer.");
    case "other-issued":
      return i18n.t("another that fits was handed out");
    case "fit-tested":
      return i18n.t("the fit was tested");
    case "no-longer-due":
      return i18n.t("it is no longer due");
    default:
      return null;
  }
}

function WhoWasTold({ finding, today }: { finding: FindingView; today: string }) {
  const { i18n } = useLingui();
  const [look, setLook] = useState<ToldNotice | null>(null);
  return (
    <>
      <Told finding={finding} today={today} onLook={setLook} />
      {look && (
        <LookAtNotices
          notices={[look]}
          title={i18n.t("The letter")}
          onClose={() => setLook(null)}
          actions={<Button onClick={() => setLook(null)}>{i18n.t("Close the letter")}</Button>}
        />
      )}
    </>
  );
}

function Margin({ finding }: { finding: FindingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { todayAt } = useSiteChoice();
  return (
    <>
      <Basis finding={finding} />
      <MarginNote title={i18n.t("Since when, until when")}>
        <p>
          {finding.daysCount > 1
            ? i18n.t(
                "{days, plural, one {# day} other {{figure} days}}{workers, plural, =1 {} other { of # workers}}, {first} to {last}.",
                {
                  days: finding.daysCount,
                  figure: formatNumber(finding.daysCount, 0, locale),
                  workers: finding.workersCount,
                  first: formatDate(finding.firstDate, locale),
                  last: formatDate(finding.lastDate, locale),
                },
              )
            : i18n.t("{date}.", { date: formatDate(finding.lastDate, locale) })}
        </p>
        {finding.dueOn && finding.state !== "closed" && (
          <p>
            {i18n.t("Due {date}.", { date: formatDate(finding.dueOn, locale) })}{" "}
            {isOverdue(finding, todayAt(finding.siteId)) && (
              <b className="label-ink">{i18n.t("Overdue.")}</b>
            )}
          </p>
        )}
        {finding.ownerName && <p>{i18n.t("In hand with {name}.", { name: finding.ownerName })}</p>}
        {finding.closedOn && (
          <p>
            {i18n.t("Closed {date}", { date: formatDate(finding.closedOn, locale) })}
            {closingWords(i18n, finding.closingReason)}
          </p>
        )}
        {finding.previousId && (
          <p>
            <TextLink to={paths.finding(finding.previousId)}>
              {i18n.t("The finding that came back")}
            </TextLink>
          </p>
        )}
      </MarginNote>
    </>
  );
}
