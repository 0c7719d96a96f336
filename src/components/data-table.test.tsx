// @vitest-environment jsdom
import { cleanup, render, screen, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { useState } from "react";
import { afterEach, expect, test, vi } from "vitest";
import { TestLanguage } from "../lib/test-i18n";
import { type DataColumn, DataTable, type DataTableProps } from "./data-table";

afterEach(cleanup);

interface Row {
  name: string;
  crew: string;
  levelDb: number | null;
}
const rows: Row[] = [
  { name: "Tavernor", crew: "Fettling", levelDb: 89.1 },
  { name: "Okwuosa", crew: "Fettling", levelDb: null },
  { name: "Bramhall", crew: "Test cell", levelDb: 78.9 },
];
const columns: DataColumn<Row>[] = [
  {
    id: "name",
    head: "Worker",
    cell: (row) => row.name,
    isRowHead: true,
    sortValue: (row) => row.name,
  },
  {
    id: "level",
    head: "At the ear",
    unit: "dB",
    kind: "figure",
    cell: (row) => row.levelDb ?? "–",
    sortValue: (row) => row.levelDb,
  },
];

function show(props: Partial<DataTableProps<Row>> = {}) {
  return render(
    <TestLanguage>
      <DataTable
        caption="Days"
        columns={columns}
        rows={rows}
        rowKey={(row) => row.name}
        {...props}
      />
    </TestLanguage>,
  );
}
const names = () => screen.getAllByRole("rowheader").map((cell) => cell.textContent);

test("sorts by a column, the unknown last either way, and says so", async () => {
  show();
  const user = userEvent.setup();
  const sort = screen.getByRole("button", { name: "At the ear" });
  await user.click(sort);
  expect(names()).toEqual(["Bramhall", "Tavernor", "Okwuosa"]);
  expect(screen.getByRole("columnheader", { name: /At the ear/ }).getAttribute("aria-sort")).toBe(
    "ascending",
  );
  await user.click(sort);
  expect(names()).toEqual(["Tavernor", "Bramhall", "Okwuosa"]);
  await user.click(sort);
  expect(names()).toEqual(["Tavernor", "Okwuosa", "Bramhall"]);
});

test("where the server sorts, the rows stay as they came", async () => {
  const onSort = vi.fn();
  show({ onSort, sort: { id: "level", isDescending: false } });
  await userEvent.click(screen.getByRole("button", { name: /At the ear/ }));
  expect(onSort).toHaveBeenCalledWith({ id: "level", isDescending: true });
  expect(names()).toEqual(["Tavernor", "Okwuosa", "Bramhall"]);
});

test("rows of a group follow their heading", () => {
  show({ groupOf: (row) => ({ key: row.crew, label: row.crew }) });
  const lines = screen
    .getAllByRole("row")
    .slice(1)
    .map((row) => row.textContent);
  expect(lines).toEqual(["Fettling", "Tavernor89.1", "Okwuosa–", "Test cell", "Bramhall78.9"]);
});

test("loading keeps the frame, a failure stands in place and can be tried again", async () => {
  const { unmount } = show({ state: "loading", rows: [] });
  expect(screen.getByRole("table", { name: "Days" }).getAttribute("aria-busy")).toBe("true");
  expect(screen.getByRole("columnheader", { name: /Worker/ })).toBeDefined();
  unmount();
  const onRetry = vi.fn();
  show({ state: "failed", rows: [], onRetry });
  await userEvent.click(
    within(screen.getByRole("alert")).getByRole("button", { name: "Try again" }),
  );
  expect(onRetry).toHaveBeenCalledTimes(1);
});

test("an empty table says why; more rows come when they are asked for", async () => {
  const { unmount } = show({ rows: [], empty: <p>No day entered yet.</p> });
  expect(screen.getByText("No day entered yet.")).toBeDefined();
  unmount();
  const onMore = vi.fn();
  show({ more: { hasMore: true, isLoading: false, onMore } });
  await userEvent.click(screen.getByRole("button", { name: "and more" }));
  expect(onMore).toHaveBeenCalledTimes(1);
});

/** Its columns are made anew at every tick, as a form's are. */
function Ticked() {
  const [ticked, setTicked] = useState<readonly string[]>([]);
  return (
    <TestLanguage>
      <DataTable
        caption="Who"
        rows={rows}
        rowKey={(row) => row.name}
        columns={[
          {
            id: "name",
            head: "Worker",
            cell: ({ name }: Row) => (
              <input
                type="checkbox"
                aria-label={name}
                checked={ticked.includes(name)}
                onChange={() => setTicked([...ticked, name])}
              />
            ),
          },
        ]}
      />
    </TestLanguage>
  );
}

test("a box in a cell keeps the focus where every tick makes the columns anew", async () => {
  render(<Ticked />);
  const user = userEvent.setup();
  const box = screen.getByRole("checkbox", { name: "Okwuosa" });
  box.focus();
  await user.keyboard(" ");
  expect(screen.getByRole("checkbox", { name: "Okwuosa" })).toHaveProperty("checked", true);
  expect(document.activeElement).toBe(box);
});
