import { QueryClientProvider } from "@tanstack/react-query";
import { fireEvent, render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes } from "react-router-dom";
import { beforeEach, describe, expect, test, vi } from "vitest";
import {
  FitTestView,
  FittingDesk,
  FittingFound,
  IssuePage,
  IssueSaved,
  RefusalList,
} from "../../shared/schemas/fit";
import { ProtectorList } from "../../shared/schemas/protector";
import { AreaList } from "../../shared/schemas/site";
import { TaskList } from "../../shared/schemas/task";
import { sessionQuery } from "../features/session/session";
import { createQueryClient } from "../lib/query-client";
import { TestLanguage } from "../lib/test-i18n";
import { paths } from "../paths";
import { Component } from "./fitting-page";

const id = (last: number) => `00000000-0000-4000-8000-0000000000${String(last).padStart(2, "0")}`;
const [site, worker, muff, plug] = [id(1), id(2), id(3), id(4)];

const candidate = (modelId: string, name: string, kind: string, more: object = {}) => ({
  modelId,
  outerModelId: null,
  name,
  kind,
  excludedBy: null,
  word: "good" as const,
  wornDb: 77.6,
  wornActiveDb: null,
  isActiveCredited: false,
  wornIn: "Chipping",
  scaleWord: null,
  scaleIn: null,
  twaDb: null,
  isWornMost: false,
  isTwaMost: false,
  marginDb: 5.2,
  marginSharePct: 95,
  lastFit: null,
  batteryMin: null,
  batteryLasts: null,
  stock: 12,
  labelLess7Db: null,
  decidedBy: "first" as const,
  ...more,
});
const desk = (overrides: Partial<FittingDesk> = {}): FittingDesk => ({
  worker: {
    id: worker,
    siteId: site,
    siteName: "Ostmere works",
    name: "D. Tavernor",
    employeeNumber: "4417",
    jobName: "Fettler",
    wornGear: [],
    personalTargetDb: null,
  },
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
  need: {
    needDb: 13,
    outsideDb: 98,
    isUpperBound: false,
    targetDb: 85,
    taskId: null,
    taskName: "Chipping",
    isTooDeepForOwnFit: false,
    mostDb: 28,
    reason: null,
  },
  policy: { confidencePct: 84, everyMonths: 12, afterFailDays: 14 },
  creditsActivePart: false,
  candidates: [
    candidate(muff, "Fenmuff", "earmuff"),
    candidate(plug, "Alder foam", "foam-plug", { decidedBy: "margin" }),
  ],
  pairs: [],
  tests: [],
  issued: [],
  assigned: [],
  can: { test: true, issue: true },
  ...overrides,
});
const tested = (facts: FitTestView["facts"], more: Partial<FitTestView> = {}): FitTestView => ({
  id: id(7),
  revision: 1,
  siteId: site,
  workerId: worker,
  workerName: "D. Tavernor",
  employeeNumber: "4417",
  modelId: muff,
  modelName: "Fenmuff",
  testedOn: "2026-12-01",
  method: "psychophysical",
  size: null,
  facts,
  confidencePct: 84,
  needDb: 13,
  note: "",
  leftDb: 20,
  rightDb: 18,
  parDb: 18,
  hasPassed: true,
  activePassed: null,
  labelLess7Db: null,
  outcome: "tried",
  dueOn: null,
  isVoid: false,
  struckReason: null,
  authorName: "S. Ferrand",
  can: { change: true },
  ...more,
});
const issued: IssueSaved = {
  id: id(8),
  revision: 1,
  siteId: site,
  workerId: worker,
  workerName: "D. Tavernor",
  employeeNumber: "4417",
  modelId: muff,
  modelName: "Fenmuff",
  size: null,
  useName: null,
  issuedOn: "2026-12-01",
  offered: ["Alder foam", "Fenmuff"],
  wasInstructed: true,
  reason: null,
  acknowledgedHow: "in-person",
  endedOn: null,
  endedHow: null,
  parDb: 18,
  authorName: "S. Ferrand",
  replacedName: null,
  can: { end: true, acknowledge: false },
};

interface Sent {
  path: string;
  body: Record<string, unknown>;
  key: string | null;
}
let sent: Sent[];
let at: FittingDesk;
let refusals: RefusalList["rows"];
/** Whether the server finds that what is recorded next fits. */
let hasPassed: boolean;
let answerIssue: () => { status: number; body: object };

beforeEach(() => {
  sent = [];
  at = desk();
  refusals = [];
  hasPassed = true;
  answerIssue = () => ({ status: 201, body: IssueSaved.parse(issued) });
  sessionStorage.clear();
  vi.stubGlobal("fetch", async (path: string, init: RequestInit = {}) => {
    if (init.method === "GET") return Response.json(read(path));
    const body = JSON.parse(String(init.body));
    sent.push({ path, body, key: new Headers(init.headers).get("idempotency-key") });
    if (path.endsWith("/fit-tests")) {
      const test = tested(body.facts, {
        modelId: body.modelId,
        testedOn: body.testedOn,
        hasPassed,
      });
      at = desk({ tests: [test] });
      return Response.json(FitTestView.parse(test), { status: 201 });
    }
    const { status, body: answer } = answerIssue();
    return Response.json(answer, { status });
  });
  return () => vi.unstubAllGlobals();
});

function read(path: string): object {
  const { pathname, searchParams } = new URL(path, "http://localhost");
  const found = { id: worker, name: "D. Tavernor", employeeNumber: "4417", siteName: "Ostmere" };
  if (pathname === "/api/fitting/lookup") {
    const asked = searchParams.get("employeeNumber");
    const rows =
      asked === "4417"
        ? [{ ...found, isExact: true }]
        : asked === "tav"
          ? [
              { ...found, isExact: false },
              { ...found, id: id(9), name: "A. Tavistock", isExact: false },
            ]
          : [];
    return FittingFound.parse({ rows });
  }
  if (pathname.endsWith("/refusals")) return RefusalList.parse({ rows: refusals });
  if (pathname.endsWith("/fitting")) return FittingDesk.parse(at);
  if (pathname === "/api/issues") return IssuePage.parse({ rows: [], next: null });
  if (pathname === "/api/tasks") return TaskList.parse({ rows: [] });
  if (pathname === "/api/areas") return AreaList.parse({ rows: [] });
  return ProtectorList.parse({ rows: [], wearersToday: 0 });
}

function open(address: string = paths.fitting) {
  const client = createQueryClient();
  client.setQueryData(sessionQuery.queryKey, {
    pendingName: null,
    endedAt: null,
    user: {
      id: id(20),
      name: "S. Ferrand",
      email: null,
      language: "en",
      workerId: null,
      roles: ["officer"],
      organizationName: "Ostmere",
      sites: [{ id: site, name: "Ostmere works", timeZone: "Europe/London", language: "en" }],
      visits: [],
    },
  });
  return render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter initialEntries={[address]}>
          <Routes>
            <Route path={paths.fitting} element={<Component />} />
            <Route path={paths.fittingOf(":workerId")} element={<Component />} />
          </Routes>
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

const number = () => screen.getByLabelText("Employee number, or name");

describe("the fitting desk", () => {
  test("from the number to the next in the queue with the keyboard alone", async () => {
    const user = userEvent.setup();
    open();
    expect(number()).toHaveFocus();
    await user.keyboard("4417{Enter}");
    expect(await screen.findByText("13.0 dB have to come off.")).toBeVisible();
    const form = screen.getByRole("form", { name: "Test the fit" });
    const left = within(form).getByRole("group", { name: "Left ear" });
    await user.click(within(left).getByLabelText("Trial 1"));
    await user.keyboard("24{Enter}22{Enter}26{Enter}{Enter}");
    const right = within(form).getByRole("group", { name: "Right ear" });
    expect(within(right).getByLabelText("Trial 1")).toHaveFocus();
    await user.keyboard("21{Enter}23{Enter}");
    // Right: mean 22, s = √2, u = √(1 + 9) = 3.1623; z(84 %) = 0.99446; 22 − 3.1447 = 18.9. Left: 24 − 3.19 = 20.8.
    expect(within(form).getByText("PAR 18.9 dB")).toBeVisible();
    expect(within(form).getByText("Fits")).toBeVisible();
    expect(
      within(form).getByText(/The weaker ear is the right one, at 84 % confidence/),
    ).toBeVisible();
    await user.keyboard("{Enter}");

    const issue = await screen.findByRole("form", { name: "Issue Fenmuff" });
    expect(sent[0]).toMatchObject({
      path: `/api/workers/${worker}/fit-tests`,
      body: {
        modelId: muff,
        needDb: 13,
        confidencePct: 84,
        facts: { leftDb: [24, 22, 26], rightDb: [21, 23], methodSdDb: 3 },
      },
    });
    await waitFor(() => expect(within(issue).getByLabelText("Worn")).toHaveFocus());
    // One kind only asks why; a second one on offer takes the question away.
    expect(within(issue).getByLabelText("All the same, because")).toBeVisible();
    await user.click(within(issue).getByLabelText("Alder foam"));
    expect(within(issue).queryByLabelText("All the same, because")).toBeNull();
    await user.click(within(issue).getByLabelText(/was shown/));
    await user.click(within(issue).getByLabelText(/was received/));
    const go = within(issue).getByRole("button", { name: "Issue this" });
    fireEvent.click(go);
    fireEvent.click(go);
    expect(
      await screen.findByText("Fenmuff is issued to D. Tavernor; 11 left in stock."),
    ).toBeVisible();
    expect(sent.filter(({ path }) => path.endsWith("/issues"))).toMatchObject([
      {
        body: {
          modelId: muff,
          fitTestId: id(7),
          offeredModelIds: [muff, plug],
          wasInstructed: true,
          isAcknowledged: true,
          reason: null,
        },
      },
    ]);
    expect(number()).toHaveFocus();
    expect(number()).toHaveValue("");
    await waitFor(() => expect(screen.queryByRole("form", { name: "Test the fit" })).toBeNull());
  }, 30_000);

  test("a name asks which one is meant, and a number that nobody has says so", async () => {
    const user = userEvent.setup();
    open();
    await user.keyboard("{Enter}");
    expect(await screen.findByText("This is needed.")).toBeVisible();
    expect(number()).toHaveFocus();
    await user.keyboard("999{Enter}");
    expect(await screen.findByText("Nobody here has this number or name.")).toBeVisible();
    await user.clear(number());
    await user.type(number(), "tav{Enter}");
    await user.click(await screen.findByRole("button", { name: "D. Tavernor" }));
    expect(await screen.findByText("13.0 dB have to come off.")).toBeVisible();
  });

  test("an unknown number clears the worker who stood here before, and stays as it was typed", async () => {
    const user = userEvent.setup();
    open(paths.fittingOf(worker));
    expect(await screen.findByText("13.0 dB have to come off.")).toBeVisible();
    await user.type(number(), "999{Enter}");
    expect(await screen.findByText("Nobody here has this number or name.")).toBeVisible();
    await waitFor(() => expect(screen.queryByText("13.0 dB have to come off.")).toBeNull());
    expect(number()).toHaveValue("999");
    expect(number()).toHaveAttribute("aria-invalid", "true");
  });

  test("why a reason is asked for is said of the device that goes out", async () => {
    const user = userEvent.setup();
    at = desk({
      candidates: [
        candidate(muff, "Fenmuff", "earmuff", { stock: 0 }),
        candidate(plug, "Alder foam", "foam-plug"),
      ],
      tests: [
        tested(
          { leftDb: [20], rightDb: [18], methodSdDb: 3, bands: null },
          { modelId: plug, modelName: "Alder foam" },
        ),
      ],
    });
    open(paths.fittingOf(worker));
    await user.click(await screen.findByRole("button", { name: "Issue Alder foam" }));
    const form = await screen.findByRole("form", { name: "Issue Alder foam" });
    await user.type(within(form).getByLabelText("All the same, because"), "skin");
    await user.click(within(form).getByLabelText("Fenmuff"));
    expect(within(form).getByText("Only officers read this.")).toBeVisible();
    expect(screen.queryByText(/in stock\. Only officers/)).toBeNull();
  });

  test("a device without data goes out only on a passed fit, one that can’t be worn is not even tried", async () => {
    at = desk({
      candidates: [
        candidate(muff, "Fenmuff", "earmuff", { excludedBy: { code: "gear", gear: "helmet" } }),
        candidate(plug, "Alder foam", "foam-plug", {
          excludedBy: { code: "no-data", gear: null },
          word: null,
          wornDb: null,
        }),
      ],
    });
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const device = within(form).getByLabelText("Device");
    expect(within(device).getAllByRole("option")).toHaveLength(1);
    expect(screen.getByText(/Alder foam goes out only on a passed fit/)).toBeVisible();
    expect(screen.queryByRole("button", { name: /without a test/ })).toBeNull();
  });

  test("a method brings its own uncertainty, marked as common practice, until one is typed", async () => {
    const user = userEvent.setup();
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const sd = within(form).getByLabelText("Its own uncertainty");
    expect(sd).toHaveValue("3");
    expect(within(form).getByText(/common practice, no source/)).toBeVisible();
    await user.selectOptions(within(form).getByLabelText("Tested by"), "real-ear-microphones");
    expect(sd).toHaveValue("4");
    await user.clear(sd);
    await user.type(sd, "2.5");
    await user.selectOptions(within(form).getByLabelText("Tested by"), "psychophysical");
    expect(sd).toHaveValue("2.5");
    expect(within(form).getByText(/as its maker states it/)).toBeVisible();
  });

  test("one ear, a fail and more than an ear can have are said at once", async () => {
    const user = userEvent.setup();
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const left = within(form).getByRole("group", { name: "Left ear" });
    await user.type(within(left).getByLabelText("Trial 1"), "14");
    // A single trial: u is the method’s alone, 14 − 0.99446 · 3 = 11.0.
    expect(within(form).getByText("PAR 11.0 dB")).toBeVisible();
    expect(within(form).getByText("Does not fit")).toBeVisible();
    expect(within(form).getByText(/Left ear only/)).toBeVisible();
    expect(within(form).getByText(/single trial says nothing/)).toBeVisible();
    expect(within(form).queryByText(/Is the sign right/)).toBeNull();
    await user.clear(within(left).getByLabelText("Trial 1"));
    await user.type(within(left).getByLabelText("Trial 1"), "-3");
    expect(
      within(form).getByText(/^A trial below 0 dB says .* Is the sign right\?$/),
    ).toBeVisible();
    await user.clear(within(left).getByLabelText("Trial 1"));
    await user.type(within(left).getByLabelText("Trial 1"), "70");
    expect(within(left).getByText(/^Left ear, trial 1: 70.0 dB is more than/)).toBeVisible();
    expect(within(form).getByText("Not rated while a trial can’t be right.")).toBeVisible();
  });

  test("a fit that failed is said at the trials, and they have the focus for the next", async () => {
    const user = userEvent.setup();
    hasPassed = false;
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const trial = (ear: string) =>
      within(within(form).getByRole("group", { name: ear })).getByLabelText("Trial 1");
    await user.type(trial("Left ear"), "14");
    await user.click(within(form).getByRole("button", { name: "Record the fit" }));
    expect(await within(form).findByText(/^Fenmuff does not fit: kept as tried\./)).toBeVisible();
    await waitFor(() => expect(trial("Left ear")).toHaveFocus());
    expect(trial("Left ear")).toHaveValue("");
    expect(sent).toHaveLength(1);
  });

  test("a fit from paper is recorded with its own day, and the device goes out with it", async () => {
    const user = userEvent.setup();
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    fireEvent.change(within(form).getByLabelText("Tested on"), { target: { value: "2026-11-17" } });
    const left = within(form).getByRole("group", { name: "Left ear" });
    const right = within(form).getByRole("group", { name: "Right ear" });
    await user.type(within(left).getByLabelText("Trial 1"), "24");
    await user.type(within(right).getByLabelText("Trial 1"), "22");
    await user.click(within(form).getByRole("button", { name: "Record the fit" }));
    const issue = await screen.findByRole("form", { name: "Issue Fenmuff" });
    expect(sent[0]?.body).toMatchObject({ testedOn: "2026-11-17" });
    expect(within(issue).getByLabelText("Issued")).toHaveValue("2026-11-17");
  });

  test("each trial that no ear can have is marked once, at its ear, and nothing is sent", async () => {
    const user = userEvent.setup();
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const [left, right] = ["Left ear", "Right ear"].map((name) =>
      within(form).getByRole("group", { name }),
    ) as [HTMLElement, HTMLElement];
    await user.type(within(left).getByLabelText("Trial 1"), "70");
    await user.type(within(right).getByLabelText("Trial 1"), "20");
    await user.type(within(right).getByLabelText("Trial 2"), "69");
    await user.click(within(form).getByRole("button", { name: "Record the fit" }));
    expect(within(left).getByText(/^Left ear, trial 1: 70.0 dB is more than/)).toBeVisible();
    expect(within(right).getByText(/^Right ear, trial 2: 69.0 dB is more than/)).toBeVisible();
    expect(within(form).getAllByText(/is more than an ear can have/)).toHaveLength(2);
    expect(within(left).getByLabelText("Trial 1")).toHaveAttribute("aria-invalid", "true");
    expect(within(right).getByLabelText("Trial 1")).not.toHaveAttribute("aria-invalid");
    expect(within(right).getByLabelText("Trial 2")).toHaveAttribute("aria-invalid", "true");
    expect(sent).toEqual([]);
  });

  test("what is out of the question says why, and is not held out to be tried", async () => {
    at = desk({
      candidates: [
        candidate(muff, "Fenmuff", "earmuff"),
        candidate(plug, "Alder foam", "foam-plug", {
          excludedBy: { code: "gear", gear: "helmet" },
          decidedBy: "compatibility",
        }),
        candidate(id(5), "Sedge band", "banded-plug", {
          excludedBy: { code: "no-data", gear: null },
          decidedBy: "compatibility",
        }),
      ],
    });
    open(paths.fittingOf(worker));
    expect(await screen.findByRole("button", { name: "Try Fenmuff" })).toBeVisible();
    // Its own fit may be just what is missing.
    expect(screen.getByRole("button", { name: "Try Sedge band" })).toBeVisible();
    expect(screen.getByText("not with helmet")).toBeVisible();
    expect(screen.queryByRole("button", { name: "Try Alder foam" })).toBeNull();
  });

  test("where nothing has to come off nothing is passed, and under Appendix B the label less 7 stands beside", async () => {
    at = desk({
      ruleSetKey: "us-general-industry",
      need: {
        needDb: 0,
        outsideDb: 84,
        isUpperBound: false,
        targetDb: 90,
        taskId: null,
        taskName: null,
        isTooDeepForOwnFit: false,
        mostDb: null,
        reason: null,
      },
      candidates: [
        candidate(muff, "Fenmuff", "earmuff", {
          labelLess7Db: 17,
          lastFit: { parDb: 18, hasPassed: null, needDb: -2, testedOn: "2026-12-01" },
        }),
      ],
      tests: [
        tested(
          { leftDb: [18], rightDb: [18], methodSdDb: 0, bands: null },
          { needDb: 0, labelLess7Db: 17 },
        ),
      ],
    });
    open(paths.fittingOf(worker));
    await screen.findByText("Nothing has to come off.");
    expect(screen.getAllByText("rating − 7: 17.0")).toHaveLength(2);
    expect(screen.getByText("By its label, rating − 7: 17.0 dB.")).toBeTruthy();
    const ear = within(screen.getByRole("form", { name: "Test the fit" })).getByRole("group", {
      name: "Left ear",
    });
    await userEvent.type(within(ear).getAllByRole("textbox")[0]!, "20");
    expect(
      await screen.findByText(/Nothing has to come off, so there is nothing to pass\./),
    ).toBeTruthy();
    expect(screen.queryByText("Fits")).toBeNull();
  });

  test("an active device has both figures, and the reason says which one it is judged by", async () => {
    const active = (more: object) =>
      candidate(muff, "Tern active", "active-earmuff", {
        wornDb: 88.1,
        wornActiveDb: 79.4,
        ...more,
      });
    const option = () =>
      within(screen.getByLabelText("Device")).getByRole("option", { name: /Tern active/ });
    at = desk({
      creditsActivePart: true,
      candidates: [active({ word: "good", isActiveCredited: true })],
    });
    const credited = open(paths.fittingOf(worker));
    await screen.findByText(/judged with the active part on: its check is passed$/);
    expect(screen.getByText("Chipping 88.1, with the active part on 79.4")).toBeVisible();
    expect(option()).toHaveTextContent("1. Tern active, Good, 79.4 dB");
    credited.unmount();

    at = desk({ creditsActivePart: true, candidates: [active({ word: "too-little" })] });
    const unchecked = open(paths.fittingOf(worker));
    await screen.findByText(/judged with the active part off: no passed check on record$/);
    expect(option()).toHaveTextContent("1. Tern active, Too little, 88.1 dB");
    unchecked.unmount();

    at = desk({ candidates: [active({ word: "too-little" })] });
    open(paths.fittingOf(worker));
    await screen.findByText(/judged with the active part off: no credit at this site$/);
  });

  test("under Appendix B the shift’s word stands with the shift’s level, not a task’s", async () => {
    at = desk({
      ruleSetKey: "us-general-industry",
      candidates: [
        candidate(muff, "Fenmuff", "earmuff", {
          word: "enough",
          wornDb: 96.4,
          twaDb: 75.9,
          isTwaMost: true,
        }),
      ],
    });
    open(paths.fittingOf(worker));
    const device = await screen.findByLabelText("Device");
    expect(within(device).getByRole("option")).toHaveTextContent("1. Fenmuff, Enough, ≤75.9 dB");
    expect(screen.getByText("Chipping 96.4, shift ≤75.9")).toBeVisible();
  });

  test("one kind only, or none left, is said before anything is sent", async () => {
    const user = userEvent.setup();
    at = desk({
      candidates: [
        candidate(muff, "Fenmuff", "earmuff"),
        candidate(plug, "Alder foam", "foam-plug", { stock: 0 }),
      ],
      tests: [tested({ leftDb: [24], rightDb: [], methodSdDb: 3, bands: null })],
    });
    open(paths.fittingOf(worker));
    await user.click(await screen.findByRole("button", { name: "Issue Fenmuff" }));
    const issue = await screen.findByRole("form", { name: "Issue Fenmuff" });
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    expect(await within(issue).findByText(/Only one kind was on offer/)).toBeVisible();
    expect(within(issue).getByLabelText("All the same, because")).toHaveFocus();
    expect(sent).toEqual([]);
    // With another on offer nothing is asked, and it goes.
    await user.click(within(issue).getByLabelText("Alder foam"));
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    await waitFor(() => expect(sent).toHaveLength(1));
    expect(sent[0]?.body.reason).toBeNull();
  }, 30_000);

  test("a struck-out fit says why, and by whom", async () => {
    const facts = { leftDb: [24], rightDb: [24], methodSdDb: 3, bands: null };
    at = desk({ tests: [tested(facts, { isVoid: true, struckReason: "Wrong worker" })] });
    open(paths.fittingOf(worker));
    expect(await screen.findByText("a single trial, struck out")).toBeVisible();
    expect(screen.getByText(/^.?Wrong worker.?, .?S\. Ferrand.?$/)).toBeVisible();
  });

  test("a fit of one ear alone, or one that failed, goes out only for a reason", async () => {
    const user = userEvent.setup();
    const facts = { leftDb: [24], rightDb: [], methodSdDb: 3, bands: null };
    at = desk({ tests: [tested(facts, { rightDb: null, hasPassed: null })] });
    const oneEar = open(paths.fittingOf(worker));
    await user.click(await screen.findByRole("button", { name: "Issue Fenmuff" }));
    const issue = await screen.findByRole("form", { name: "Issue Fenmuff" });
    await user.click(within(issue).getByLabelText("Alder foam"));
    expect(within(issue).getByText(/not assessed for one ear\. Only officers/)).toBeVisible();
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    expect(await within(issue).findByText(/say why it goes out all the same/)).toBeVisible();
    expect(sent).toEqual([]);
    await user.type(within(issue).getByLabelText("All the same, because"), "right ear later");
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    await waitFor(() => expect(sent[0]?.body.reason).toBe("right ear later"));
    oneEar.unmount();

    sessionStorage.clear();
    const lastFit = { parDb: 18, hasPassed: false, needDb: 19, testedOn: "2026-12-01" };
    at = desk({
      candidates: [
        candidate(muff, "Fenmuff", "earmuff", { lastFit }),
        candidate(plug, "Alder foam", "foam-plug"),
      ],
      tests: [tested(facts, { hasPassed: false })],
    });
    open(paths.fittingOf(worker));
    await screen.findByText("Fenmuff did not fit this worker when it was last tested.");
    expect(screen.queryByRole("button", { name: "Issue Fenmuff without a test" })).toBeNull();
    await user.click(screen.getByRole("button", { name: "Issue Fenmuff" }));
    const failed = await screen.findByRole("form", { name: "Issue Fenmuff" });
    await user.click(within(failed).getByLabelText("Alder foam"));
    expect(within(failed).getByText(/This fit did not pass\. Only officers/)).toBeVisible();
  }, 30_000);

  test("what it takes the place of is named before and after", async () => {
    const user = userEvent.setup();
    const pair = {
      taskId: null,
      areaId: null,
      innerModelId: plug,
      outerModelId: muff,
      size: null,
      name: "Alder foam + Fenmuff",
      fromDate: "2026-03-02",
      toDate: null,
    };
    at = desk({
      assigned: [pair],
      tests: [tested({ leftDb: [24], rightDb: [24], methodSdDb: 3, bands: null })],
    });
    answerIssue = () => ({
      status: 201,
      body: IssueSaved.parse({ ...issued, replacedName: pair.name }),
    });
    open(paths.fittingOf(worker));
    await user.click(await screen.findByRole("button", { name: "Issue Fenmuff" }));
    const issue = await screen.findByRole("form", { name: "Issue Fenmuff" });
    expect(
      within(issue).getByText(/^Replaces Alder foam \+ Fenmuff, assigned for this since 2 Mar/),
    ).toBeVisible();
    await user.click(within(issue).getByLabelText("Alder foam"));
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    expect(
      await screen.findByText(/It replaces Alder foam \+ Fenmuff, everywhere in noise\.$/),
    ).toBeVisible();
  }, 30_000);

  test("what the worker refused stands at the desk and beside the device, which can still be tried", async () => {
    const user = userEvent.setup();
    refusals = [
      {
        id: id(11),
        workerId: worker,
        modelId: plug,
        modelName: "Alder foam",
        kind: "cannot-wear",
        happenedOn: "2026-11-12",
        reason: "Inflamed ear canal",
        authorName: "S. Ferrand",
      },
    ];
    open(paths.fittingOf(worker));
    expect(await screen.findByText(/^this worker cannot wear it, said on 12 Nov/)).toBeVisible();
    expect(screen.getByText("Inflamed ear canal")).toBeVisible();
    expect(screen.getByRole("button", { name: "Try Alder foam" })).toBeEnabled();
    await user.click(screen.getByRole("button", { name: "Enter a refusal or non-wear" }));
    const form = screen.getByRole("form", { name: "Refusal or non-wear" });
    expect(within(form).getByLabelText("Reason")).toBeVisible();
  });

  test("a form over a fit says when it is done, and gives the focus back where it came from", async () => {
    const user = userEvent.setup();
    const fit = tested({ leftDb: [24], rightDb: [], methodSdDb: 3, bands: null });
    at = desk({ tests: [fit] });
    answerIssue = () => ({
      status: 200,
      body: FitTestView.parse({ ...fit, isVoid: true, struckReason: "wrong worker" }),
    });
    open(paths.fittingOf(worker));
    const strike = () => screen.findByRole("button", { name: "Strike out the fit of Fenmuff" });
    await user.click(await strike());
    const form = () => screen.getByRole("form", { name: "Strike out the fit of Fenmuff" });
    await user.click(within(form()).getByRole("button", { name: "Leave as it was" }));
    expect(await strike()).toHaveFocus();
    await user.click(await strike());
    await user.type(within(form()).getByRole("textbox"), "wrong worker");
    await user.click(within(form()).getByRole("button", { name: /^Strike/ }));
    const said = await screen.findByText("The fit of Fenmuff is struck out.");
    await waitFor(() => expect(document.activeElement).toContainElement(said));
  });

  test("what is assigned and cannot be worn is named as such", async () => {
    const assigned = {
      taskId: null,
      areaId: null,
      innerModelId: muff,
      outerModelId: null,
      size: null,
      name: "Fenmuff",
      fromDate: "2026-03-02",
      toDate: null,
    };
    const lay = (excludedBy: FittingDesk["candidates"][number]["excludedBy"]) =>
      desk({
        assigned: [assigned],
        candidates: [
          candidate(plug, "Alder foam", "foam-plug"),
          candidate(muff, "Fenmuff", "earmuff", { excludedBy }),
        ],
      });
    at = lay(null);
    const page = open(paths.fittingOf(worker));
    await screen.findByRole("form", { name: "Test the fit" });
    expect(screen.queryByText(/who cannot wear it/)).toBeNull();
    page.unmount();
    at = lay({ code: "cannot-wear", gear: null });
    open(paths.fittingOf(worker));
    expect(
      await screen.findByText(
        "Fenmuff is assigned to this worker, who cannot wear it. Issue another.",
      ),
    ).toBeVisible();
    expect(screen.getByText("this worker cannot wear it")).toBeVisible();
  });

  test("what is out with the worker says issued, and another one is offered", async () => {
    at = desk({
      tests: [
        tested(
          { leftDb: [24], rightDb: [], methodSdDb: 3, bands: null },
          { outcome: "issued", size: "M" },
        ),
      ],
      issued: [
        {
          id: id(8),
          revision: 1,
          modelId: muff,
          modelName: "Fenmuff",
          size: "M",
          issuedOn: "2026-11-20",
          isAcknowledged: true,
        },
      ],
    });
    open(paths.fittingOf(worker));
    expect(await screen.findByRole("button", { name: "Issue another Fenmuff" })).toBeVisible();
    expect(screen.getByText("a single trial, issued")).toBeVisible();
    expect(screen.queryByRole("button", { name: "Issue Fenmuff" })).toBeNull();
  });

  test("a trial that is no number is named at its ear, and nothing is rated or sent meanwhile", async () => {
    const user = userEvent.setup();
    open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const left = within(form).getByRole("group", { name: "Left ear" });
    await user.type(within(left).getByLabelText("Trial 1"), "x");
    await user.type(within(left).getByLabelText("Trial 2"), "20");
    expect(within(form).queryByText(/^PAR/)).toBeNull();
    await user.click(within(form).getByRole("button", { name: "Record the fit" }));
    expect(await within(left).findByText("Trial 1: This is not a number.")).toBeVisible();
    expect(sent).toEqual([]);
  }, 30_000);

  test("nothing typed is lost over an error", async () => {
    const user = userEvent.setup();
    at = desk({ tests: [tested({ leftDb: [24], rightDb: [], methodSdDb: 3, bands: null })] });
    answerIssue = () => ({
      status: 422,
      body: {
        code: "invalid",
        issues: [{ path: ["reason"], code: "none-in-stock", params: {} }],
      },
    });
    const page = open(paths.fittingOf(worker));
    const form = await screen.findByRole("form", { name: "Test the fit" });
    const right = within(form).getByRole("group", { name: "Right ear" });
    await user.type(within(right).getByLabelText("Trial 1"), "19.5");
    await user.click(screen.getAllByRole("button", { name: "Issue Fenmuff" })[0] as HTMLElement);
    const issue = await screen.findByRole("form", { name: "Issue Fenmuff" });
    await user.click(within(issue).getByLabelText("Alder foam"));
    await user.click(within(issue).getByLabelText(/was shown/));
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    expect(await within(issue).findByText(/None of this size is in stock/)).toBeVisible();
    expect(within(issue).getByLabelText(/was shown/)).toBeChecked();
    expect(within(right).getByLabelText("Trial 1")).toHaveValue("19.5");
    await user.type(within(issue).getByLabelText("All the same, because"), "from the display");
    answerIssue = () => ({ status: 201, body: IssueSaved.parse(issued) });
    await user.click(within(issue).getByRole("button", { name: "Issue this" }));
    await waitFor(() => expect(sent).toHaveLength(2));
    expect(sent[1]?.body.reason).toBe("from the display");
    expect(sent[1]?.key).not.toBe(sent[0]?.key);
    page.unmount();
  }, 30_000);

  test("whose noise is not known is told so, and may be tested all the same", async () => {
    at = desk({
      need: {
        needDb: null,
        outsideDb: null,
        isUpperBound: false,
        targetDb: null,
        taskId: null,
        taskName: null,
        isTooDeepForOwnFit: false,
        mostDb: null,
        reason: "no-noise",
      },
    });
    open(paths.fittingOf(worker));
    expect(await screen.findByText("What this worker needs is not known.")).toBeVisible();
    expect(screen.getByText(/No noise of this worker is known/)).toBeVisible();
    expect(screen.getByRole("form", { name: "Test the fit" })).toBeVisible();
  });
});
