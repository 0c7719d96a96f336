import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import type { FiguresBy, PeopleRow, SiteFiguresView } from "../../../shared/schemas/site-figures";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import { criterionWords } from "./criterion-words";
import { Figure } from "./figure";

export function byWord(i18n: I18n, by: FiguresBy): string {
  switch (by) {
    case "crew":
      return i18n.t("Crew");
    case "job":
      return i18n.t("Job");
    case "area":
      return i18n.t("Area");
    case "task":
      return i18n.t("Task");
  }
}

function withoutWord(i18n: I18n, by: FiguresBy): string {
  switch (by) {
    case "crew":
      return i18n.t("without a crew");
    case "job":
      return i18n.t("without a job");
    case "area":
      return i18n.t("without an area");
    case "task":
      return i18n.t("without a task");
  }
}

/** People of the year by what they work in, at or on. Criteria that nobody at the site was over have no column. */
export function PeopleTable({ by, figures }: { by: FiguresBy; figures: SiteFiguresView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const count = (
    id: keyof Omit<PeopleRow, "id" | "name" | "over">,
    head: string,
  ): DataColumn<PeopleRow> => ({
    id,
    head,
    kind: "figure",
    cell: (row) => <Figure value={row[id]} />,
  });
  const columns: DataColumn<PeopleRow>[] = [
    {
      id: "name",
      head: byWord(i18n, by),
      isRowHead: true,
      cell: ({ name }) => (name === null ? withoutWord(i18n, by) : <bdi>{name}</bdi>),
    },
    count("inNoise", i18n.t("In noise")),
    count("measured", i18n.t("Measured")),
    count("byGroup", i18n.t("Through their group")),
    count("neverMeasured", i18n.t("Not measured")),
    count("undecided", i18n.t("Undecided")),
    ...figures.criteria.flatMap((criterion, at): DataColumn<PeopleRow>[] =>
      figures.total.over[at] === 0
        ? []
        : [
            {
              id: `${criterion.ruleSetKey} ${criterion.id}`,
              head: i18n.t("Over {criterion}", {
                criterion: criterionWords(i18n, locale, criterion, false).label,
              }),
              kind: "figure",
              cell: ({ over }) => <Figure value={over[at] ?? 0} />,
            },
          ],
    ),
  ];
  return (
    <DataTable
      caption={i18n.t("People by {what}", { what: byWord(i18n, by) })}
      columns={columns}
      rows={figures.groups[by]}
      rowKey={({ id }) => id ?? "none"}
      stacksOnPhone
      empty={<Empty title={i18n.t("No day is on record.")} />}
    />
  );
}
