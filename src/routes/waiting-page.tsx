import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useMemo, useState } from "react";
import { useSearchParams } from "react-router-dom";
import type { RuleSetVersion } from "../../shared/acoustics/types";
import { noticedSentence } from "../../shared/findings/sentences";
import { findingWord } from "../../shared/findings/words";
import {
  formatDate,
  formatDay,
  formatDayMonthNear,
  formatTime,
  formatWeekday,
  localDateOf,
} from "../../shared/format/date";
import { startsSentence, withinSentence } from "../../shared/format/words";
import { actionValueDb, mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { FindingRow } from "../../shared/schemas/finding";
import type { SessionUser } from "../../shared/schemas/session";
import type { CrewProgress, WaitingView } from "../../shared/schemas/waiting";
import { addDays } from "../../shared/time/zone";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead } from "../components/page";
import { OutgoingNotice } from "../features/notices/outgoing-notice";
import { TroubledNotices } from "../features/notices/troubled-notices";
import { useUser } from "../features/session/session";
import { CrewRibbon } from "../features/waiting/crew-ribbon";
import { isBeforeNoise, nextShiftOf, type Placed, placeFindings } from "../features/waiting/due";
import { waitingQuery } from "../features/waiting/queries";
import { WaitingTable } from "../features/waiting/waiting-table";
import { useLocale } from "../lib/i18n";
import { useMoveFocus } from "../lib/move-focus";
import { useNow } from "../lib/use-now";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/waiting.css";

function siteChoices(user: SessionUser) {
  return user.sites.length > 1 ? user.sites : [];
}

export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const now = useNow();
  const [search, setSearch] = useSearchParams();
  const siteId = search.get("site") ?? undefined;
  const { data, error, isPending, refetch } = useQuery(waitingQuery(siteId));

  const zoneOf = useMemo(() => {
    const zones = new Map(user.sites.map((site) => [site.id, site.timeZone]));
    return (id: string | undefined) =>
      (id === undefined ? undefined : zones.get(id)) ?? user.sites[0]?.timeZone ?? "UTC";
  }, [user.sites]);
  const todayAt = (id: string) => localDateOf(now.toISOString(), zoneOf(id));
  const nextShiftAt = (finding: FindingRow) =>
    nextShiftOf(finding, data?.crews ?? [], {
      today: todayAt(finding.siteId),
      time: formatTime(now.toISOString(), zoneOf(finding.siteId)),
    });
  const { items, toBeChecked } = placeFindings(
    data ? [...data.findings, ...data.toBeChecked] : [],
    todayAt,
    nextShiftAt,
  );
  const urgent = items.filter(({ finding }) => isBeforeNoise(finding, nextShiftAt(finding))).length;
  const overdue = items.filter(({ group }) => group === "overdue").length;
  const zones = [...new Set((data?.crews ?? []).map(({ timeZone }) => timeZone))];
  const governing = (data?.ruleSets ?? []).flatMap(({ siteName: name, ...one }) => {
    const ruleSet = ruleSetVersion(one.ruleSetKey, one.ruleSetVersion);
    return ruleSet ? [{ name, ruleSet }] : [];
  });
  const choices = siteChoices(user);
  const siteName = (id: string) => user.sites.find((site) => site.id === id)?.name;

  return (
    <>
      <PageBody
        margin={
          data && (
            <WaitingMargin
              data={data}
              toBeChecked={toBeChecked}
              zoneOf={zoneOf}
              ownName={user.name}
            />
          )
        }
        marginWidthPx={220}
      >
        <PageHead
          title={i18n.t("Waiting for you")}
          lead={
            data ? (
              <>
                {startsSentence(formatDay(data.today, locale), locale)}.{" "}
                <b>
                  {i18n.t(
                    "{count, plural, =0 {Nothing needs a person.} one {One thing needs a person,} other {# things need a person,}}",
                    {
                      count: items.length,
                    },
                  )}
                </b>{" "}
                {items.length > 0 &&
                  (urgent > 0
                    ? i18n.t(
                        "{count, plural, other {# of them before the worker goes back into noise.}}",
                        { count: urgent },
                      )
                    : i18n.t("none of them before the worker goes back into noise."))}{" "}
                {overdue > 0 && (
                  <b>
                    {i18n.t("{count, plural, one {One is overdue.} other {# are overdue.}}", {
                      count: overdue,
                    })}
                  </b>
                )}
              </>
            ) : (
              " "
            )
          }
          actions={
            choices.length > 0 && (
              <fieldset className="site-choice">
                <legend className="sr-only">{i18n.t("Site")}</legend>
                {[{ id: "", name: i18n.t("All sites") }, ...choices].map((site) => (
                  <label key={site.id}>
                    <input
                      type="radio"
                      name="site"
                      className="sr-only"
                      checked={(siteId ?? "") === site.id}
                      onChange={() =>
                        setSearch(site.id === "" ? {} : { site: site.id }, { replace: true })
                      }
                    />
                    <span>{site.name}</span>
                  </label>
                ))}
              </fieldset>
            )
          }
        />
        {data && data.crews.length > 0 ? (
          zones.map((timeZone) => {
            const crews = data.crews.filter((crew) => crew.timeZone === timeZone);
            return (
              <CrewRibbon
                key={timeZone}
                crews={crews}
                nowTime={formatTime(now.toISOString(), timeZone)}
                title={
                  zones.length > 1
                    ? [...new Set(crews.map((crew) => siteName(crew.siteId)))].join(", ")
                    : undefined
                }
              />
            );
          })
        ) : (
          <div className={isPending ? "ribbon-space" : undefined} />
        )}
        <WaitingTable
          items={items}
          todayAt={todayAt}
          state={data ? "ready" : error ? "failed" : "loading"}
          error={error}
          onRetry={() => void refetch()}
          empty={
            <Empty title={i18n.t("Nothing waits for you.")}>
              <NextThing crews={data?.crews ?? []} />
            </Empty>
          }
        />
        {data?.next && (
          <p className="table-foot">
            {i18n.t("More are due later.")}{" "}
            <TextLink to={paths.findings}>{i18n.t("All findings")}</TextLink>
          </p>
        )}
        {items.length > 0 && <Reading ruleSets={governing.map(({ ruleSet }) => ruleSet)} />}
      </PageBody>
      <Folio>
        {governing
          .map(({ name, ruleSet }) => {
            const title = i18n._(ruleSet.title);
            const { version } = ruleSet;
            return user.sites.length > 1
              ? i18n.t("{site}: {title}, rule set version {version}.", {
                  site: name,
                  title,
                  version,
                })
              : i18n.t("{title}, rule set version {version}.", { title, version });
          })
          .join(" ")}
      </Folio>
    </>
  );
}

/** How to read the figures, in one line under the table: only what the rules in view have. */
function Reading({ ruleSets }: { ruleSets: readonly RuleSetVersion[] }) {
  const { i18n } = useLingui();
  const isAtEar = ruleSets.map((ruleSet) => mainLimit(ruleSet).judged === "at-the-ear");
  const hasTarget = ruleSets.map((ruleSet) => actionValueDb(ruleSet) !== null);
  const passed = i18n.t(
    "the limit must not be exceeded. Tick past it: Over; whisker across it: Can’t tell yet.",
  );
  return (
    <p className="how-to-read">
      {isAtEar.includes(true) && (
        <span>
          <b>{i18n.t("At the ear")}</b> {passed}
        </span>
      )}
      {isAtEar.includes(false) && (
        <span>
          <b>{i18n.t("Without protection")}</b>{" "}
          {isAtEar.includes(true)
            ? i18n.t("the same, where the rule’s limit is judged there.")
            : passed}
        </span>
      )}
      <span>
        {!hasTarget.includes(true)
          ? i18n.t("▲ while worn; the rule states no target band")
          : hasTarget.includes(false)
            ? i18n.t("▲ while worn, against the target where the rule has one")
            : i18n.t("▲ while worn, against the target")}
      </span>
      {isAtEar.includes(true) && (
        <span>
          <b>{i18n.t("Without protection")}</b>{" "}
          {i18n.t("the action values ask for controls, wearing and zones.")}
        </span>
      )}
    </p>
  );
}

function NextThing({ crews }: { crews: readonly CrewProgress[] }) {
  const { i18n } = useLingui();
  const open = crews.find(({ members, absent, saved }) => members - absent > saved);
  if (!open) return <>{i18n.t("Every day that has begun is entered.")}</>;
  return (
    <>
      {i18n.t("The day of {crew} is not entered yet.", { crew: open.name })}{" "}
      <TextLink to={paths.day(open.id, open.date)}>{i18n.t("Enter the day")}</TextLink>
    </>
  );
}

const CHECKS_SHOWN = 6;

function WaitingMargin({
  data,
  toBeChecked,
  zoneOf,
  ownName,
}: {
  data: WaitingView;
  toBeChecked: Placed["toBeChecked"];
  zoneOf: (siteId: string | undefined) => string;
  ownName: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [said, setSaid] = useState("");
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const tellSent = (people: number) => {
    setSaid(
      i18n.t(
        "{people, plural, one {The notice is on its way.} other {# notices are on their way.}}",
        {
          people,
        },
      ),
    );
    moveFocus("[data-said]");
  };
  const siteOfWorker = new Map(
    [...data.findings, ...data.toBeChecked].flatMap(({ worker, siteId }) =>
      worker ? [[worker.id, siteId] as const] : [],
    ),
  );
  const zoneOfNotice = (workers: readonly { id: string }[]) =>
    zoneOf(workers.map(({ id }) => siteOfWorker.get(id)).find(Boolean) ?? data.crews[0]?.siteId);
  const isEmpty =
    data.outgoing.length +
      data.troubled.length +
      data.toBeChecked.length +
      data.calibrationsDue.length +
      data.stepsDue.length +
      data.letters.toPrint +
      data.letters.late ===
    0;
  return (
    <div ref={place} className="contents">
      <p className="status" role="status" data-said tabIndex={-1}>
        {said}
      </p>
      {data.outgoing.map((entry) => (
        <OutgoingNotice
          key={entry.entryId}
          entry={entry}
          ownName={ownName}
          onSent={tellSent}
          timeZone={zoneOfNotice(entry.notices.flatMap(({ workers }) => workers))}
        />
      ))}
      {data.troubled.length > 0 && <TroubledNotices notices={data.troubled} onSent={tellSent} />}
      {toBeChecked.length > 0 && (
        <MarginNote title={i18n.t("Done, to be checked")}>
          {toBeChecked.slice(0, CHECKS_SHOWN).map(({ finding, also }) => (
            <p key={finding.id}>
              <TextLink className="is-quiet is-name" to={paths.finding(finding.id)}>
                {finding.worker?.name ?? finding.subjectName}
              </TextLink>{" "}
              {noticedSentence(i18n, locale, finding.kind, finding.facts)}
              {finding.rulesUntil &&
                `; ${i18n.t("under the rules before {date}", { date: formatDate(finding.rulesUntil, locale) })}`}
              {also
                .filter(({ state }) => state !== "done")
                .map(({ kind }) =>
                  i18n.t(", and {what}", { what: withinSentence(findingWord(i18n, kind), locale) }),
                )}
              .
            </p>
          ))}
          {toBeChecked.length > CHECKS_SHOWN && (
            <p>
              <TextLink to={`${paths.findings}?state=done`}>
                {i18n.t("and {count} more", { count: toBeChecked.length - CHECKS_SHOWN })}
              </TextLink>
            </p>
          )}
        </MarginNote>
      )}
      {data.letters.toPrint + data.letters.late > 0 && (
        <MarginNote title={i18n.t("Letters of results")}>
          <p>
            <TextLink to={paths.letters}>
              {i18n.t("{count, plural, one {# to print} other {# to print}}", {
                count: data.letters.toPrint,
              })}
            </TextLink>
            {data.letters.late > 0 && (
              <b>
                {i18n.t(", {count, plural, one {# late} other {# late}}", {
                  count: data.letters.late,
                })}
              </b>
            )}
          </p>
        </MarginNote>
      )}
      {data.calibrationsDue.length > 0 && (
        <MarginNote title={i18n.t("Calibration due")}>
          <Leaders
            items={data.calibrationsDue.map(({ id, name, dueOn }) => ({
              key: id,
              label: (
                <TextLink className="is-quiet" to={paths.instruments}>
                  {name}
                </TextLink>
              ),
              value:
                dueOn < data.today
                  ? i18n.t("since {date}", { date: formatDayMonthNear(dueOn, data.today, locale) })
                  : dueOn <= addDays(data.today, 6)
                    ? formatWeekday(dueOn, locale)
                    : formatDayMonthNear(dueOn, data.today, locale),
            }))}
          />
        </MarginNote>
      )}
      {data.stepsDue.length > 0 && (
        <MarginNote title={i18n.t("Your steps of plans")}>
          <Leaders
            items={data.stepsDue.map(({ id, planId, what, dueOn }) => ({
              key: id,
              label: (
                <TextLink className="is-quiet" to={`${paths.plan(planId)}#steps`}>
                  {what}
                </TextLink>
              ),
              value:
                dueOn < data.today
                  ? i18n.t("since {date}", { date: formatDayMonthNear(dueOn, data.today, locale) })
                  : dueOn <= addDays(data.today, 6)
                    ? formatWeekday(dueOn, locale)
                    : formatDayMonthNear(dueOn, data.today, locale),
            }))}
          />
        </MarginNote>
      )}
      <MarginNote title={i18n.t("All that is due")}>
        <p>
          <TextLink to={paths.duties}>{i18n.t("List and calendar")}</TextLink>
        </p>
      </MarginNote>
      {isEmpty && (
        <MarginNote title={i18n.t("Nothing goes out")}>
          <p>
            {i18n.t(
              "No notice waits, none is in trouble, and no calibration runs out in the next two weeks.",
            )}
          </p>
        </MarginNote>
      )}
    </div>
  );
}
