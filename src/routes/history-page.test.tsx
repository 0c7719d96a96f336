import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes } from "react-router-dom";
import { beforeEach, describe, expect, test, vi } from "vitest";
import {
  Envelope,
  HistoryAnalysis,
  HistoryStretches,
  HistoryView,
} from "../../shared/schemas/history";
import { createQueryClient } from "../lib/query-client";
import { TestLanguage } from "../lib/test-i18n";
import { paths } from "../paths";
import { Component } from "./history-page";

// The picture is a canvas, which there is none of here; what stands around it is what is tested.
vi.mock("uplot", () => ({ default: class {} }));

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const grinding = id(4);
const welding = id(5);
const settings = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "slow",
} as const;

const history = (overrides: Partial<HistoryView> = {}): HistoryView => ({
  id: id(1),
  siteId: id(2),
  timeZone: "Europe/London",
  runId: id(3),
  workerId: null,
  workerName: "D. Tavernor",
  date: "2026-11-30",
  instrumentName: "Dosimeter 3",
  serialNumber: "D-0031",
  fileId: id(6),
  fileName: "levels.csv",
  startsAt: "2026-11-30T06:00:00.000Z",
  intervalMs: 1000,
  valuesCount: 28_800,
  channels: ["laeq", "las", "lcpeak"],
  stretches: [{ kind: "task", taskId: grinding, fromS: 3600, toS: 7200 }],
  leftOut: null,
  covers: "shift",
  taskNames: { [grinding]: "Grinding" },
  tasks: [
    { id: grinding, name: "Grinding", durationMin: 60 },
    { id: welding, name: "Welding", durationMin: 120 },
  ],
  keptReason: null,
  isVoid: false,
  revision: 2,
  authorName: "S. Ferrand",
  savedAt: "2026-11-30T15:02:00.000Z",
  can: { change: true },
  ...overrides,
});

const facts = { lceqDb: null, lasMaxDb: null, peak: null };
const part = (durationS: number, dosePct: number, laeqDb: number) => ({
  durationS,
  readings: [
    {
      ...facts,
      settings,
      dosePct,
      averageDb: laeqDb,
      label: "Upper action value",
      bound: "exact" as const,
      from: "laeq" as const,
    },
    {
      ...facts,
      settings: { ...settings, criterionLevelDb: 90, exchangeRateDb: 5 as const, thresholdDb: 80 },
      dosePct: 61,
      averageDb: null,
      label: "",
      bound: "upper" as const,
      from: "laeq" as const,
    },
  ],
  laeqDb,
  lceqDb: null,
  lasMaxDb: 104.2,
  peak: { levelDb: 128.4, weighting: "C" as const },
  percentilesDb: { "10": 95.1, "50": 88.2, "90": 71.3, "95": 68 },
});
const analysis: HistoryAnalysis = {
  counted: part(28_200, 98, 88),
  everything: part(28_800, 212, 90.4),
  tasks: [
    {
      taskId: grinding,
      taskName: "Grinding",
      durationS: 3600,
      laeqDb: 93.1,
      dosePct: 80,
      sharePct: 81.6,
    },
  ],
  rest: { durationS: 24_600, laeqDb: 84.7, dosePct: 18, sharePct: 18.4 },
  distribution: [
    { fromDb: 70, sharePct: 40 },
    { fromDb: 71, sharePct: 60 },
  ],
  runningDose: [
    { label: "Upper action value", settings, bound: "exact", bucketS: 14_400, dosePct: [40, 98] },
  ],
  quarters: [
    {
      fromS: 0,
      toS: 900,
      laeq: { levelDb: 82.4, bound: "exact" },
      slowMax: { levelDb: 91, bound: "upper" },
      dosePct: [1.9],
    },
  ],
};
const envelope: Envelope = {
  fromS: 0,
  bucketS: 14_400,
  channels: { las: { low: [6000, null], high: [9000, null] } },
};

type Answer = (request: { method: string; body: unknown; headers: Headers }) => {
  status: number;
  body: unknown;
};
const put = vi.fn<Answer>();

beforeEach(() => {
  localStorage.clear();
  put.mockReset();
  // jsdom has no such dialog; the browser's own is played in Chromium.
  HTMLDialogElement.prototype.showModal = function show() {
    this.open = true;
  };
  HTMLDialogElement.prototype.close = function close() {
    this.open = false;
  };
});

function open(shown: HistoryView = history()) {
  vi.stubGlobal("matchMedia", () => ({ addEventListener() {}, removeEventListener() {} }));
  vi.mocked(fetch).mockImplementation(async (input, init) => {
    const path = String(input);
    const answer = (body: unknown, status = 200) => Response.json(body, { status });
    if (init?.method === "PUT") {
      const { status, body } = put({
        method: "PUT",
        body: JSON.parse(String(init.body)),
        headers: new Headers(init.headers),
      });
      return answer(body, status);
    }
    if (path.includes("/envelope")) return answer(Envelope.parse(envelope));
    if (path.includes("/analysis")) return answer(HistoryAnalysis.parse(analysis));
    if (path.startsWith("/api/tasks")) return answer({ rows: [] });
    if (path === `/api/histories/${shown.id}`) return answer(HistoryView.parse(shown));
    throw new Error(`unhandled request: ${path}`);
  });
  render(
    <TestLanguage>
      <QueryClientProvider client={createQueryClient()}>
        <MemoryRouter initialEntries={[paths.history(shown.id)]}>
          <Routes>
            <Route path={paths.history(":id")} element={<Component />} />
          </Routes>
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

const list = () => screen.findByRole("table", { name: "Brackets, and what is left out" });
const rowOf = async (name: RegExp) => within(await list()).getByRole("row", { name });

describe("what a history comes to", () => {
  test("in one sentence: level, dose, and what is left out", async () => {
    open();
    expect(
      await screen.findByText(
        "LAeq 88.0 dB over 7 h 50 min; dose of what is counted 98 % against upper action value, 85, exact; 10 min left out.",
        { normalizer: (text) => text.replace(/[\u00a0\u2009]/g, " ") },
      ),
    ).toBeVisible();
  });

  test("a bound carries its mark and its word; results stand with and without what is left out", async () => {
    open();
    const table = await screen.findByRole("table", {
      name: "Results with and without what is left out",
    });
    expect(within(table).getByRole("row", { name: /^LAeq/ })).toHaveTextContent("88.090.4−2.4");
    const bound = within(table).getByRole("row", { name: /90 dB, 5 dB exchange/ });
    expect(bound).toHaveTextContent(/at most≤61\s%≤61\s%/);
  });

  test("the picture has its words", async () => {
    open();
    const picture = await screen.findByRole("img", {
      name: /^Levels of the shift from 06:00 to 14:00/,
    });
    await waitFor(() =>
      expect(picture).toHaveAccessibleName(/Dose at the end against upper action value, 85: 98/),
    );
  });
});

describe("drawing without a pointer", () => {
  test("a task is added where the last one ended, as long as the shift says, and saved on its revision", async () => {
    const user = userEvent.setup();
    open();
    await user.click(await screen.findByRole("button", { name: "Add a task" }));
    const form = screen.getByRole("form", { name: "Bracket under the time history" });
    expect(within(form).getByLabelText("Task")).toHaveValue(welding);
    expect(within(form).getByLabelText("From")).toHaveValue("08:00");
    expect(within(form).getByLabelText("To")).toHaveValue("10:00");
    await user.click(within(form).getByRole("button", { name: "Draw it" }));
    expect(await rowOf(/^Welding/)).toHaveTextContent("08:0010:002 h");
    const stretches = [
      { kind: "task", taskId: grinding, fromS: 3600, toS: 7200 },
      { kind: "task", taskId: welding, fromS: 7200, toS: 14_400 },
    ] as const;
    put.mockReturnValue({ status: 200, body: history({ stretches: [...stretches], revision: 3 }) });
    await user.click(screen.getByRole("button", { name: "Save the brackets" }));
    await waitFor(() =>
      expect(screen.queryByRole("button", { name: "Save the brackets" })).toBeNull(),
    );
    const [sent] = put.mock.calls[0] ?? [];
    expect(HistoryStretches.parse(sent?.body).stretches).toEqual(stretches);
    expect(sent?.headers.get("if-match")).toBe("2");
    expect(localStorage).toHaveLength(0);
  });

  test("typed over another task it is refused, in words", async () => {
    const user = userEvent.setup();
    open();
    await user.click(await screen.findByRole("button", { name: "Add a task" }));
    const from = screen.getByLabelText("From");
    await user.clear(from);
    await user.type(from, "0730");
    await user.click(screen.getByRole("button", { name: "Draw it" }));
    expect(
      await screen.findByText("It would lie over Grinding, 07:00–08:00. Shorten one of the two."),
    ).toBeVisible();
    expect(from).toHaveAttribute("aria-invalid", "true");
  });

  test("what is left out needs its reason, and may lie over a task", async () => {
    const user = userEvent.setup();
    open();
    await user.click(await screen.findByRole("button", { name: "Leave out a stretch" }));
    await user.clear(screen.getByLabelText("From"));
    await user.type(screen.getByLabelText("From"), "07:10:05");
    await user.clear(screen.getByLabelText("To"));
    await user.type(screen.getByLabelText("To"), "07:10:40");
    await user.click(screen.getByRole("button", { name: "Draw it" }));
    expect(await screen.findByText("This is needed.")).toBeVisible();
    await user.type(screen.getByLabelText("Left out, because"), "Knocked microphone");
    await user.click(screen.getByRole("button", { name: "Draw it" }));
    expect(await rowOf(/Knocked microphone/)).toHaveTextContent("07:10:0507:10:40");
  });

  test("taken away, and taken back", async () => {
    const user = userEvent.setup();
    open();
    await user.click(await screen.findByRole("button", { name: "Remove Grinding" }));
    await waitFor(() => expect(screen.queryByRole("row", { name: /^Grinding 07/ })).toBeNull());
    await user.click(screen.getByRole("button", { name: "Take back" }));
    expect(await rowOf(/^Grinding/)).toBeVisible();
    expect(screen.queryByRole("button", { name: "Save the brackets" })).toBeNull();
  });
});

describe("how the time left out was", () => {
  const out = { kind: "left-out", fromS: 600, toS: 1200, reason: "Knocked microphone" } as const;
  const ask = () => screen.findByRole("form", { name: "How the time left out was" });

  test("is asked where the run speaks for a shift, unknown unless somebody says", async () => {
    const user = userEvent.setup();
    open(history({ stretches: [out], leftOut: { how: "unknown" } }));
    const form = within(await ask());
    expect(form.getByRole("radio", { name: /^not known/ })).toBeChecked();
    expect(screen.queryByRole("button", { name: "Save the brackets" })).toBeNull();
    await user.click(form.getByRole("radio", { name: /^quiet/ }));
    await user.click(screen.getByRole("button", { name: "Save the brackets" }));
    expect(await form.findByText("This is needed.")).toBeVisible();
    expect(put).not.toHaveBeenCalled();
    await user.type(form.getByLabelText("Level there"), "62.5");
    const leftOut = { how: "quiet", levelDb: 62.5 } as const;
    put.mockReturnValue({
      status: 200,
      body: history({ stretches: [out], leftOut, revision: 3 }),
    });
    await user.click(screen.getByRole("button", { name: "Save the brackets" }));
    await waitFor(() => expect(put).toHaveBeenCalledTimes(1));
    expect(put.mock.calls[0]?.[0].body).toMatchObject({ stretches: [out], leftOut });
    await waitFor(() =>
      expect(screen.queryByRole("button", { name: "Save the brackets" })).toBeNull(),
    );
    expect(form.getByRole("radio", { name: /^quiet/ })).toBeChecked();
  });

  test("and of a part of the shift it is not", async () => {
    open(history({ stretches: [out], covers: "part", leftOut: { how: "unknown" } }));
    await rowOf(/Knocked microphone/);
    expect(screen.queryByRole("form", { name: "How the time left out was" })).toBeNull();
  });

  test("a run that no longer covers its shift is kept only for a reason", async () => {
    const user = userEvent.setup();
    localStorage.setItem(`dinward.history-draft.${id(1)}.2`, JSON.stringify([out]));
    open();
    const params = { coveredMin: 115, shiftMin: 480 };
    const issue = { path: "keptReason", code: "shorter-than-shift", params };
    put.mockReturnValueOnce({
      status: 422,
      body: { code: "invalid", issues: [{ ...issue, path: ["keptReason"] }] },
    });
    await user.click(await screen.findByRole("button", { name: "Save the brackets" }));
    const form = within(await ask());
    expect(await form.findByRole("alert")).toHaveTextContent(/shift/);
    await user.type(form.getByLabelText("Keep it, because…"), "nothing else there is");
    put.mockReturnValueOnce({
      status: 200,
      body: history({ stretches: [out], leftOut: { how: "unknown" }, revision: 3 }),
    });
    await user.click(screen.getByRole("button", { name: "Save the brackets" }));
    await waitFor(() => expect(put).toHaveBeenCalledTimes(2));
    expect(put.mock.calls[1]?.[0].body).toMatchObject({
      leftOut: { how: "unknown" },
      keptReason: "nothing else there is",
    });
    await waitFor(() => expect(form.queryByRole("alert")).toBeNull());
  });
});

describe("what was drawn and not saved", () => {
  const draft = [{ kind: "task", taskId: welding, fromS: 0, toS: 600 }];

  test("is there again after a reload", async () => {
    localStorage.setItem(`dinward.history-draft.${id(1)}.2`, JSON.stringify(draft));
    open();
    expect(await rowOf(/^Welding/)).toHaveTextContent("06:0006:10");
    expect(screen.getByRole("status")).toHaveTextContent("Not saved: drawn here before");
  });

  test("over a revision that was overtaken, both are shown", async () => {
    localStorage.setItem(`dinward.history-draft.${id(1)}.1`, JSON.stringify(draft));
    open();
    const dialog = await screen.findByRole("dialog", {
      name: "Someone saved these brackets before you",
    });
    expect(within(dialog).getByText("Welding")).toBeVisible();
    expect(within(dialog).getByText("Grinding")).toBeVisible();
    expect(dialog).toHaveTextContent("Saved by S. Ferrand, 30 November 2026, 15:02.");
    await userEvent.click(within(dialog).getByRole("button", { name: "Keep revision 2" }));
    expect(screen.queryByRole("dialog")).toBeNull();
    expect(localStorage).toHaveLength(0);
  });

  test("a save that somebody else's came before shows both, and what is chosen is sent on the new revision", async () => {
    const user = userEvent.setup();
    localStorage.setItem(`dinward.history-draft.${id(1)}.2`, JSON.stringify(draft));
    open();
    const current = history({ revision: 3, stretches: [] });
    put.mockReturnValueOnce({ status: 412, body: { code: "stale", current } });
    await user.click(await screen.findByRole("button", { name: "Save the brackets" }));
    const dialog = await screen.findByRole("dialog");
    put.mockReturnValueOnce({ status: 200, body: history({ revision: 4 }) });
    await user.click(within(dialog).getByRole("button", { name: "Save as chosen, revision 4" }));
    await waitFor(() => expect(put).toHaveBeenCalledTimes(2));
    expect(put.mock.calls[1]?.[0].headers.get("if-match")).toBe("3");
    await waitFor(() => expect(screen.queryByRole("dialog")).toBeNull());
  });
});

test("an auditor reads, and changes nothing", async () => {
  open(history({ can: { change: false } }));
  expect(await rowOf(/^Grinding/)).toBeVisible();
  for (const name of [/Add a task/, /Leave out/, /^Change/, /^Remove/])
    expect(screen.queryByRole("button", { name })).toBeNull();
});
