import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatShortDate } from "../../shared/format/date";
import type { InstrumentView } from "../../shared/schemas/run";
import { instrumentKindWord, settingsWords } from "../../shared/words/register-words";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { InstrumentForm } from "../features/instruments/instrument-form";
import { instrumentQueries } from "../features/instruments/queries";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";

const DAY_MS = 86_400_000;
const SOON_DAYS = 30;

/** Days from one local date to another. */
const daysBetween = (from: string, to: string) => (Date.parse(to) - Date.parse(from)) / DAY_MS;

/** The instruments of the sites, when their laboratory calibration is due, and their settings. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const { data, isPending, error, refetch } = useQuery(instrumentQueries.list(choice.site?.id));
  const rows = (data?.rows ?? []).toSorted(
    (a, b) =>
      Number(a.isArchived) - Number(b.isArchived) ||
      choice.siteName(a.siteId).localeCompare(choice.siteName(b.siteId), i18n.locale) ||
      a.name.localeCompare(b.name, i18n.locale, { numeric: true }),
  );
  const changed = rows.find(({ id, can }) => id === editing && can.change);
  const dueIn = ({ siteId, calibrationDueOn }: InstrumentView) =>
    calibrationDueOn === null ? null : daysBetween(choice.todayAt(siteId), calibrationDueOn);
  const overdue = rows.filter((row) => !row.isArchived && (dueIn(row) ?? 0) < 0).length;
  const dueWords = (days: number) =>
    days < 0
      ? i18n.t("{days, plural, one {# day} other {# days}} overdue", { days: -days })
      : days === 0
        ? i18n.t("today")
        : days <= SOON_DAYS
          ? i18n.t("in {days, plural, one {# day} other {# days}}", { days })
          : null;
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Instruments")}
          lead={
            data &&
            (overdue > 0
              ? i18n.t(
                  "{overdue, plural, one {# instrument is overdue for the laboratory: its readings lose the standard’s name.} other {# instruments are overdue for the laboratory: their readings lose the standard’s name.}}",
                  { overdue },
                )
              : i18n.t("No instrument is overdue for the laboratory."))
          }
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("New instrument")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {((choice.isOfficer && editing === "new") || changed) && (
          <Section
            title={
              changed ? i18n.t("Change {name}", { name: changed.name }) : i18n.t("New instrument")
            }
            id="instrument-form"
          >
            <InstrumentForm
              key={changed?.id ?? "new"}
              instrument={changed ?? null}
              siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
              sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onDone={close}
            />
          </Section>
        )}
        <DataTable<InstrumentView>
          caption={i18n.t("Instruments")}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          rows={rows}
          rowKey={({ id }) => id}
          isSelected={({ id }) => id === editing}
          isTwoLine
          groupOf={({ siteId, isArchived }) =>
            isArchived
              ? { key: "archived", label: i18n.t("No longer in use") }
              : { key: siteId, label: choice.siteName(siteId) }
          }
          empty={
            <Empty title={i18n.t("No instrument is on the register yet.")}>
              {i18n.t("A run names the instrument that it was taken with.")}
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Instrument"),
              isRowHead: true,
              sortValue: ({ name }) => name,
              cell: ({ id, name, kind, class: klass }) => (
                <span className="two-lines">
                  <TextLink to={paths.instrument(id)}>{name}</TextLink>
                  <span className="beneath">
                    {i18n.t("{kind}, class {class}", {
                      kind: instrumentKindWord(i18n, kind),
                      class: klass,
                    })}
                  </span>
                </span>
              ),
            },
            {
              id: "serial",
              hidesOnPhone: true,
              head: i18n.t("Serial number"),
              sortValue: ({ serialNumber }) => serialNumber,
              cell: ({ serialNumber }) => <span className="mono">{serialNumber}</span>,
            },
            {
              id: "due",
              head: i18n.t("Calibration due"),
              sortValue: ({ calibrationDueOn }) => calibrationDueOn,
              cell: (row) => {
                const days = dueIn(row);
                if (row.calibrationFailedOn !== null)
                  return (
                    <span className="is-fault">
                      {i18n.t("failed its calibration on {date}", {
                        date: formatShortDate(row.calibrationFailedOn, locale),
                      })}
                    </span>
                  );
                if (row.calibrationDueOn === null || days === null)
                  return <span className="not-assessed">{i18n.t("not known")}</span>;
                const words = dueWords(days);
                return (
                  <span className="two-lines">
                    <span className={days < 0 ? "is-fault" : undefined}>
                      {formatShortDate(row.calibrationDueOn, locale)}
                    </span>
                    {words && (
                      <span className={days < 0 ? "beneath is-fault" : "beneath"}>{words}</span>
                    )}
                  </span>
                );
              },
            },
            {
              id: "presets",
              head: i18n.t("Settings presets"),
              hidesOnPhone: true,
              cell: ({ presets }) => (
                <ul>
                  {presets.map((settings) => {
                    const words = settingsWords(i18n, settings, locale);
                    return <li key={words}>{words}</li>;
                  })}
                </ul>
              ),
            },
            {
              id: "change",
              head: <span className="sr-only">{i18n.t("What can be done")}</span>,
              kind: "right",
              cell: ({ id, name, can }) =>
                can.change && (
                  <TextButton
                    aria-label={i18n.t("Change {name}", { name })}
                    onClick={() => edit(id)}
                  >
                    {i18n.t("Change")}
                  </TextButton>
                ),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "Field checks before and after a run may drift by 0.5 dB; the laboratory’s date stands here.",
        )}
      </Folio>
    </>
  );
}
