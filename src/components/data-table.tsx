import { useLingui } from "@lingui/react";
import {
  type ColumnDef,
  createSortedRowModel,
  type RowData,
  rowSortingFeature,
  type SortingState,
  tableFeatures,
  useTable,
} from "@tanstack/react-table";
import {
  Fragment,
  type ReactNode,
  type RefObject,
  useEffect,
  useMemo,
  useRef,
  useState,
} from "react";
import { Button } from "./button";
import { Failed } from "./failed";

export interface DataColumn<Row> {
  readonly id: string;
  readonly head: ReactNode;
  /** In italics under the head: "day, dB". */
  readonly unit?: ReactNode;
  readonly cell: (row: Row) => ReactNode;
  /** `figure`: Mono, right. `strip`: no hairlines, band and limit run through. */
  readonly kind?: "text" | "right" | "figure" | "strip";
  /** Makes the column sortable; null sorts last either way. */
  readonly sortValue?: (row: Row) => string | number | null;
  /** Names the row for those who hear it. */
  readonly isRowHead?: boolean;
  readonly hidesOnPhone?: boolean;
  readonly widthPx?: number;
  /** Its cell in a group's heading row, and while loading: what runs through a strip column. */
  readonly filler?: ReactNode;
}

export interface SortBy {
  readonly id: string;
  readonly isDescending: boolean;
}

export interface DataTableProps<Row> {
  /** Read out as the table's name. */
  readonly caption: string;
  readonly columns: readonly DataColumn<Row>[];
  readonly rows: readonly Row[];
  readonly rowKey: (row: Row) => string;
  readonly state?: "ready" | "loading" | "failed";
  readonly error?: unknown;
  readonly onRetry?: () => void;
  /** Stands in place of the rows where there are none. */
  readonly empty?: ReactNode;
  /** Rows that follow one another under one heading; the rows come in that order. */
  readonly groupOf?: (row: Row) => { key: string; label: ReactNode };
  /** With `onSort` the server sorts; without, the rows that are here. */
  readonly sort?: SortBy | null;
  readonly onSort?: (sort: SortBy | null) => void;
  /** Server paging by cursor. */
  readonly more?: { hasMore: boolean; isLoading: boolean; onMore: () => void };
  readonly isTwoLine?: boolean;
  /** On a phone each row is a block, every cell under its column's head, where that is a text. */
  readonly stacksOnPhone?: boolean;
  readonly isSelected?: (row: Row) => boolean;
  readonly foot?: ReactNode;
}

const features = tableFeatures({
  rowSortingFeature,
  sortedRowModel: createSortedRowModel(),
  sortFns: {},
});

type SortKey = string | number | null;

function compare(a: SortKey, b: SortKey, collator: Intl.Collator): number {
  if (typeof a === "number" && typeof b === "number") return a - b;
  return collator.compare(String(a), String(b));
}

/** Whether a table is wider than its frame: only then may the frame itself take the focus, to be scrolled by keys. */
function useIsScrolled(ref: RefObject<HTMLElement | null>): boolean {
  const [isScrolled, setIsScrolled] = useState(false);
  useEffect(() => {
    const element = ref.current;
    if (!element || typeof ResizeObserver === "undefined") return;
    const observer = new ResizeObserver(() =>
      setIsScrolled(element.scrollWidth > element.clientWidth),
    );
    observer.observe(element);
    return () => observer.disconnect();
  }, [ref]);
  return isScrolled;
}

const LOADING_ROWS = ["first", "second", "third"];

export function DataTable<Row extends RowData>({
  caption,
  columns,
  rows,
  rowKey,
  state = "ready",
  error,
  onRetry,
  empty,
  groupOf,
  sort,
  onSort,
  more,
  isTwoLine = false,
  stacksOnPhone = false,
  isSelected,
  foot,
}: DataTableProps<Row>) {
  const { i18n } = useLingui();
  const [ownSort, setOwnSort] = useState<SortBy | null>(sort ?? null);
  const sortBy = onSort ? (sort ?? null) : ownSort;
  const sorting: SortingState = useMemo(
    () => (sortBy ? [{ id: sortBy.id, desc: sortBy.isDescending }] : []),
    [sortBy],
  );

  const definitions = useMemo(() => {
    const collator = new Intl.Collator(i18n.locale, { numeric: true });
    return columns.map(
      (column): ColumnDef<typeof features, Row> => ({
        id: column.id,
        accessorFn: (row: Row): SortKey | undefined => column.sortValue?.(row) ?? undefined,
        enableSorting: column.sortValue !== undefined,
        sortUndefined: "last",
        sortFn: (a, b, id) => compare(a.getValue<SortKey>(id), b.getValue<SortKey>(id), collator),
      }),
    );
  }, [columns, i18n.locale]);

  const frame = useRef<HTMLDivElement>(null);
  const isScrolled = useIsScrolled(frame);

  const table = useTable({
    features,
    columns: definitions,
    data: rows,
    state: { sorting },
    manualSorting: onSort !== undefined,
    getRowId: rowKey,
  });

  function sortColumn(id: string) {
    const next: SortBy | null =
      sortBy?.id !== id
        ? { id, isDescending: false }
        : sortBy.isDescending
          ? null
          : { id, isDescending: true };
    if (onSort) onSort(next);
    else setOwnSort(next);
  }

  const byId = new Map(columns.map((column) => [column.id, column]));
  const found = table.getRowModel().rows;
  // Under another order the headings would repeat; the rows then stand alone.
  const showsGroups = groupOf !== undefined && sortBy === null;

  return (
    <div className="table-frame">
      <div
        className="table-scroll"
        ref={frame}
        {...(isScrolled ? { role: "region", "aria-label": caption, tabIndex: 0 } : {})}
      >
        <table
          className={`data-table${isTwoLine ? " is-two-line" : ""}${stacksOnPhone ? " stacks-on-phone" : ""}`}
          aria-busy={state === "loading"}
        >
          <caption className="sr-only">{caption}</caption>
          <thead>
            {table.getHeaderGroups().map((group) => (
              <tr key={group.id}>
                {group.headers.map((header) => {
                  const column = byId.get(header.column.id);
                  if (!column) return null;
                  const order =
                    sortBy?.id === column.id
                      ? sortBy.isDescending
                        ? "descending"
                        : "ascending"
                      : undefined;
                  return (
                    <th
                      key={header.id}
                      scope="col"
                      className={cellClass(column)}
                      style={
                        column.widthPx === undefined
                          ? undefined
                          : { width: column.widthPx, minWidth: column.widthPx }
                      }
                      aria-sort={column.sortValue ? (order ?? "none") : undefined}
                    >
                      {column.sortValue ? (
                        <button
                          type="button"
                          className="sort-button"
                          onClick={() => sortColumn(column.id)}
                        >
                          {column.head}
                          {order && (
                            <span aria-hidden="true">{order === "ascending" ? " ↑" : " ↓"}</span>
                          )}
                        </button>
                      ) : (
                        column.head
                      )}
                      {column.unit && <span className="unit block">{column.unit}</span>}
                    </th>
                  );
                })}
              </tr>
            ))}
          </thead>
          <tbody>
            {state === "loading" &&
              LOADING_ROWS.map((key) => (
                <tr key={key}>
                  {columns.map((column) => (
                    <td key={column.id} data-column={column.id} className={cellClass(column)}>
                      {column.kind === "strip" ? column.filler : <span className="loading-line" />}
                    </td>
                  ))}
                </tr>
              ))}
            {state === "ready" &&
              found.map((row, index) => {
                const group = showsGroups ? groupOf(row.original) : null;
                const before = found[index - 1];
                const startsGroup =
                  group && (!before || groupOf?.(before.original).key !== group.key);
                return (
                  <Fragment key={row.id}>
                    {startsGroup && <GroupRow columns={columns} label={group.label} />}
                    <tr className={isSelected?.(row.original) ? "is-selected" : undefined}>
                      {row.getAllCells().map((cell) => {
                        const column = byId.get(cell.column.id);
                        if (!column) return null;
                        return column.isRowHead ? (
                          <th
                            key={cell.id}
                            scope="row"
                            data-column={column.id}
                            className={cellClass(column)}
                          >
                            {column.cell(row.original)}
                          </th>
                        ) : (
                          <td
                            key={cell.id}
                            data-column={column.id}
                            data-head={stackedHead(column)}
                            className={cellClass(column)}
                          >
                            {column.cell(row.original)}
                          </td>
                        );
                      })}
                    </tr>
                  </Fragment>
                );
              })}
          </tbody>
          {foot && state === "ready" && <tfoot>{foot}</tfoot>}
        </table>
      </div>
      {state === "failed" && (
        <div className="table-note">
          <Failed error={error} onRetry={onRetry} />
        </div>
      )}
      {state === "ready" && rows.length === 0 && empty && <div className="table-note">{empty}</div>}
      {state === "loading" && (
        <p className="sr-only" role="status">
          {i18n.t("Loading")}
        </p>
      )}
      {state === "ready" && more?.hasMore && (
        <div className="table-foot">
          <Button isBusy={more.isLoading} onClick={more.onMore}>
            {i18n.t("and more")}
          </Button>
        </div>
      )}
    </div>
  );
}

/** What stands over a cell where the row is stacked: the column's head with its unit. */
function stackedHead<Row>({ head, unit }: DataColumn<Row>): string | undefined {
  if (typeof head !== "string") return undefined;
  return typeof unit === "string" ? `${head}, ${unit}` : head;
}

function cellClass<Row>(column: DataColumn<Row>): string | undefined {
  const names = [
    column.kind === "right" && "is-right",
    column.kind === "figure" && "is-figure",
    column.kind === "strip" && "strip-cell",
    column.hidesOnPhone && "hides-on-phone",
  ].filter(Boolean);
  return names.length > 0 ? names.join(" ") : undefined;
}

/** A heading across the row, cut where a strip column runs through. */
function GroupRow<Row>({
  columns,
  label,
}: {
  columns: readonly DataColumn<Row>[];
  label: ReactNode;
}) {
  const stripAt = columns.findIndex((column) => column.kind === "strip");
  const strip = columns[stripAt];
  if (!strip) {
    return (
      <tr className="is-group">
        <th scope="rowgroup" colSpan={columns.length}>
          {label}
        </th>
      </tr>
    );
  }
  const after = columns.length - stripAt - 1;
  return (
    <tr className="is-group">
      <th scope="rowgroup" colSpan={stripAt}>
        {label}
      </th>
      <td className={cellClass(strip)}>{strip.filler}</td>
      {after > 0 && <td colSpan={after} />}
    </tr>
  );
}
