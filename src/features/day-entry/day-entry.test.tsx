import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { act, render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { useState } from "react";
import { MemoryRouter } from "react-router-dom";
import { beforeEach, describe, expect, test, vi } from "vitest";
import { type DayGridView, type DayRowInput, DaySaveView } from "../../../shared/schemas/shift";
import { TestLanguage } from "../../lib/test-i18n";
import { DayEntry } from "./day-entry";
import { createDraftStore } from "./draft-store";
import { gridRow, INSTRUMENT, savedShift, shiftId, TASK, testDay, workerId } from "./test-day";

const store = createDraftStore(window.localStorage, "user", "crew", "2026-11-30");

function Page({ first }: { first: DayGridView }) {
  const [view, setView] = useState(first);
  return <DayEntry view={view} store={store} way={null} onView={setView} />;
}

function open(view: DayGridView) {
  const client = new QueryClient({ defaultOptions: { mutations: { networkMode: "always" } } });
  const user = userEvent.setup();
  const page = render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter>
          <Page first={view} />
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
  return { user, ...page };
}

// By its name's text: names by role are worked out for every cell of the grid, and that takes seconds here.
const row = (number: number) => screen.getByText(`Worker ${number}`).closest("tr") as HTMLElement;
const cells = (number: number) => row(number).querySelectorAll<HTMLElement>("[role=gridcell]");
/** Start, Length, Rigging, Run-up, Teardown, Control room, Not accounted for, Sum … */
const RUN_UP = 3;
const SUM = 7;
const runUp = (number: number) => cells(number)[RUN_UP] as HTMLElement;

/** Answers a saving as the server would, and keeps what was sent. */
function answerSaving(answer: (rows: DayRowInput[]) => object) {
  const sent: { rows: DayRowInput[]; key: string | null }[] = [];
  vi.mocked(fetch).mockImplementation(async (_, init) => {
    const { rows } = JSON.parse(String(init?.body)) as { rows: DayRowInput[] };
    sent.push({ rows, key: new Headers(init?.headers).get("idempotency-key") });
    const entryId = "00000000-0000-4000-8000-000000009999";
    const notices = {
      entryId,
      notBefore: null,
      state: "none",
      people: 0,
      notices: [],
      correctedAt: null,
    };
    const reply = DaySaveView.parse({
      entryId,
      saved: [],
      refused: [],
      conflicts: [],
      notices,
      ...answer(rows),
    });
    return new Response(JSON.stringify(reply), { status: 201 });
  });
  return sent;
}

const saveAll = (rows: DayRowInput[]) => ({
  saved: rows.map((one, index) => ({
    index,
    workerId: one.workerId,
    shift: one.kind === "worked" ? { ...savedShift(index + 1), tasks: one.tasks } : null,
    figures: null,
    readings: [],
  })),
});

vi.setConfig({ testTimeout: 30_000 });

beforeEach(() => {
  window.localStorage.clear();
  vi.useFakeTimers({ toFake: ["Date"], now: new Date("2026-12-01T12:00:00Z") });
  // jsdom has no modal dialogs.
  HTMLDialogElement.prototype.showModal = function showModal() {
    this.open = true;
  };
  HTMLDialogElement.prototype.close = function close() {
    this.open = false;
  };
});

describe("with the keyboard alone", () => {
  test("a departure is typed, Enter goes down, Tab right, and the day is worked out while typing", async () => {
    const { user } = open(testDay(3));
    act(() => runUp(1).focus());
    expect(runUp(1)).toHaveTextContent("120 filled in");
    await user.keyboard("60");
    expect(cells(1)[SUM]).toHaveTextContent("420");
    await user.keyboard("{Enter}");
    expect(runUp(1)).toHaveTextContent(/^60$/);
    expect(runUp(2)).toHaveFocus();
    await user.keyboard("{Tab}");
    expect(cells(2)[RUN_UP + 1]).toHaveFocus();
    await user.keyboard("{Shift>}{Tab}{/Shift}");
    expect(runUp(2)).toHaveFocus();
  });

  test("Escape gives back what was there, F2 edits it", async () => {
    const { user } = open(testDay(2));
    act(() => runUp(1).focus());
    await user.keyboard("99{Escape}");
    expect(runUp(1)).toHaveTextContent("120 filled in");
    await user.keyboard("{F2}");
    expect(screen.getByRole("textbox", { name: "Run-up, Worker 1" })).toHaveValue("120");
  });

  test("Ctrl+D fills down, Ctrl+Z takes it back", async () => {
    const { user } = open(testDay(3));
    act(() => runUp(1).focus());
    await user.keyboard("75{Enter}{Control>}d{/Control}");
    expect(runUp(2)).toHaveTextContent(/^75$/);
    await user.keyboard("{Control>}z{/Control}");
    expect(runUp(2)).toHaveTextContent("120 filled in");
  });

  test("an abandoned edit leaves nothing to take back: Ctrl+Z goes to the change before it", async () => {
    const { user } = open(testDay(2));
    act(() => runUp(1).focus());
    await user.keyboard("75{Enter}80{Escape}{Control>}z{/Control}");
    expect(runUp(2)).toHaveTextContent("120 filled in");
    expect(runUp(1)).toHaveTextContent("120 filled in");
    await user.keyboard("{ArrowUp}75{Enter}{ArrowUp}8099{Escape}");
    expect(runUp(1)).toHaveTextContent(/^75$/);
    await user.keyboard("{Control>}z{/Control}");
    expect(runUp(1)).toHaveTextContent("120 filled in");
    await user.keyboard("abc{Escape}{Control>}z{/Control}");
    expect(runUp(1)).toHaveTextContent("120 filled in");
    expect(row(1)).not.toHaveTextContent("no exposure recorded");
  });

  test("a marks absent and takes it back", async () => {
    const { user } = open(testDay(2));
    act(() => runUp(1).focus());
    await user.keyboard("a");
    expect(row(1)).toHaveTextContent("all day, no exposure recorded");
    await user.keyboard("a");
    expect(runUp(1)).toHaveTextContent("120");
  });

  test("a word that begins with a is no absence: it stands in the cell with what is wrong", async () => {
    const { user } = open(testDay(2));
    act(() => runUp(1).focus());
    await user.keyboard("abc");
    expect(screen.getByRole("textbox", { name: "Run-up, Worker 1" })).toHaveValue("abc");
    await user.keyboard("{Enter}");
    expect(runUp(1)).toHaveTextContent("abc");
    expect(screen.getByText("Run-up can’t be read.")).toBeVisible();
    await user.keyboard("{ArrowUp}{F2}{Escape}12a{Enter}");
    expect(row(1)).not.toHaveTextContent("no exposure recorded");
    expect(runUp(1)).toHaveTextContent("12a");
  });

  test("a and then another key leaves the worker absent", async () => {
    const { user } = open(testDay(2));
    act(() => runUp(1).focus());
    await user.keyboard("a{Enter}7");
    expect(row(1)).toHaveTextContent("all day, no exposure recorded");
    await user.keyboard("{Escape}{Shift>}a{/Shift}");
    expect(row(2)).not.toHaveTextContent("no exposure recorded");
  });

  test("F8 goes there from anywhere on the page", async () => {
    const { user } = open(testDay(3));
    act(() => runUp(2).focus());
    await user.keyboard("300{Enter}");
    act(() => screen.getByRole("button", { name: "Save" }).focus());
    await user.keyboard("{F8}");
    expect(runUp(2)).toHaveFocus();
  });

  test("F8 goes to what is wrong, which says how to mend it", async () => {
    const { user } = open(testDay(3));
    act(() => runUp(2).focus());
    await user.keyboard("300{Enter}");
    expect(screen.getByText("660 min in a 480 min shift.")).toBeVisible();
    expect(row(2)).toHaveTextContent("Not assessed");
    await user.keyboard("{F8}");
    expect(runUp(2)).toHaveFocus();
    await user.click(screen.getByRole("button", { name: "Make the shift 660 min" }));
    expect(screen.queryByText("660 min in a 480 min shift.")).toBeNull();
    expect(row(2)).toContainElement(document.activeElement as HTMLElement);
  });

  test("Escape and Tab leave the grid", async () => {
    const { user } = open(testDay(2));
    act(() => runUp(1).focus());
    await user.keyboard("{Escape}{Tab}");
    expect(screen.getByRole("grid")).not.toContainElement(document.activeElement as HTMLElement);
  });
});

describe("saving", () => {
  test("sends what is typed or confirmed in one request, the rest waits and has the focus", async () => {
    const sent = answerSaving(saveAll);
    const { user } = open(testDay(4));
    act(() => runUp(1).focus());
    await user.keyboard("60{Enter}{Shift>}{Enter}{/Shift}{Control>}{Enter}{/Control}");
    await waitFor(() => expect(screen.getByText("2 saved, 2 wait.")).toBeVisible());
    expect(sent).toHaveLength(1);
    expect(sent[0]?.rows.map((one) => one.workerId)).toEqual([workerId(1), workerId(2)]);
    expect(row(3)).toContainElement(document.activeElement as HTMLElement);
    expect(row(1)).toHaveTextContent("saved");
  });

  test("is sent again under the same key when the connection was lost, and what is typed survives a reload", async () => {
    vi.mocked(fetch).mockRejectedValue(new TypeError("no connection"));
    const view = testDay(2);
    const { user, unmount } = open(view);
    act(() => runUp(1).focus());
    await user.keyboard("60{Control>}{Enter}{/Control}");
    await waitFor(() => expect(screen.getByText("Not saved.")).toBeVisible());
    const first = new Headers(vi.mocked(fetch).mock.calls[0]?.[1]?.headers).get("idempotency-key");
    unmount();

    const sent = answerSaving(saveAll);
    const again = open(view);
    expect(runUp(1)).toHaveTextContent(/^60$/);
    await again.user.click(screen.getByRole("button", { name: "Save" }));
    await waitFor(() => expect(screen.getByText("1 saved, 1 waits.")).toBeVisible());
    expect(sent[0]?.key).toBe(first);
    again.unmount();
    expect(window.localStorage).toHaveLength(0);
  });

  test("asks once why saved shifts change", async () => {
    const sent = answerSaving(saveAll);
    const { user } = open(
      testDay([gridRow(1, { saved: savedShift(1) }), gridRow(2, { saved: savedShift(2) })]),
    );
    act(() => runUp(1).focus());
    await user.keyboard("100{Enter}110{Control>}{Enter}{/Control}");
    const dialog = await screen.findByRole("dialog", { name: "Why do 2 saved shifts change?" });
    await user.type(within(dialog).getByRole("textbox", { name: "Reason" }), "typed wrongly");
    await user.click(within(dialog).getByRole("button", { name: "Save with this reason" }));
    await waitFor(() => expect(sent).toHaveLength(1));
    expect(sent[0]?.rows).toMatchObject([
      { revision: 1, reason: "typed wrongly" },
      { revision: 1, reason: "typed wrongly" },
    ]);
  });

  test("asks once about shifts that are not over yet, and sends them once that is confirmed", async () => {
    vi.setSystemTime("2026-11-30T09:00:00Z");
    const sent = answerSaving(saveAll);
    const { user } = open(testDay(3));
    act(() => runUp(1).focus());
    await user.keyboard("100{Enter}110{Control>}{Enter}{/Control}");
    const dialog = await screen.findByRole("dialog", { name: "2 shifts are not over yet" });
    expect(dialog).toHaveTextContent("Worker 1, Worker 2.");
    await user.click(within(dialog).getByRole("button", { name: "Back to the grid" }));
    expect(sent).toHaveLength(0);
    await user.click(screen.getByRole("button", { name: "Save" }));
    await user.click(await screen.findByRole("button", { name: "It will end so: save" }));
    await waitFor(() => expect(sent).toHaveLength(1));
    expect(sent[0]?.rows).toMatchObject([{ confirmsOpenEnd: true }, { confirmsOpenEnd: true }]);
  });

  test("asks about a shift that only the server's clock knows not to be over", async () => {
    const issues = [
      { path: ["lengthMin"], code: "open-end-unconfirmed", params: { time: "14:00" } },
    ];
    answerSaving(() => ({ refused: [{ index: 0, workerId: workerId(1), issues }] }));
    const { user } = open(testDay(1));
    act(() => runUp(1).focus());
    await user.keyboard("100{Control>}{Enter}{/Control}");
    expect(await screen.findByText(/This shift ends at 14:00, which lies ahead/)).toBeVisible();
    const sent = answerSaving(saveAll);
    await user.click(screen.getByRole("button", { name: "Save" }));
    await user.click(await screen.findByRole("button", { name: "It will end so: save" }));
    await waitFor(() => expect(sent[0]?.rows).toMatchObject([{ confirmsOpenEnd: true }]));
  });

  test("that met somebody else's lets choose field by field", async () => {
    const theirs = savedShift(1, 2);
    const current = {
      ...theirs,
      tasks: theirs.tasks.map((task) =>
        task.taskId === TASK.control ? { ...task, durationMin: 340 } : task,
      ),
    };
    answerSaving(() => ({ conflicts: [{ index: 0, workerId: workerId(1), current }] }));
    const { user } = open(testDay([gridRow(1, { saved: savedShift(1) })]));
    act(() => runUp(1).focus());
    await user.keyboard("100{Control>}{Enter}{/Control}");
    await user.type(await screen.findByRole("textbox", { name: "Reason" }), "typed wrongly");
    await user.click(screen.getByRole("button", { name: "Save with this reason" }));
    const dialog = await screen.findByRole("dialog", {
      name: "Someone saved this shift before you",
    });
    await user.click(within(dialog).getByRole("radio", { name: "Run-up: yours, 100" }));
    const sent = answerSaving(saveAll);
    await user.click(within(dialog).getByRole("button", { name: "Save as chosen, revision 3" }));
    await user.type(await screen.findByRole("textbox", { name: "Reason" }), "both were there");
    await user.click(screen.getByRole("button", { name: "Save with this reason" }));
    await waitFor(() => expect(sent).toHaveLength(1));
    expect(sent[0]?.rows[0]).toMatchObject({
      revision: 2,
      tasks: [
        { taskId: TASK.runUp, durationMin: 100 },
        { taskId: TASK.control, durationMin: 340 },
      ],
    });
  });
});

test("who meets another's saving has the day anew: only what differs waits for a choice", async () => {
  const stale = testDay(4);
  const savedAs = (number: number, minutes: number) => ({
    ...savedShift(number),
    tasks: [
      { taskId: TASK.rigging, durationMin: 60, wornPct: 100, wornIsShiftWide: true },
      { taskId: TASK.runUp, durationMin: minutes, wornPct: 100, wornIsShiftWide: true },
      { taskId: TASK.control, durationMin: 300, wornPct: 100, wornIsShiftWide: true },
    ],
  });
  // Somebody has saved 1 and 2 otherwise, and 3 as it was filled in.
  const now = testDay([
    gridRow(1, { saved: savedAs(1, 90) }),
    gridRow(2, { saved: savedAs(2, 90) }),
    gridRow(3, { saved: savedAs(3, 120) }),
    gridRow(4),
  ]);
  answerSaving((rows) => ({
    conflicts: rows.map(({ workerId: who }, index) => ({
      index,
      workerId: who,
      current: now.rows.find(({ worker }) => worker.id === who)?.saved,
    })),
  }));
  const save = vi.mocked(fetch).getMockImplementation();
  vi.mocked(fetch).mockImplementation(async (address, init) =>
    init?.method === "POST" && save
      ? save(address, init)
      : new Response(JSON.stringify(now), { status: 200 }),
  );
  const { user } = open(stale);
  act(() => runUp(1).focus());
  // 1 is typed, 3 confirmed as it was filled in.
  await user.keyboard("100{Enter}{ArrowDown}{Shift>}{Enter}{/Shift}{Control>}{Enter}{/Control}");
  await screen.findByRole("dialog", { name: "Someone saved this shift before you" });
  expect(screen.getByText("2 saved, 2 wait:")).toBeVisible();
  expect(row(2)).toHaveTextContent("saved");
  expect(runUp(2)).toHaveTextContent(/^90$/);
  expect(row(3)).toHaveTextContent("saved");
  expect(row(4)).toHaveTextContent("waits");
  expect(screen.getByText(/row 1 was saved by somebody else/)).toBeVisible();
});

test("a reading that governs says what the tasks give beside it, be it only a bound", () => {
  const reading = (covers: "shift" | "part") => ({
    runId: "00000000-0000-4000-8000-000000000800",
    runRevision: 1,
    readingId: "00000000-0000-4000-8000-000000000801",
    instrumentId: INSTRUMENT,
    instrumentClass: "dosimeter" as const,
    durationMin: 480,
    covers,
    keptReason: null,
    settings: {
      criterionLevelDb: 90,
      exchangeRateDb: 5 as const,
      thresholdDb: 80,
      weighting: "A" as const,
      response: "slow" as const,
    },
    dosePct: 250,
    averageDb: null,
    lceqDb: null,
    lasMaxDb: null,
    peak: null,
  });
  const saved = {
    ...savedShift(1),
    tasks: [{ taskId: TASK.teardown, durationMin: 480, wornPct: 100, wornIsShiftWide: true }],
  };
  const view = testDay([
    gridRow(1, { saved, readings: [reading("shift")] }),
    gridRow(2, { saved: { ...saved, shiftId: shiftId(2) }, readings: [reading("part")] }),
  ]);
  open({
    ...view,
    settings: { ...view.settings, governingRuleSet: "us-general-industry", wearFromDb: 90 },
    tasks: view.tasks.map((task) => ({
      ...task,
      level: task.level && { ...task.level, metric: { kind: "laeq" as const } },
    })),
  });
  // An energy mean of 92 bounds the 5 dB average from above.
  expect(row(1)).toHaveTextContent("250 %tasks ≤92.0");
  expect(row(2)).toHaveTextContent("250 %only evidence");
  // 250 % is a TWA of 90 + 16.61·lg 2.5 = 96.6 under threshold 80; each figure has one line, what it is the head.
  const lines = [...row(1).querySelectorAll(".outside-line")].map(({ textContent }) => textContent);
  expect(lines[0]).toBe("96.6Over 85");
  expect(lines).toHaveLength(2);
  expect(row(1)).not.toHaveTextContent("threshold");
  const head = screen.getByRole("columnheader", { name: /^Without protection/ });
  expect(head).toHaveTextContent("TWA, threshold 80TWA, threshold 90");
});

test("a run is entered with as many settings rows as the instrument has, and sent as one", async () => {
  const sent = answerSaving(saveAll);
  const { user } = open(testDay(2));
  act(() => runUp(1).focus());
  await user.keyboard("60");
  await user.click(screen.getByText("More on this row"));
  await user.click(screen.getByText("Reading of a run"));
  await user.type(screen.getByRole("textbox", { name: "Level or dose, reading 1" }), "91.2");
  await user.click(screen.getByRole("button", { name: "Another settings row" }));
  await user.type(screen.getByRole("textbox", { name: "Level or dose, reading 2" }), "63 %");
  await user.click(screen.getByRole("button", { name: "Another settings row" }));
  await user.type(screen.getByRole("textbox", { name: "Level or dose, reading 3" }), "loud");
  expect(screen.getByText("Reading can’t be read.")).toBeVisible();
  await user.click(screen.getByRole("button", { name: /Take out reading 3/ }));
  expect(row(1)).toHaveTextContent("1 of 2 91.2");
  await user.keyboard("{Control>}{Enter}{/Control}");
  await waitFor(() => expect(sent).toHaveLength(1));
  const [first] = sent[0]?.rows ?? [];
  expect(first?.kind === "worked" && first.run).toMatchObject({
    runId: null,
    durationMin: 480,
    readings: [
      { settings: { exchangeRateDb: 3, criterionLevelDb: 85 }, averageDb: 91.2, dosePct: null },
      { settings: { exchangeRateDb: 5, thresholdDb: 80 }, averageDb: null, dosePct: 63 },
    ],
  });
});

test("the rows that are only filled in are confirmed after a look", async () => {
  const { user } = open(testDay(3));
  act(() => runUp(1).focus());
  await user.keyboard("60{Enter}");
  await user.click(screen.getByRole("button", { name: "Confirm the other 2 as filled in" }));
  const dialog = screen.getByRole("dialog");
  expect(within(dialog).getByRole("row", { name: /Worker 2/ })).toBeVisible();
  await user.click(within(dialog).getByRole("button", { name: "They worked as filled in" }));
  expect(screen.getByText(/3 rows are ready to be saved/)).toBeVisible();
});

test("a pasted block says what was left out", async () => {
  const { user } = open(testDay(2));
  act(() => runUp(1).focus());
  await user.paste("10\t20\n30\t40\n50\t60");
  expect(runUp(2)).toHaveTextContent(/^30$/);
  expect(screen.getByText("Pasted 2 × 2. 1 row did not fit and was left out.")).toBeVisible();
});
