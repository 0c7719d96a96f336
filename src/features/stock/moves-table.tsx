import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import { isolate } from "../../../shared/i18n/isolate";
import { DataTable, type DataTableProps } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";
import type { StockMove } from "./queries";
import { moveWord, partWord } from "./stock-words";
import { useFolded } from "./use-folded";

/** What came into the stock and left it. */
export function MovesTable({
  showsSite,
  ...table
}: { showsSite: boolean } & Pick<
  DataTableProps<StockMove>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const folded = useFolded(table.rows);
  return (
    <div className="stock-moves">
      <DataTable<StockMove>
        {...table}
        {...folded}
        caption={i18n.t("Moves of the stock, the latest first")}
        rowKey={({ id }) => id}
        columns={[
          {
            id: "date",
            head: i18n.t("Date"),
            isRowHead: true,
            cell: ({ movedOn, siteName }) => (
              <span className="two-lines">
                {formatShortDate(movedOn, locale)}
                {showsSite && <span className="beneath">{siteName}</span>}
              </span>
            ),
          },
          {
            id: "what",
            head: i18n.t("Protector"),
            cell: ({ modelName, part, size }) => (
              <span className="two-lines">
                {modelName}
                <span className="beneath">
                  {[partWord(i18n, part), size !== null && i18n.t("size {size}", { size })]
                    .filter(Boolean)
                    .join(", ")}
                </span>
              </span>
            ),
          },
          {
            id: "kind",
            head: i18n.t("What happened"),
            cell: ({ kind, workerName }) => (
              <span className="two-lines">
                {moveWord(i18n, kind)}
                {workerName && <span className="beneath">{isolate(workerName)}</span>}
              </span>
            ),
          },
          {
            id: "quantity",
            head: i18n.t("How many"),
            kind: "figure",
            cell: ({ quantity }) =>
              quantity > 0
                ? `+${formatNumber(quantity, 0, locale)}`
                : formatNumber(quantity, 0, locale),
          },
          {
            id: "note",
            head: i18n.t("Note"),
            hidesOnPhone: true,
            cell: ({ note, authorName }) => (
              <span className="two-lines">
                {note}
                {authorName && (
                  <span className="beneath">
                    {i18n.t("entered by {name}", { name: isolate(authorName) })}
                  </span>
                )}
              </span>
            ),
          },
        ]}
        isTwoLine
        stacksOnPhone
      />
    </div>
  );
}
