import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { formatDate } from "../../../shared/format/date";
import type { ReadKind, ReadRow } from "../../../shared/schemas/access";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { readWord } from "./access-words";
import { accessQueries } from "./queries";

interface Reading extends ReadRow {
  kinds: ReadKind[];
}

/** What one person read of one record on one day is one line, as far as the entries follow one another. */
export function foldReads(rows: readonly ReadRow[]): Reading[] {
  const folded: Reading[] = [];
  for (const row of rows) {
    const last = folded.at(-1);
    if (
      last?.readerId === row.readerId &&
      last.workerId === row.workerId &&
      last.readOn === row.readOn &&
      last.year === row.year
    )
      last.kinds.push(row.kind);
    else folded.push({ ...row, kinds: [row.kind] });
  }
  return folded;
}

/** Who read whose record, the latest first; of one worker without the column that would say so in each row. */
export function ReadsTable({ isOwn = false }: { isOwn?: boolean }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const reads = useInfiniteQuery(accessQueries.reads());
  const rows = foldReads(reads.data?.pages.flatMap((page) => page.rows) ?? []);
  const what = ({ kinds, year, siteName }: Reading) =>
    year === null
      ? kinds.map((kind) => readWord(i18n, kind)).join(", ")
      : i18n.t("file of {year}, {site}", { year: String(year), site: siteName });
  const columns: DataColumn<Reading>[] = [
    {
      id: "day",
      head: i18n.t("Day"),
      cell: ({ readOn }) => formatDate(readOn, locale),
    },
    {
      id: "reader",
      head: i18n.t("Who"),
      isRowHead: true,
      cell: ({ readerName }) => <bdi>{readerName}</bdi>,
    },
    { id: "what", head: i18n.t("Read"), cell: what },
  ];
  if (!isOwn)
    columns.splice(2, 0, {
      id: "worker",
      head: i18n.t("Of"),
      cell: ({ workerId, workerName }) =>
        workerId === null ? i18n.t("everybody in it") : <bdi>{workerName}</bdi>,
    });
  return (
    <DataTable
      caption={isOwn ? i18n.t("Who has read my record") : i18n.t("Who read whose record")}
      columns={columns}
      rows={rows}
      rowKey={({ id }) => id}
      state={reads.isPending ? "loading" : reads.isError && rows.length === 0 ? "failed" : "ready"}
      error={reads.error}
      onRetry={() => void reads.refetch()}
      empty={
        <Empty title={i18n.t("Nobody has read a record yet.")}>
          {isOwn && <TextLink to={paths.me}>{i18n.t("My page")}</TextLink>}
        </Empty>
      }
      more={{
        hasMore: reads.hasNextPage,
        isLoading: reads.isFetchingNextPage,
        onMore: () => void reads.fetchNextPage(),
      }}
    />
  );
}
