import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import type { LetterRow } from "../../../shared/schemas/letter";
import { letterStateNote, letterStateWord } from "../../../shared/words/letter-words";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

export function LettersTable({
  rows,
  timeZoneOf,
  ...rest
}: {
  rows: readonly LetterRow[];
  timeZoneOf: (siteId: string) => string;
  empty: ReactNode;
} & Pick<DataTableProps<LetterRow>, "state" | "error" | "onRetry" | "more">) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<LetterRow>[] = [
    {
      id: "due",
      head: i18n.t("Due"),
      cell: ({ dueOn, isLate }) => (
        <span className="two-lines">
          <span>{formatShortDate(dueOn, locale)}</span>
          {isLate && (
            <span className="beneath">
              <b>{i18n.t("late")}</b>
            </span>
          )}
        </span>
      ),
    },
    {
      id: "who",
      head: i18n.t("Worker"),
      isRowHead: true,
      cell: ({ id, worker }) => (
        <span className="two-lines">
          <TextLink className="is-quiet is-name" to={paths.letter(id)}>
            {worker.name}
          </TextLink>
          <span className="beneath">{worker.employeeNumber}</span>
        </span>
      ),
    },
    {
      id: "days",
      head: i18n.t("Measured on"),
      cell: ({ days }) => {
        const [first, last] = [days[0], days.at(-1)];
        if (!first || !last) return "–";
        return days.length === 1
          ? formatShortDate(first.date, locale)
          : i18n.t("{count, plural, other {# days}}, {from} to {to}", {
              count: days.length,
              from: formatShortDate(first.date, locale),
              to: formatShortDate(last.date, locale),
            });
      },
    },
    {
      id: "level",
      head: i18n.t("Highest told"),
      unit: i18n.t("day, dB"),
      kind: "figure",
      cell: ({ days }) => formatLevel(highest(days), locale),
    },
    {
      id: "state",
      head: i18n.t("How far it is"),
      cell: (letter) => {
        const note = letterStateNote(i18n, locale, letter, timeZoneOf(letter.siteId));
        return (
          <span className="two-lines">
            <span>{letterStateWord(i18n, letter.state)}</span>
            {note && <span className="beneath">{note}</span>}
          </span>
        );
      },
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Letters of results")}
      columns={columns}
      rows={rows}
      rowKey={({ id }) => id}
      isTwoLine
      stacksOnPhone
      {...rest}
    />
  );
}

function highest(days: LetterRow["days"]): number | null {
  const levels = days.flatMap(({ levelDb }) => levelDb ?? []);
  return levels.length > 0 ? Math.max(...levels) : null;
}
