import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect, useRef, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { z } from "zod";
import { formatDay } from "../../shared/format/date";
import { startsSentence } from "../../shared/format/words";
import { IsoDate } from "../../shared/schemas/common";
import { localDate } from "../../shared/time/zone";
import { ButtonLink } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { DateField, useSchemaForm } from "../components/form";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { OutingRow, type OutingRowHandle } from "../features/outings/outing-row";
import { outingQueries } from "../features/outings/queries";
import { findBySerial } from "../features/outings/row-keys";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { references } from "../lib/references";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import "../styles/register.css";
import "../styles/outings.css";

const DayFields = z.object({ date: IsoDate });

/** The day that is shown, typed as everywhere that measuring asks for one; taken with Enter or on leaving the field. */
function DayFilter({
  date,
  today,
  onChoose,
}: {
  date: string;
  today: string;
  onChoose: (date: string) => void;
}) {
  const { i18n } = useLingui();
  const form = useSchemaForm(DayFields, { keepAs: null, defaultValues: { date } });
  const take = form.handleSubmit((filled) => {
    if (filled.date > today) form.setError("date", { message: i18n.t("This day is still ahead.") });
    else if (filled.date !== date) onChoose(filled.date);
  });
  return (
    <form className="filter day-filter" noValidate onSubmit={take} onBlur={() => void take()}>
      <DateField form={form} name="date" label={i18n.t("Day")} />
    </form>
  );
}

/** One page for the morning and the evening: which instrument is with whom, and what came back. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const [search, setSearch] = useSearchParams();
  const site = user.sites.find(({ id }) => id === search.get("site")) ?? user.sites[0];
  const timeZone = site?.timeZone ?? "UTC";
  const today = localDate(new Date(), timeZone);
  const asked = IsoDate.safeParse(search.get("date"));
  const date = asked.success ? asked.data : today;
  const board = useQuery({
    ...outingQueries.board(site?.id ?? "", date),
    enabled: site !== undefined,
  });
  const areas = useQuery(references.areas(site?.id ?? ""));
  const scan = useRef<HTMLInputElement>(null);
  const canScan = board.data?.can.change === true;
  // The page is for this one field: a scanner sends its keys to whatever has the focus. The board
  // comes after the page, so whoever is already typing in another field keeps it.
  useEffect(() => {
    if (canScan && document.activeElement === document.body) scan.current?.focus();
  }, [canScan]);
  const handles = useRef(new Map<string, OutingRowHandle>());
  const [said, setSaid] = useState<{ text: string; isTrouble: boolean } | null>(null);
  const rows = board.data?.rows ?? [];
  const outCount = rows.filter(({ run }) => run?.isOut).length;
  const narrow = (name: string, value: string | null) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === null) next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true },
    );
  const searchPlaces = (text: string) =>
    (areas.data?.rows ?? [])
      .filter(
        ({ name, isArchived }) =>
          !isArchived && name.toLowerCase().includes(text.trim().toLowerCase()),
      )
      .slice(0, 5)
      .map(({ id, name }) => ({ value: `area ${id}`, label: name, note: i18n.t("a place") }));

  function jump(typed: string) {
    const found = findBySerial(rows, typed);
    if (!found) {
      setSaid({
        text: i18n.t("No instrument of this site has the number {number}.", { number: typed }),
        isTrouble: true,
      });
      scan.current?.select();
      return;
    }
    setSaid(null);
    if (scan.current) scan.current.value = "";
    handles.current.get(found.instrumentId)?.focus();
  }

  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Out and back")}
          lead={
            board.data && (
              <>
                {startsSentence(formatDay(date, locale), locale)}.{" "}
                <b>
                  {i18n.t(
                    "{count, plural, =0 {No instrument is out.} one {# instrument is out.} other {# instruments are out.}}",
                    { count: outCount },
                  )}
                </b>
              </>
            )
          }
          actions={
            hasRole(user, "officer") && (
              <ButtonLink to={paths.sample}>{i18n.t("Sample by hand")}</ButtonLink>
            )
          }
        />
        <FilterRow label={i18n.t("What is shown")}>
          {user.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={site?.id ?? ""}
              choices={user.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => narrow("site", id)}
            />
          )}
          <DayFilter
            key={date}
            date={date}
            today={today}
            onChoose={(chosen) => narrow("date", chosen === today ? null : chosen)}
          />
        </FilterRow>
        {canScan && (
          <form
            className="outing-scan"
            onSubmit={(event) => {
              event.preventDefault();
              jump(scan.current?.value ?? "");
            }}
          >
            <label htmlFor="outings-scan">{i18n.t("Serial number, typed or scanned")}</label>
            <input
              id="outings-scan"
              ref={scan}
              className="input mono"
              autoComplete="off"
              autoCapitalize="off"
              spellCheck={false}
              aria-describedby="outings-said"
            />
            <p
              id="outings-said"
              className={said?.isTrouble ? "outing-said is-fault" : "outing-said"}
              role="status"
            >
              {said?.text ??
                i18n.t("Enter goes to its row; Enter in an empty time takes the present one.")}
            </p>
          </form>
        )}
        {board.error && <Failed error={board.error} onRetry={() => void board.refetch()} />}
        <div className="outings">
          <div className="outings-head" aria-hidden="true">
            <span>{i18n.t("Instrument")}</span>
            <span>{i18n.t("Calibration due")}</span>
            <span>{i18n.t("Worker or place")}</span>
            <span className="is-right">
              {i18n.t("Check before")} <i className="unit">dB</i>
            </span>
            <span className="is-right">{i18n.t("Out")}</span>
            <span className="is-right">{i18n.t("Back")}</span>
            <span className="is-right">
              {i18n.t("Check after")} <i className="unit">dB</i>
            </span>
            <span>
              {i18n.t("Readings")} <i className="unit">{i18n.t("dB, or a dose with %")}</i>
            </span>
          </div>
          <ul aria-label={i18n.t("Instruments")} aria-busy={board.isPending}>
            {board.isPending &&
              ["first", "second", "third"].map((key) => (
                <li key={key} className="outing">
                  <span className="loading-line" />
                </li>
              ))}
            {rows.map((row) => (
              <OutingRow
                key={`${row.instrumentId} ${row.run?.id} ${row.run?.revision}`}
                ref={(handle) => {
                  if (handle) handles.current.set(row.instrumentId, handle);
                  else handles.current.delete(row.instrumentId);
                }}
                row={row}
                date={date}
                isPast={date < today}
                timeZone={timeZone}
                surveyId={search.get("survey")}
                canChange={board.data?.can.change ?? false}
                searchPlaces={searchPlaces}
                onDone={(text) => {
                  setSaid({ text, isTrouble: false });
                  scan.current?.focus();
                }}
                onShowAnew={() => {
                  void board.refetch();
                  scan.current?.focus();
                }}
              />
            ))}
          </ul>
          {board.data && rows.length === 0 && (
            <Empty title={i18n.t("No instrument is on this site’s register.")}>
              <TextLink to={paths.instruments}>{i18n.t("Instruments")}</TextLink>
            </Empty>
          )}
        </div>
      </PageBody>
      <Folio>
        {i18n.t(
          "Field checks before and after may be 0.5 dB apart (ISO 9612:2009, 12.2); what comes back stands in the day’s grid.",
        )}
      </Folio>
    </>
  );
}
