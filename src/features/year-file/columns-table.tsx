import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useMemo } from "react";
import { type DataColumn, DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";
import type { FileColumn } from "./parse-dictionary";
import { yearFileQueries } from "./queries";

/** What each column of the file means, as the dictionary beside it says. */
export function ColumnsTable() {
  const { i18n } = useLingui();
  const dictionary = useQuery(yearFileQueries.dictionary(useLocale()));
  const columns = useMemo<DataColumn<FileColumn>[]>(
    () => [
      {
        id: "name",
        head: i18n.t("Column in the file"),
        isRowHead: true,
        cell: ({ name, unit, meaning }) => (
          <>
            <span className="mono file-column">{name}</span>
            {/* A phone has no room for three columns. */}
            <span className="file-meaning">
              {unit && <i>{unit}: </i>}
              {meaning}
            </span>
          </>
        ),
      },
      { id: "unit", head: i18n.t("Unit"), cell: ({ unit }) => unit, hidesOnPhone: true },
      {
        id: "meaning",
        head: i18n.t("Meaning"),
        cell: ({ meaning }) => meaning,
        hidesOnPhone: true,
      },
    ],
    [i18n],
  );
  return (
    <DataTable
      caption={i18n.t("Columns of the file")}
      columns={columns}
      rows={dictionary.data ?? []}
      rowKey={({ name }) => name}
      state={dictionary.isPending ? "loading" : dictionary.isError ? "failed" : "ready"}
      error={dictionary.error}
      onRetry={() => void dictionary.refetch()}
    />
  );
}
