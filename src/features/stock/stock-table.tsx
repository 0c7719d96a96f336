import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { StockRow } from "../../../shared/schemas/stock";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { isShort, partWord, shortWord } from "./stock-words";
import { useFolded } from "./use-folded";

/** What is there, by site, model, part and size. */
export function StockTable({
  showsSite,
  ...table
}: { showsSite: boolean } & Pick<
  DataTableProps<StockRow>,
  "rows" | "state" | "error" | "onRetry" | "empty"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<StockRow>[] = [
    {
      id: "model",
      head: i18n.t("Protector"),
      isRowHead: true,
      cell: ({ modelId, modelName }) => (
        <TextLink to={paths.protector(modelId)}>{modelName}</TextLink>
      ),
    },
    { id: "part", head: i18n.t("Which part"), cell: ({ part }) => partWord(i18n, part) },
    { id: "size", head: i18n.t("Size"), cell: ({ size }) => size ?? i18n.t("one size") },
    {
      id: "there",
      head: i18n.t("In stock"),
      kind: "right",
      cell: ({ quantity }) => {
        const short = shortWord(i18n, quantity);
        return (
          <span className="two-lines">
            <span className={short ? "stock-short" : undefined}>
              {formatNumber(quantity, 0, locale)}
            </span>
            {short && <span className="beneath">{short}</span>}
          </span>
        );
      },
    },
    {
      id: "out",
      head: i18n.t("With workers"),
      kind: "right",
      cell: ({ part, issuedCount }) =>
        part === "device" ? formatNumber(issuedCount, 0, locale) : "–",
    },
    {
      id: "moved",
      head: i18n.t("Last moved"),
      kind: "right",
      hidesOnPhone: true,
      cell: ({ lastMovedOn }) => formatShortDate(lastMovedOn, locale),
    },
  ];
  const folded = useFolded(table.rows, isShort);
  return (
    <div className="stock-there">
      <DataTable<StockRow>
        {...table}
        {...folded}
        caption={i18n.t("What is in stock")}
        rowKey={({ siteId, modelId, part, size }) => `${siteId} ${modelId} ${part} ${size}`}
        groupOf={
          showsSite ? ({ siteId, siteName }) => ({ key: siteId, label: siteName }) : undefined
        }
        columns={columns}
        stacksOnPhone
      />
    </div>
  );
}
