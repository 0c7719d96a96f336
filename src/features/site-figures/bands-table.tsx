import { useLingui } from "@lingui/react";
import type { FigureCell } from "../../../shared/schemas/site-figures";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { Figure } from "./figure";

interface BandsRow {
  readonly key: string;
  readonly word: string;
  readonly total: FigureCell;
  readonly first: FigureCell;
  readonly second: FigureCell;
  readonly third: FigureCell;
}

/** Kinds of something, each by three stretches of time. */
export function BandsTable({
  caption,
  heads,
  rows,
  empty,
}: {
  caption: string;
  heads: readonly [string, string, string];
  rows: readonly BandsRow[];
  empty: string;
}) {
  const { i18n } = useLingui();
  const bands = ["first", "second", "third"] as const;
  return (
    <DataTable
      caption={caption}
      columns={[
        { id: "kind", head: i18n.t("Kind"), isRowHead: true, cell: ({ word }) => word },
        {
          id: "total",
          head: i18n.t("All"),
          kind: "figure",
          cell: ({ total }) => <Figure value={total} />,
        },
        ...bands.map((band, at) => ({
          id: band,
          head: heads[at] ?? "",
          kind: "figure" as const,
          cell: (row: BandsRow) => <Figure value={row[band]} />,
        })),
      ]}
      rows={rows}
      rowKey={({ key }) => key}
      stacksOnPhone
      empty={<Empty title={empty} />}
    />
  );
}
