import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect, useMemo, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { noticedSentence } from "../../shared/findings/sentences";
import { formatDay, formatDayMonth, formatTime, formatWeekday } from "../../shared/format/date";
import { ruleSetVersion } from "../../shared/rule-sets";
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
import { placeFindings } from "../features/waiting/due";
import { waitingQuery } from "../features/waiting/queries";
import { WaitingTable } from "../features/waiting/waiting-table";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/waiting.css";

/** The clock, by the minute. */
function useNow(): Date {
  const [now, setNow] = useState(() => new Date());
  useEffect(() => {
    const timer = setInterval(() => setNow(new Date()), 30_000);
    return () => clearInterval(timer);
  }, []);
  return now;
}

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
  const nowTimeAt = (id: string) => formatTime(now.toISOString(), zoneOf(id));
  const items = data ? placeFindings(data.findings, data.crews, data.today, nowTimeAt) : [];
  const urgent = items.filter(({ group }) => group === "before-noise").length;
  const zones = [...new Set((data?.crews ?? []).map(({ timeZone }) => timeZone))];
  const frame = items.find(({ finding }) => finding.figures)?.finding.figures;
  const ruleSet = frame && ruleSetVersion(frame.ruleSetKey, frame.ruleSetVersion);
  const choices = siteChoices(user);
  const siteName = (id: string) => user.sites.find((site) => site.id === id)?.name;

  return (
    <>
      <PageBody
        margin={data && <WaitingMargin data={data} zoneOf={zoneOf} ownName={user.name} />}
        marginWidthPx={220}
      >
        <PageHead
          title={i18n.t("Waiting for you")}
          lead={
            data ? (
              <>
                {formatDay(data.today, locale)}.{" "}
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
                    : i18n.t("none of them before the worker goes back into noise."))}
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
          today={data?.today ?? ""}
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
        {items.length > 0 && (
          <Reading
            hasLimitAtEar={
              ruleSet?.criteria.some(
                ({ judged, kind }) => judged === "at-the-ear" && kind === "limit",
              ) ?? true
            }
          />
        )}
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

/** How to read the figures, in one line under the table. */
function Reading({ hasLimitAtEar }: { hasLimitAtEar: boolean }) {
  const { i18n } = useLingui();
  return (
    <p className="how-to-read">
      <span>
        <b>{hasLimitAtEar ? i18n.t("At the ear") : i18n.t("Without protection")}</b>{" "}
        {i18n.t(
          "the limit must not be exceeded. Tick past it: Over; whisker across it: Can’t tell yet.",
        )}
      </span>
      <span>{i18n.t("▲ while worn, against the target")}</span>
      <span>
        <b>{i18n.t("Without protection")}</b>{" "}
        {i18n.t("the action values ask for controls, wearing and zones.")}
      </span>
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
  zoneOf,
  ownName,
}: {
  data: WaitingView;
  zoneOf: (siteId: string | undefined) => string;
  ownName: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
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
      data.calibrationsDue.length ===
    0;
  return (
    <>
      {data.outgoing.map((entry) => (
        <OutgoingNotice
          key={entry.entryId}
          entry={entry}
          ownName={ownName}
          timeZone={zoneOfNotice(entry.notices.flatMap(({ workers }) => workers))}
        />
      ))}
      {data.troubled.length > 0 && (
        <TroubledNotices
          notices={data.troubled}
          timeZoneOf={({ workers }) => zoneOfNotice(workers)}
        />
      )}
      {data.toBeChecked.length > 0 && (
        <MarginNote title={i18n.t("Done, to be checked")}>
          {data.toBeChecked.slice(0, CHECKS_SHOWN).map((finding) => (
            <p key={finding.id}>
              <TextLink className="is-quiet is-name" to={paths.finding(finding.id)}>
                {finding.worker?.name ?? finding.subjectName}
              </TextLink>{" "}
              {noticedSentence(i18n, locale, finding.kind, finding.facts)}.
            </p>
          ))}
          {data.toBeChecked.length > CHECKS_SHOWN && (
            <p>
              <TextLink to={`${paths.findings}?state=done`}>
                {i18n.t("and {count} more", { count: data.toBeChecked.length - CHECKS_SHOWN })}
              </TextLink>
            </p>
          )}
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
                  ? i18n.t("since {date}", { date: formatDayMonth(dueOn, locale) })
                  : dueOn <= addDays(data.today, 6)
                    ? formatWeekday(dueOn, locale)
                    : formatDayMonth(dueOn, locale),
            }))}
          />
        </MarginNote>
      )}
      {isEmpty && (
        <MarginNote title={i18n.t("Nothing goes out")}>
          <p>
            {i18n.t(
              "No notice waits, none is in trouble, and no calibration runs out in the next two weeks.",
            )}
          </p>
        </MarginNote>
      )}
    </>
  );
}
