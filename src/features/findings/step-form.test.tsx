// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { afterEach, expect, test, vi } from "vitest";
import { FindingView } from "../../../shared/schemas/finding";
import { TestLanguage } from "../../lib/test-i18n";
import { StepForm, stepsFor } from "./step-form";

afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
});

const id = "00000000-0000-4000-8000-000000000001";
const view = (overrides: Partial<FindingView> = {}): FindingView =>
  FindingView.parse({
    id,
    kind: "protects-too-little",
    state: "new",
    criterion: "",
    useKey: "",
    facts: {},
    firstDate: "2026-11-30",
    lastDate: "2026-11-30",
    daysCount: 1,
    workersCount: 1,
    dueOn: "2026-12-01",
    rulesUntil: null,
    today: null,
    wentUp: null,
    cannot: null,
    siteId: id,
    worker: null,
    subjectName: null,
    crewName: null,
    figures: null,
    ownerName: null,
    revision: 1,
    can: { handle: true, markDone: true, comment: true },
    closingReason: null,
    closedOn: null,
    previousId: null,
    steps: [],
    evidence: [],
    told: [],
    untold: null,
    goesUp: true,
    ...overrides,
  });

const reply = (status: number, body: unknown) =>
  new Response(JSON.stringify(body), { status, headers: { "content-type": "application/json" } });

function show(finding: FindingView): QueryClient {
  const client = new QueryClient({ defaultOptions: { mutations: { networkMode: "always" } } });
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <StepForm finding={finding} />
      </QueryClientProvider>
    </TestLanguage>,
  );
  return client;
}

test("the steps are those of the state and of what the reader may do", () => {
  expect(stepsFor(view())).toEqual([
    "take-in-hand",
    "hand-over",
    "mark-done",
    "cannot",
    "close",
    "comment",
  ]);
  expect(stepsFor(view({ state: "done" }))).toEqual(["hand-over", "reopen", "close", "comment"]);
  expect(stepsFor(view({ state: "closed" }))).toEqual(["comment"]);
  expect(stepsFor(view({ can: { handle: false, markDone: true, comment: true } }))).toEqual([
    "mark-done",
    "cannot",
    "comment",
  ]);
  expect(stepsFor(view({ can: { handle: false, markDone: false, comment: false } }))).toEqual([]);
});

test("Escape leaves the form, and the focus is back on the step", async () => {
  show(view());
  const user = userEvent.setup();
  await user.click(screen.getByRole("button", { name: "Can’t, because…" }));
  await user.click(screen.getByRole("textbox", { name: "Can’t, because" }));
  await user.keyboard("{Escape}");
  expect(screen.queryByRole("textbox")).toBeNull();
  await waitFor(() =>
    expect(document.activeElement).toBe(screen.getByRole("button", { name: "Can’t, because…" })),
  );
});

test("closing needs a reason", async () => {
  const fetched = vi.fn();
  vi.stubGlobal("fetch", fetched);
  show(view());
  const user = userEvent.setup();
  await user.click(screen.getByRole("button", { name: "Close" }));
  await user.click(screen.getAllByRole("button", { name: "Close" })[1]!);
  expect(await screen.findByText("At least 3 characters.")).toBeDefined();
  expect(fetched).not.toHaveBeenCalled();
});

/** jsdom has no dialogs. */
function allowDialogs() {
  HTMLDialogElement.prototype.showModal = function showModal(this: HTMLDialogElement) {
    this.open = true;
  };
  HTMLDialogElement.prototype.close = function close(this: HTMLDialogElement) {
    this.open = false;
  };
}

const stale = (current: FindingView) =>
  reply(412, { code: "stale", status: 412, title: "stale", params: {}, issues: [], current });

test("a stale step shows both versions; it goes again over the revision that stands", async () => {
  allowDialogs();
  const current = view({
    revision: 2,
    state: "in-hand",
    steps: [
      {
        id,
        kind: "state",
        fromState: "new",
        toState: "in-hand",
        text: null,
        authorName: "Y. Halloran",
        at: "2026-12-01T13:39:00Z",
      },
    ],
  });
  const fetched = vi
    .fn()
    .mockResolvedValueOnce(stale(current))
    .mockResolvedValueOnce(reply(201, view({ revision: 3, state: "done" })));
  vi.stubGlobal("fetch", fetched);
  show(view());
  const user = userEvent.setup();
  await user.click(screen.getByRole("button", { name: "Mark done" }));
  await user.type(screen.getByRole("textbox", { name: /What was done/ }), "has Fenmuff low");
  await user.click(screen.getAllByRole("button", { name: "Mark done" })[1]!);
  expect(await screen.findByText("Someone saved this finding before you")).toBeDefined();
  expect(screen.getByText("Y. Halloran")).toBeDefined();
  await user.click(screen.getByRole("button", { name: "Mark done all the same" }));
  await waitFor(() => expect(fetched).toHaveBeenCalledTimes(2));
  const [, second] = fetched.mock.calls[1] as [string, RequestInit];
  expect(new Headers(second.headers).get("if-match")).toBe("2");
  expect(JSON.parse(String(second.body))).toEqual({ kind: "mark-done", text: "has Fenmuff low" });
  expect(await screen.findByText("Mark done: saved")).toBeDefined();
});

test("a step on a finding that was closed meanwhile says by whom, is not offered again, and its words may be a comment", async () => {
  allowDialogs();
  const closing = {
    id,
    kind: "state",
    fromState: "new",
    toState: "closed",
    text: "moved to another line",
    authorName: "Y. Halloran",
    at: "2026-12-01T13:39:00Z",
  } as const;
  const current = view({ revision: 2, state: "closed", steps: [closing] });
  const fetched = vi
    .fn()
    .mockResolvedValueOnce(stale(current))
    .mockResolvedValueOnce(reply(201, view({ revision: 3, state: "closed" })));
  vi.stubGlobal("fetch", fetched);
  const client = show(view());
  client.setQueryData(["waiting", "all"], {});
  const user = userEvent.setup();
  await user.click(screen.getByRole("button", { name: "Mark done" }));
  await user.type(screen.getByRole("textbox", { name: /What was done/ }), "has Fenmuff low");
  await user.click(screen.getAllByRole("button", { name: "Mark done" })[1]!);
  expect(await screen.findByText("This finding was closed meanwhile")).toBeDefined();
  expect(
    screen.getByText(/^\u2068?Y\. Halloran\u2069? closed it\. Nothing of yours was sent/),
  ).toBeDefined();
  expect(screen.queryByRole("button", { name: "Mark done all the same" })).toBeNull();
  expect(client.getQueryState(["waiting", "all"])?.isInvalidated).toBe(true);
  await user.click(screen.getByRole("button", { name: "Pass the words on as a comment" }));
  expect(await screen.findByText("Comment: saved")).toBeDefined();
  const [, second] = fetched.mock.calls[1] as [string, RequestInit];
  expect(JSON.parse(String(second.body))).toEqual({ kind: "comment", text: "has Fenmuff low" });
});

test("what was saved meanwhile is what the page shows from then on", async () => {
  allowDialogs();
  const current = view({ revision: 2, state: "closed" });
  vi.stubGlobal("fetch", vi.fn().mockResolvedValueOnce(stale(current)));
  const client = show(view());
  const user = userEvent.setup();
  await user.click(screen.getByRole("button", { name: "Mark done" }));
  await user.click(screen.getAllByRole("button", { name: "Mark done" })[1]!);
  expect(await screen.findByText(/^The program closed it\./)).toBeDefined();
  await user.click(screen.getByRole("button", { name: "Keep what was saved" }));
  expect(client.getQueryData(["findings", "one", id])).toMatchObject({ state: "closed" });
});
