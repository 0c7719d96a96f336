import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect, useMemo, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { localDateOf } from "../../shared/format/date";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { SessionUser } from "../../shared/schemas/session";
import { Button } from "../components/button";
import { stripFrame } from "../components/day-figures";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead } from "../components/page";
import { Status } from "../components/status";
import type { StripFrame } from "../components/strip-of-day";
import { hasRole, useUser } from "../features/session/session";
import { ColumnsTable } from "../features/year-file/columns-table";
import { DrawsSection } from "../features/year-file/draws-section";
import { GapsTable } from "../features/year-file/gaps-table";
import { MonthsList } from "../features/year-file/months-list";
import { MonthsTable } from "../features/year-file/months-table";
import {
  downloadRecords,
  downloadWorkbook,
  downloadYear,
  WORKERS_AS,
  yearFileQueries,
} from "../features/year-file/queries";
import { ReportsSection } from "../features/year-file/reports-section";
import { useLocale } from "../lib/i18n";
import { useIsPhone } from "../lib/use-is-phone";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/year-file.css";

/** First what is missing in a year, then the year as a file. */
export function Component() {
  const { i18n } = useLingui();
  const { sites } = useUser();
  const [search] = useSearchParams();
  const asked = sites.find(({ id }) => id === search.get("site"));
  const [place, setPlace] = useState(0);
  const site = asked ?? sites[place] ?? sites[0];
  // Nobody chose a site: one without a single day is passed over as long as another is left.
  if (site)
    return (
      <YearFile
        site={site}
        onNothingThere={!asked && place + 1 < sites.length ? () => setPlace(place + 1) : undefined}
      />
    );
  return (
    <PageBody>
      <PageHead title={i18n.t("Year file")} />
      <Empty title={i18n.t("There is no site yet.")} />
    </PageBody>
  );
}

/**
 * All the year's rule sets have one limit: only then has the table one line for it. Without any limit at the ear there is
 * nothing to count there.
 */
function useYearFrame(ruleSets: readonly { key: string; version: number }[] | undefined) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return useMemo((): { frame: StripFrame | null; hasLimitAtEar: boolean } => {
    const frames = (ruleSets ?? []).map(({ key, version }) =>
      stripFrame(i18n, locale, key, version),
    );
    const levels = new Set(frames.map(({ limits }) => limits[0]?.levelDb));
    return {
      frame: levels.size === 1 ? (frames[0] ?? null) : null,
      hasLimitAtEar: frames.length === 0 || frames.some((frame) => frame.hasLimitAtEar),
    };
  }, [ruleSets, i18n, locale]);
}

function YearFile({
  site,
  onNothingThere,
}: {
  site: SessionUser["sites"][number];
  onNothingThere?: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const { sites, visits } = user;
  const [search, setSearch] = useSearchParams();
  const today = localDateOf(new Date().toISOString(), site.timeZone);
  const asked = Number(search.get("year"));
  const visitedYears = visits.filter(({ siteId }) => siteId === site.id).map((visit) => visit.year);
  const [visited] = visitedYears;
  const year =
    Number.isInteger(asked) && asked > 1900 ? asked : (visited ?? Number(today.slice(0, 4)));
  const workers = WORKERS_AS.find((one) => one === search.get("workers")) ?? "number";
  const yearOfSite = { siteId: site.id, year };
  const gaps = useQuery(yearFileQueries.gaps(yearOfSite));
  const isNothingThere = gaps.data?.years.length === 0;
  useEffect(() => {
    if (isNothingThere) onNothingThere?.();
  }, [isNothingThere, onNothingThere]);
  const limits = useYearFrame(gaps.data?.ruleSets);
  const [said, setSaid] = useState("");
  const Months = useIsPhone() ? MonthsList : MonthsTable;
  const [isAsking, setIsAsking] = useState(false);
  const [error, setError] = useState<unknown>(null);
  const years = [...new Set([year, ...visitedYears, ...(gaps.data?.years ?? [])])].sort(
    (a, b) => b - a,
  );

  const choose = (name: string, value: string) => {
    setSaid("");
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        next.set(name, value);
        return next;
      },
      { replace: true, preventScrollReset: true },
    );
  };

  /** A browser saves an error under the file's name: so it is asked first whether the server would answer. */
  async function download(kind: "csv" | "zip" | "xlsx") {
    setIsAsking(true);
    setError(null);
    const { error: refused } = await gaps.refetch();
    setIsAsking(false);
    if (refused) {
      setError(refused);
      return;
    }
    if (kind === "zip") {
      downloadRecords(yearOfSite, workers);
      setSaid(i18n.t("The browser is taking the ZIP. You may leave this page."));
    } else if (kind === "xlsx") {
      downloadWorkbook(yearOfSite, workers);
      setSaid(i18n.t("The browser is taking the workbook. You may leave this page."));
    } else {
      downloadYear(yearOfSite, workers, locale);
      setSaid(i18n.t("The browser is taking both files. You may leave this page."));
    }
  }

  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("What the file holds")}>
              <p>
                {i18n.t(
                  "One record for each worker and day: levels with their uncertainty, verdicts, protector, versions of rules and method, and the result’s id, by which it opens to its working.",
                )}
              </p>
              <p>
                {i18n.t(
                  "Figures stand at full stored precision. A file that broke off lacks its last record, which counts the others.",
                )}
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("The ZIP")}>
              <p>
                {i18n.t(
                  "It holds all the year’s records, each result with its inputs, and a page that checks the file on a laptop without a network: hashes, and every result derived anew.",
                )}
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("In the trail")}>
              <p>{i18n.t("Taking the file is itself an event, with your name and the time.")}</p>
              <p>
                <TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead title={i18n.t("Year file")} />
        <h2 className="year-missing" id="missing">
          {i18n.t("What is missing in {year}, {site}", { year: String(year), site: site.name })}
        </h2>
        {gaps.isError ? (
          <Failed error={gaps.error} onRetry={() => void gaps.refetch()} />
        ) : (
          <GapsTable
            key={`${site.id} ${year}`}
            year={yearOfSite}
            counts={gaps.data?.counts}
            caption={i18n.t("What is missing")}
          />
        )}
        {hasRole(user, "auditor", "officer") && gaps.data && gaps.data.months.length > 0 && (
          <DrawsSection
            year={yearOfSite}
            mayDraw={hasRole(user, "auditor")}
            timeZone={site.timeZone}
          />
        )}
        {hasRole(user, "auditor", "officer") && gaps.data && gaps.data.months.length > 0 && (
          <ReportsSection
            key={`reports ${site.id} ${year}`}
            year={yearOfSite}
            timeZone={site.timeZone}
          />
        )}
        <div className="filter-row year-choice">
          <FilterSelect
            label={i18n.t("Year")}
            value={String(year)}
            choices={years.map((one) => ({ value: String(one), label: String(one) }))}
            onChange={(value) => choose("year", value)}
          />
          <FilterSelect
            label={i18n.t("Site")}
            value={site.id}
            choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
            onChange={(value) => choose("site", value)}
          />
          <FilterSelect
            label={i18n.t("Workers shown as")}
            value={workers}
            choices={[
              { value: "number", label: i18n.t("Employee number") },
              { value: "name", label: i18n.t("Name") },
              { value: "pseudonym", label: i18n.t("Made-up name") },
            ]}
            onChange={(value) => choose("workers", value)}
          />
          <div className="year-takes">
            <Button isBusy={isAsking} onClick={() => void download("xlsx")}>
              {i18n.t("All records: workbook (XLSX)")}
            </Button>
            <Button isBusy={isAsking} onClick={() => void download("zip")}>
              {i18n.t("All records: ZIP that checks itself")}
            </Button>
            <Button kind="primary" isBusy={isAsking} onClick={() => void download("csv")}>
              {i18n.t("Year file: CSV and dictionary")}
            </Button>
          </div>
        </div>
        {error !== null && <Failed error={error} onRetry={() => void gaps.refetch()} />}
        <p className="year-said">
          <Status>{said}</Status>
        </p>
        {gaps.data?.months.length === 0 && !(isNothingThere && onNothingThere) ? (
          <Empty title={i18n.t("No day of {year} is recorded here.", { year: String(year) })}>
            {i18n.t("Choose another year or another site.")}
          </Empty>
        ) : (
          !gaps.isError && (
            <Months year={year} months={gaps.data?.months} {...limits} today={today} />
          )
        )}
        <div className="year-columns">
          <ColumnsTable />
        </div>
      </PageBody>
      <Folio caution={i18n.t("Taking the file is itself an event in the trail.")}>
        {gaps.data?.ruleSets
          .map(({ key, version }) => {
            const ruleSet = ruleSetVersion(key, version);
            return i18n.t("{title}, version {version}", {
              title: ruleSet ? i18n._(ruleSet.title) : key,
              version,
            });
          })
          .join(" · ")}
      </Folio>
    </>
  );
}
