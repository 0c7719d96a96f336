import { QueryClientProvider, useQuery } from "@tanstack/react-query";
import { act, fireEvent, render, screen, waitFor } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { afterEach, beforeEach, expect, test, vi } from "vitest";
import type { CrewSheetView } from "../../../shared/schemas/crew";
import { createQueryClient } from "../../lib/query-client";
import { TestLanguage } from "../../lib/test-i18n";
import { sessionQuery } from "../session/session";
import { OrderActions } from "./order-actions";
import { crewSheetQueries, type SheetOrder } from "./queries";

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const crew = id(1);
const open: SheetOrder = {
  findingId: id(2),
  kind: "no-protector",
  state: "new",
  facts: {},
  ofDate: "2026-11-30",
  rulesUntil: null,
  cannot: null,
  revision: 4,
  canMarkDone: true,
};
/** As the server answers a step. */
const stands = (state: SheetOrder["state"], revision: number) => ({
  id: open.findingId,
  state,
  steps: [],
  revision,
  can: { handle: false, markDone: true, comment: true },
});
const step = vi.fn<(body: unknown, ifMatch: string | null) => object>();

beforeEach(() => {
  localStorage.clear();
  step.mockReset();
  vi.useFakeTimers({ shouldAdvanceTime: true, now: new Date("2026-12-02T14:05:00Z") });
});
afterEach(() => {
  vi.useRealTimers();
});

function Row() {
  const { data } = useQuery({ ...crewSheetQueries.sheet(crew), enabled: false });
  const order = data?.expected.rows[0]?.order;
  return order ? (
    <OrderActions
      crewId={crew}
      timeZone="Europe/London"
      order={order}
      workerName="Ada"
      onStale={() => {}}
      words="Give Alder foam."
      noticed=""
    />
  ) : null;
}

function show() {
  vi.mocked(fetch).mockImplementation(async (_, init) => {
    const ifMatch = new Headers(init?.headers).get("If-Match");
    return Response.json(step(JSON.parse(String(init?.body)), ifMatch), { status: 201 });
  });
  const client = createQueryClient();
  client.setQueryData(sessionQuery.queryKey, {
    pendingName: null,
    endedAt: null,
    user: {
      id: id(9),
      name: "B. Rowntree-Adair",
      email: null,
      language: "en",
      workerId: null,
      roles: ["supervisor"],
      organizationName: "Ostmere",
      sites: [],
      visits: [],
    },
  });
  // Only the rows are read here.
  client.setQueryData(crewSheetQueries.sheet(crew).queryKey, {
    expected: { rows: [{ order: open }] },
    last: { rows: [] },
    asOf: null,
  } as unknown as CrewSheetView & { asOf: null });
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter>
          <Row />
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

test("what was marked done says so with the time, and is taken back by a step of its own", async () => {
  show();
  step.mockReturnValueOnce(stands("done", 5));
  fireEvent.click(screen.getByRole("button", { name: "Mark done: Ada" }));
  const undo = await screen.findByRole("button", { name: "Undo: Ada" });
  expect(screen.getByText("Done, 14:05.", { exact: false })).toBeVisible();
  await waitFor(() => expect(undo).toHaveFocus());
  step.mockReturnValueOnce(stands("new", 6));
  fireEvent.click(undo);
  await waitFor(() => expect(screen.getByRole("button", { name: "Mark done: Ada" })).toHaveFocus());
  expect(screen.getByText("Undone.")).toBeInTheDocument();
  expect(step.mock.calls).toEqual([
    [{ kind: "mark-done", text: "" }, "4"],
    [{ kind: "undo" }, "5"],
  ]);
});

test("after ten seconds it stands; the keyboard is not sent back to the top of the page", async () => {
  show();
  step.mockReturnValueOnce(stands("done", 5));
  fireEvent.click(screen.getByRole("button", { name: "Mark done: Ada" }));
  await waitFor(() => expect(screen.getByRole("button", { name: "Undo: Ada" })).toHaveFocus());
  await act(() => vi.advanceTimersByTimeAsync(9_000));
  expect(screen.getByRole("button", { name: "Undo: Ada" })).toBeVisible();
  await act(() => vi.advanceTimersByTimeAsync(2_000));
  expect(screen.queryByRole("button", { name: "Undo: Ada" })).toBeNull();
  expect(screen.getByText("Done, to be checked")).toHaveFocus();
});
