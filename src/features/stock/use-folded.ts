import { useState } from "react";
import type { DataTableProps } from "../../components/data-table";
import { useIsPhone } from "../../lib/use-is-phone";

/** Rows that a phone shows before it is asked for the others. */
const SHOWN = 5;

/** On a phone a long table begins with what wants doing, filled up to a few rows; its last line brings the others. */
export function useFolded<Row>(
  rows: readonly Row[],
  wantsDoing: (row: Row) => boolean = () => false,
): Pick<DataTableProps<Row>, "rows"> & Partial<Pick<DataTableProps<Row>, "more">> {
  const isPhone = useIsPhone();
  const [isOpen, setOpen] = useState(false);
  if (!isPhone || isOpen || rows.length <= SHOWN) return { rows };
  const pressing = rows.filter(wantsDoing);
  const shown = new Set([
    ...pressing,
    ...rows.filter((row) => !wantsDoing(row)).slice(0, Math.max(SHOWN - pressing.length, 0)),
  ]);
  if (shown.size === rows.length) return { rows };
  return {
    rows: rows.filter((row) => shown.has(row)),
    more: { hasMore: true, isLoading: false, onMore: () => setOpen(true) },
  };
}
