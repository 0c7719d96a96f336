import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { type ReactNode, useMemo, useRef } from "react";
import { Link, useNavigate, useParams, useSearchParams } from "react-router-dom";
import { formatInstant, formatTime, localDateOf } from "../../shared/format/date";
import type { Locale } from "../../shared/i18n";
import { ruleSetVersion } from "../../shared/rule-sets";
import { stripFrame } from "../components/day-figures";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { InHead } from "../components/in-head";
import { TextLink } from "../components/link";
import { Folio, PageBody } from "../components/page";
import { AskOfficer } from "../features/crew-sheet/ask-officer";
import { crewSheetQueries } from "../features/crew-sheet/queries";
import { SheetFrame, SheetLoading, SheetRows } from "../features/crew-sheet/sheet-part";
import {
  expectedLead,
  expectedTitle,
  isForToday,
  lastLead,
  lastTitle,
  splitExpected,
  splitLast,
} from "../features/crew-sheet/sheet-parts";
import { hasRole, useUser } from "../features/session/session";
import { useConnection } from "../lib/connection";
import { useLocale } from "../lib/i18n";
import { usePageTitle } from "../lib/page-title";
import { useNow } from "../lib/use-now";
import { paths } from "../paths";
import "../styles/crew-sheet.css";

const PARTS = ["expected", "last", "ask"] as const;
type Part = (typeof PARTS)[number];
const isPart = (value: string | null): value is Part => PARTS.some((part) => part === value);

/** The supervisor's sheet: who is expected in noise today, who was over, and one order for each who needs one. */
export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const { crewId } = useParams();
  const crews = useQuery({ ...crewSheetQueries.crews, enabled: crewId === undefined });
  const own = crews.data?.find(({ supervisorNames }) => supervisorNames.includes(user.name));
  const id = crewId ?? own?.id ?? crews.data?.[0]?.id;
  if (id !== undefined) return <CrewSheet crewId={id} />;
  return (
    <PageBody>
      <NoCrewHead />
      {crews.isPending && <SheetLoading />}
      {crews.isError && <Failed error={crews.error} onRetry={() => void crews.refetch()} />}
      {crews.isSuccess && (
        <Empty title={i18n.t("You have no crew today.")}>
          {i18n.t("Your safety officer puts you in charge of one.")}
        </Empty>
      )}
    </PageBody>
  );
}

function NoCrewHead() {
  const { i18n } = useLingui();
  const title = i18n.t("Crew sheet");
  usePageTitle(title);
  return <h1 className="sheet-crew">{title}</h1>;
}

function CrewSheet({ crewId }: { crewId: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const [search] = useSearchParams();
  const asked = search.get("show");
  const shows: Part = isPart(asked) ? asked : "expected";
  const sheet = useQuery(crewSheetQueries.sheet(crewId));
  const { data } = sheet;
  const frame = useMemo(
    () => (data ? stripFrame(i18n, locale, data.governingRuleSet, data.ruleSetVersion) : null),
    [data, i18n, locale],
  );
  const ruleSet = data ? ruleSetVersion(data.governingRuleSet, data.ruleSetVersion) : null;
  const refresh = () => void sheet.refetch();
  const now = useNow().toISOString();
  const isToday = !data || localDateOf(now, data.crew.timeZone) === data.expected.date;

  const isOffline = useConnection() === "offline";
  const asOf =
    data?.asOf ?? (data && isOffline ? new Date(sheet.dataUpdatedAt).toISOString() : null);

  let expected: ReactNode = <LoadingPart name="expected" />;
  let last: ReactNode = <LoadingPart name="last" />;
  let ask: ReactNode = null;
  if (data && frame) {
    const { timeZone, usualStart } = data.crew;
    const hasStarted = isToday && formatTime(now, timeZone) >= usualStart;
    const today = splitExpected(data.expected.rows);
    const common = { crewId, timeZone, frame, onStale: refresh };
    expected = (
      <SheetFrame
        name="expected"
        title={expectedTitle(i18n, today, hasStarted)}
        lead={expectedLead(i18n, locale, data)}
        frame={frame}
      >
        {data.expected.rows.length === 0 ? (
          <Empty
            title={
              isToday
                ? i18n.t("Nobody belongs to this crew today.")
                : i18n.t("Nobody belongs to this crew then.")
            }
          />
        ) : (
          <SheetRows {...common} part="expected" rows={today} />
        )}
        {hasRole(user, "supervisor", "officer") && (
          <ul className="sheet-ways">
            <li>
              <TextLink
                className="sheet-more"
                to={{ pathname: paths.wearingRound, search: `?crew=${crewId}` }}
              >
                {i18n.t("Wearing round: who wears it?")}
              </TextLink>
            </li>
            <li>
              <TextLink className="sheet-more" to={paths.crewPeople(crewId)}>
                {i18n.t("Not in and on loan")}
              </TextLink>
            </li>
            <li>
              <TextLink className="sheet-more" to={paths.handOvers(crewId)}>
                {i18n.t("Hand-over")}
              </TextLink>
            </li>
          </ul>
        )}
      </SheetFrame>
    );
    last = (
      <SheetFrame
        name="last"
        title={lastTitle(i18n, data.last.rows, frame.hasLimitAtEar)}
        lead={lastLead(i18n, locale, data.last)}
        frame={frame}
      >
        <SheetRows
          {...common}
          part="last"
          rows={splitLast(data.last.date === null ? [] : data.last.rows, frame.hasLimitAtEar)}
          nextSheetOf={(row) =>
            isForToday(row, data.expected.rows) ? { date: data.expected.date, isToday } : null
          }
        />
      </SheetFrame>
    );
    ask = (
      <AskOfficer
        crewId={crewId}
        timeZone={timeZone}
        rows={[...data.expected.rows, ...data.last.rows]}
        onStale={refresh}
      />
    );
  }

  return (
    <>
      <PageBody>
        <div className="crew-sheet" data-shows={shows}>
          <InHead>
            <CrewChoice crewId={crewId} crew={data?.crew} crews={data?.crews ?? []} now={now} />
          </InHead>
          <FootWords crewId={crewId} shows={shows} isToday={isToday} />
          {asOf && data && (
            <p className="sheet-as-of">
              {i18n.t("As of {time}, no connection.", {
                time: asOfText(asOf, now, data.crew.timeZone, locale),
              })}
            </p>
          )}
          {data?.handOver && (
            <p className="sheet-as-of">
              <TextLink to={paths.handOvers(crewId)}>
                {i18n.t("Handed to you by {name}", { name: data.handOver.byName })}
              </TextLink>
              {", "}
              {asOfText(data.handOver.givenAt, now, data.crew.timeZone, locale)}
            </p>
          )}
          {sheet.isError && !data && <Failed error={sheet.error} onRetry={refresh} />}
          {(!sheet.isError || data) && (
            <div className="sheet-columns">
              {expected}
              <div className="sheet-second">
                {last}
                {ask}
              </div>
            </div>
          )}
        </div>
      </PageBody>
      <Folio>
        {ruleSet &&
          i18n.t("{title}, version {version}", {
            title: i18n._(ruleSet.title),
            version: ruleSet.version,
          })}
      </Folio>
    </>
  );
}

/** Of today the time is enough. */
function asOfText(asOf: string, now: string, timeZone: string, locale: Locale): string {
  return localDateOf(asOf, timeZone) === localDateOf(now, timeZone)
    ? formatTime(asOf, timeZone)
    : formatInstant(asOf, timeZone, locale);
}

function LoadingPart({ name }: { name: "expected" | "last" }) {
  const { i18n } = useLingui();
  return (
    <SheetFrame
      name={name}
      title={name === "expected" ? i18n.t("Expected today") : i18n.t("Last shift")}
      lead={<span className="loading-line" />}
      frame={null}
    >
      <SheetLoading />
    </SheetFrame>
  );
}

/** Whose sheet this is; with several crews it is chosen here. */
function CrewChoice({
  crewId,
  crew,
  crews,
  now,
}: {
  crewId: string;
  crew: { name: string; timeZone: string } | undefined;
  crews: readonly { id: string; name: string }[];
  /** An instant. */
  now: string;
}) {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const isChoice = crews.length > 1;
  const heading = useRef<HTMLHeadingElement>(null);
  usePageTitle(heading);
  return (
    <div className="sheet-head">
      <h1 className="sheet-crew" ref={heading}>
        {crew && !isChoice
          ? i18n.t("Crew sheet, {crew}", { crew: crew.name })
          : i18n.t("Crew sheet")}
        {crew && isChoice && <span className="sr-only">, {crew.name}</span>}
      </h1>
      {isChoice && (
        <select
          className="input"
          aria-label={i18n.t("Crew")}
          value={crewId}
          onChange={(event) => navigate(paths.crewSheetOf(event.target.value))}
        >
          {crews.map(({ id, name }) => (
            <option key={id} value={id}>
              {name}
            </option>
          ))}
        </select>
      )}
      {crew && <time className="sheet-clock">{formatTime(now, crew.timeZone)}</time>}
    </div>
  );
}

/** On a phone one part is shown at a time; its words stand at the foot. */
function FootWords({ crewId, shows, isToday }: { crewId: string; shows: Part; isToday: boolean }) {
  const { i18n } = useLingui();
  const words: Record<Part, string> = {
    expected: isToday ? i18n.t("Expected today") : i18n.t("Expected next"),
    last: i18n.t("Last shift"),
    ask: i18n.t("Ask the officer"),
  };
  return (
    <nav className="foot-words" aria-label={i18n.t("Parts of the sheet")}>
      <ul>
        {PARTS.map((part) => (
          <li key={part}>
            <Link
              to={{ pathname: paths.crewSheetOf(crewId), search: `?show=${part}` }}
              replace
              aria-current={part === shows ? "page" : undefined}
            >
              {words[part]}
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  );
}
