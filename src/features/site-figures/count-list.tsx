import { useLingui } from "@lingui/react";
import type { FigureCell } from "../../../shared/schemas/site-figures";
import { DataTable } from "../../components/data-table";
import { Figure } from "./figure";

export interface CountLine {
  readonly key: string;
  readonly label: string;
  readonly count: FigureCell;
  readonly meaning: string;
}

/** Counts of a site one beneath the other, each with what is counted. */
export function CountList({ caption, lines }: { caption: string; lines: readonly CountLine[] }) {
  const { i18n } = useLingui();
  return (
    <DataTable
      caption={caption}
      columns={[
        { id: "what", head: i18n.t("Counted"), isRowHead: true, cell: ({ label }) => label },
        {
          id: "count",
          head: i18n.t("Count"),
          kind: "figure",
          cell: ({ count }) => <Figure value={count} />,
        },
        { id: "meaning", head: i18n.t("What is counted"), cell: ({ meaning }) => meaning },
      ]}
      rows={lines}
      rowKey={({ key }) => key}
      stacksOnPhone
    />
  );
}
