import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { createRef } from "react";
import { MemoryRouter } from "react-router-dom";
import { afterEach, beforeEach, describe, expect, test, vi } from "vitest";
import type { OutingRow as Row } from "../../../shared/schemas/outing";
import { TestLanguage } from "../../lib/test-i18n";
import { OutingRow, type OutingRowHandle } from "./outing-row";

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const settings = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "slow",
} as const;
const row = (overrides: Partial<Row> = {}): Row => ({
  instrumentId: id(1),
  name: "Dosimeter 3",
  serialNumber: "D-0031",
  kind: "dosimeter",
  class: "2",
  calibrationDueOn: "2027-03-01",
  calibrationFailedOn: null,
  presets: [settings],
  reservedFor: null,
  run: null,
  ...overrides,
});
const out: Row["run"] = {
  id: id(2),
  revision: 1,
  isOut: true,
  workerId: id(3),
  workerName: "D. Tavernor",
  employeeNumber: "4417",
  areaName: null,
  surveyId: null,
  date: "2026-11-30",
  outAt: "2026-11-30T06:00:00.000Z",
  backAt: null,
  expectedBackAt: "2026-11-30T14:00:00.000Z",
  checkBeforeDb: 114,
  checkAfterDb: null,
  readingsCount: 0,
  isVoid: false,
  doubts: [],
  keptReason: null,
  authorName: "S. Ferrand",
  historyId: null,
};
const run = {
  id: id(2),
  siteId: id(4),
  instrumentId: id(1),
  instrumentName: "Dosimeter 3",
  serialNumber: "D-0031",
  workerId: id(3),
  workerName: "D. Tavernor",
  areaName: null,
  taskId: null,
  taskName: null,
  surveyId: null,
  surveyName: null,
  place: null,
  date: "2026-11-30",
  shiftId: null,
  isOut: false,
  outAt: "2026-11-30T06:00:00.000Z",
  backAt: "2026-11-30T14:05:00.000Z",
  durationMin: 485,
  checkBeforeDb: 114,
  checkAfterDb: 113.9,
  covers: "shift",
  keptReason: null,
  unusual: null,
  readings: [],
  doubts: [],
  historyId: null,
  files: [],
  isVoid: false,
  revision: 2,
  authorName: "Y. Halloran",
  recordedAt: "2026-11-30T14:06:00.000Z",
  can: { correct: true },
};

type Sent = { path: string; body: Record<string, unknown> };
let sent: Sent[];
let answers: { status: number; body: object }[];

beforeEach(() => {
  sent = [];
  answers = [];
  vi.stubGlobal("fetch", async (path: string, init: RequestInit = {}) => {
    if (init.method === "GET") {
      const worker = { id: id(3), name: "D. Tavernor", employeeNumber: "4417", crewName: null };
      return Response.json({ rows: [{ ...wholeWorker, ...worker }], next: null });
    }
    sent.push({ path, body: JSON.parse(String(init.body)) });
    const { status, body } = answers.shift() ?? { status: 200, body: run };
    return Response.json(body, { status });
  });
});
afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
  vi.useRealTimers();
});

const wholeWorker = {
  siteId: id(4),
  siteName: "Ostmere works",
  employer: "own",
  employerName: null,
  jobName: null,
  leftOn: null,
  lastDay: null,
  openFindings: 0,
};

function show(shown: Row, canChange = true, isPast = false) {
  const onDone = vi.fn();
  const onShowAnew = vi.fn();
  const handle = createRef<OutingRowHandle>();
  const client = new QueryClient({ defaultOptions: { mutations: { retry: false } } });
  render(
    <QueryClientProvider client={client}>
      <TestLanguage>
        <MemoryRouter>
          <ul>
            <OutingRow
              ref={handle}
              row={shown}
              date="2026-11-30"
              isPast={isPast}
              timeZone="UTC"
              surveyId={null}
              canChange={canChange}
              searchPlaces={(text) =>
                "plating".includes(text) ? [{ value: `area ${id(5)}`, label: "Plating" }] : []
              }
              onDone={onDone}
              onShowAnew={onShowAnew}
            />
          </ul>
        </MemoryRouter>
      </TestLanguage>
    </QueryClientProvider>,
  );
  return { onDone, onShowAnew, handle, user: userEvent.setup() };
}

describe("a row in the evening, by keys alone", () => {
  test("a typed time, the check and the figure are sent with Enter", async () => {
    const { user, handle, onDone } = show(row({ run: out }));
    handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
    await user.keyboard("14:05{Enter}113.9{Enter}91.2{Enter}131{Enter}");
    await waitFor(() => expect(onDone).toHaveBeenCalledWith("D-0031 is back."));
    expect(sent).toMatchObject([
      {
        path: `/api/runs/${id(2)}/back`,
        body: {
          backAt: "2026-11-30T14:05:00.000Z",
          checkAfterDb: 113.9,
          covers: "shift",
          readings: [{ settings, averageDb: 91.2, peak: { levelDb: 131, weighting: "C" } }],
        },
      },
    ]);
  });

  test("a figure that can't be read is said on leaving it, and stays as typed over a reload", async () => {
    const { user } = show(row({ run: out }));
    const figure = screen.getByLabelText("LAeq");
    await user.type(figure, "91,2");
    await user.tab();
    expect(figure).toHaveAccessibleDescription("A level in dB, or a dose with %.");
    await user.type(screen.getByLabelText("Check after"), "93,9");
    await user.tab();
    expect(screen.getByLabelText("Check after")).toHaveAccessibleDescription(/two ways/);
    await user.clear(figure);
    await user.type(figure, "91.2");
    await user.tab();
    expect(figure).not.toHaveAttribute("aria-invalid");
  });

  test("Enter in the empty time stamps it and goes on; a dose is told by its %", async () => {
    const { user, handle } = show(row({ run: { ...out, expectedBackAt: null } as Row["run"] }));
    handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
    await user.keyboard("{Enter}");
    expect(screen.getByLabelText("Back")).toHaveValue(new Date().toISOString().slice(11, 16));
    expect(screen.getByLabelText("Check after")).toHaveFocus();
    await user.keyboard("{Enter}61 %{Enter}{Enter}");
    await waitFor(() => expect(sent).toHaveLength(1));
    expect(sent[0]!.body.readings).toMatchObject([{ dosePct: 61, averageDb: null }]);
  });

  test("more than half an hour after the shift it asks until when it was worn", async () => {
    const { user, handle, onDone } = show(row({ run: out }));
    handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
    await user.keyboard("15:10{Enter}{Enter}91.2{Enter}{Enter}");
    expect(
      await screen.findByText(/Back at 15:10; the shift ended at 14:00. Was it worn until then\?/),
    ).toBeVisible();
    expect(sent).toEqual([]);
    await user.click(screen.getByRole("button", { name: "No, until 14:00" }));
    await waitFor(() => expect(onDone).toHaveBeenCalled());
    expect(sent[0]!.body.backAt).toBe("2026-11-30T14:00:00.000Z");
  });

  test("a check that drifted is kept or discarded with a reason, and never without", async () => {
    answers = [
      {
        status: 422,
        body: {
          code: "invalid",
          issues: [{ path: ["keptReason"], code: "field-check-drift", params: { driftDb: 0.8 } }],
        },
      },
      { status: 200, body: { ...run, isVoid: true } },
    ];
    const { user, handle, onDone } = show(row({ run: out }));
    handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
    await user.keyboard("14:05{Enter}113.2{Enter}91.2{Enter}{Enter}");
    expect(await screen.findByText(/The field checks are 0.8 dB apart/)).toBeVisible();
    await user.click(screen.getByRole("button", { name: "Discard it, because…" }));
    expect(screen.getByText("A reason is needed, in a few words.")).toBeVisible();
    await user.type(screen.getByLabelText("Because"), "fell into the coolant");
    await user.click(screen.getByRole("button", { name: "Discard it, because…" }));
    await waitFor(() =>
      expect(onDone).toHaveBeenCalledWith("D-0031 is back; its run is discarded."),
    );
    expect(sent[1]!.body).toMatchObject({
      discardReason: "fell into the coolant",
      keptReason: null,
    });
  });

  test("who was first is said, and nothing is overwritten", async () => {
    answers = [{ status: 412, body: { code: "stale", issues: [], current: run } }];
    const { user, handle, onShowAnew } = show(row({ run: out }));
    handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
    await user.keyboard("14:06{Enter}{Enter}{Enter}{Enter}");
    expect(
      await screen.findByText("Y. Halloran has written it back already, at 14:05."),
    ).toBeVisible();
    await user.click(screen.getByRole("button", { name: "Show it as it stands" }));
    expect(onShowAnew).toHaveBeenCalled();
  });
});

describe("a row in the morning", () => {
  test("worker by number, check, and Enter twice: it is out", async () => {
    answers = [{ status: 201, body: { ...run, isOut: true, durationMin: null } }];
    const { user, handle, onDone } = show(row());
    handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Worker or place")).toHaveFocus());
    await user.keyboard("4417");
    await screen.findByRole("option", { name: /D. Tavernor/ });
    await user.keyboard("{Enter}");
    await waitFor(() => expect(screen.getByLabelText("Check before")).toHaveFocus());
    await user.keyboard("114{Enter}06:05{Enter}");
    await waitFor(() => expect(onDone).toHaveBeenCalledWith("D-0031 is out with D. Tavernor."));
    expect(sent).toMatchObject([
      {
        path: "/api/outings",
        body: {
          instrumentId: id(1),
          workerId: id(3),
          areaId: null,
          date: "2026-11-30",
          outAt: "2026-11-30T06:05:00.000Z",
          checkBeforeDb: 114,
        },
      },
    ]);
  });

  test("without worker or place it goes nowhere", async () => {
    const { user } = show(row());
    await user.type(screen.getByLabelText("Out"), "06:05{Enter}");
    expect(await screen.findByText("A worker, or a place.")).toBeVisible();
    expect(sent).toEqual([]);
  });
});

describe("what a run covers", () => {
  const short = {
    status: 422,
    body: {
      code: "invalid",
      issues: [
        {
          path: ["keptReason"],
          code: "shorter-than-shift",
          params: { coveredMin: 55, shiftMin: 480 },
        },
      ],
    },
  };
  const takeBack = async (answer: (typeof answers)[number]) => {
    answers = [answer, { status: 200, body: run }];
    const shown = show(row({ run: { ...out, expectedBackAt: null } as Row["run"] }));
    shown.handle.current?.focus();
    await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
    await shown.user.keyboard("06:55{Enter}{Enter}{Enter}{Enter}");
    return shown;
  };

  test("is asked where it is clearly shorter than the shift", async () => {
    const { user } = await takeBack(short);
    expect(await screen.findByText("It covers 55 min of a shift of 8 h.")).toBeVisible();
    await user.click(screen.getByRole("button", { name: "A part; the rest was like it" }));
    await waitFor(() => expect(sent).toHaveLength(2));
    expect(sent[0]!.body).toMatchObject({ covers: "shift" });
    expect(sent[1]!.body).toMatchObject({ covers: "projected", keptReason: null });
  });

  test("outside the shift it is not projected to it", async () => {
    const [issue] = short.body.issues;
    const outside = { ...issue, code: "outside-shift", params: { from: "14:00", to: "22:00" } };
    const { user } = await takeBack({
      ...short,
      body: { code: "invalid", issues: [outside] },
    });
    expect(
      await screen.findByText("It lies wholly outside the worker’s shift, 14:00 to 22:00."),
    ).toBeVisible();
    expect(screen.queryByRole("button", { name: /the rest was like it/ })).toBeNull();
    await user.click(screen.getByRole("button", { name: "A part; only evidence" }));
    await waitFor(() => expect(sent[1]?.body).toMatchObject({ covers: "part" }));
  });
});

test("a reason that was given is not sent with the row once it is sent anew", async () => {
  const drifted = {
    status: 422,
    body: {
      code: "invalid",
      issues: [{ path: ["keptReason"], code: "field-check-drift", params: { driftDb: 0.8 } }],
    },
  };
  answers = [drifted, { status: 503, body: { code: "unavailable", issues: [] } }];
  const { user, handle } = show(row({ run: { ...out, expectedBackAt: null } as Row["run"] }));
  handle.current?.focus();
  await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
  await user.keyboard("14:06{Enter}113.2{Enter}{Enter}{Enter}");
  await user.type(await screen.findByLabelText("Because"), "cover was open");
  await user.click(screen.getByRole("button", { name: "Keep it, because…" }));
  await waitFor(() => expect(sent[1]?.body).toMatchObject({ keptReason: "cover was open" }));
  const check = screen.getByLabelText("Check after");
  await user.clear(check);
  await user.type(check, "113.9");
  await user.click(screen.getByRole("button", { name: "Take back in" }));
  await waitFor(() => expect(sent).toHaveLength(3));
  expect(sent[2]!.body).toMatchObject({ checkAfterDb: 113.9, keptReason: null });
});

test("a time before it went out is the next day's, and is asked about", async () => {
  const { user, handle } = show(row({ run: { ...out, expectedBackAt: null } as Row["run"] }));
  handle.current?.focus();
  await waitFor(() => expect(screen.getByLabelText("Back")).toHaveFocus());
  await user.keyboard("05:00{Enter}{Enter}{Enter}{Enter}");
  expect(
    await screen.findByText("That is 1 Dec, 05:00, 23 h after it went out. Is it?"),
  ).toBeVisible();
  expect(sent).toEqual([]);
});

test("of a day gone by, out and back are one entry", async () => {
  answers = [{ status: 201, body: run }];
  const { user, onDone } = show(row(), true, true);
  await user.type(screen.getByLabelText("Worker or place"), "4417");
  await screen.findByRole("option", { name: /D. Tavernor/ });
  await user.keyboard("{Enter}");
  await waitFor(() => expect(screen.getByLabelText("Check before")).toHaveFocus());
  await user.keyboard("114{Enter}06:05{Enter}14:10{Enter}113.9{Enter}91.2{Enter}{Enter}");
  await waitFor(() => expect(onDone).toHaveBeenCalledWith("The run of D-0031 is recorded."));
  expect(sent).toMatchObject([
    {
      path: "/api/outings",
      body: {
        outAt: "2026-11-30T06:05:00.000Z",
        checkBeforeDb: 114,
        back: {
          backAt: "2026-11-30T14:10:00.000Z",
          checkAfterDb: 113.9,
          readings: [{ averageDb: 91.2 }],
        },
      },
    },
  ]);
});

test("who only reads has no field and no button", () => {
  show(row({ run: out }), false);
  expect(screen.queryByRole("textbox")).toBeNull();
  expect(screen.queryByRole("button")).toBeNull();
  expect(screen.getByText("D. Tavernor")).toBeVisible();
});
