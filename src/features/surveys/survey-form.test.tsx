// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter } from "react-router-dom";
import { afterEach, expect, test, vi } from "vitest";
import { SurveyDetail, SurveyPlan } from "../../../shared/schemas/survey";
import { TestLanguage } from "../../lib/test-i18n";
import { SurveyForm } from "./survey-form";

// The whole form is typed into: a busy machine needs its time for that.
vi.setConfig({ testTimeout: 20_000 });

afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
});

const uuid = (last: number) => `00000000-0000-4000-8000-${String(last).padStart(12, "0")}`;
const [siteId, jobId, grinding, rigging, instrumentId] = [1, 2, 3, 4, 5].map(uuid) as [
  string,
  string,
  string,
  string,
  string,
];
const person = (last: number, part: string) => ({
  workerId: uuid(last),
  part,
  name: `Worker ${last}`,
  employeeNumber: String(4000 + last),
});
const target = (taskId: string, taskName: string, meanMin: number) => ({
  taskId,
  taskName,
  samplesCount: 3,
  sampleMin: 5,
  nominalMin: 100,
  observed: { count: 12, meanMin, sdMin: 8, shiftsCount: 20 },
  reasons: [{ code: "three-samples", clause: "9.3", isRevisedIn2025: true }],
});

const plan = (overrides: object = {}) =>
  SurveyPlan.parse({
    strategy: "task",
    proposedStrategy: "task",
    strategyReason: "mobile-few-tasks",
    strategyClause: "Annex B Table B.1",
    seed: "first",
    groupSize: 9,
    targets: [target(grinding, "Grinding", 130), target(rigging, "Rigging", 104)],
    people: [person(11, "drawn"), person(12, "drawn"), person(13, "reserve")],
    instruments: [
      {
        id: instrumentId,
        name: "Dosimeter",
        serialNumber: "77 401",
        kind: "dosimeter",
        class: "2",
        calibrationDueOn: "2026-11-30",
        calibrationFailedOn: null,
        reservedBy: [],
      },
    ],
    ...overrides,
  });

const answer = { answer: null, note: "" };
const saved = (body: object) =>
  SurveyDetail.parse({
    ...body,
    id: uuid(9),
    jobName: "Fettlers",
    state: "planned",
    closingNote: null,
    authorName: null,
    createdAt: "2026-12-01T08:00:00.000Z",
    revision: 1,
    can: { change: true, adopt: true },
    peopleNames: {},
    taskNames: {},
    instrumentNames: {},
    nominalDay: [],
    samples: [],
    results: [],
    adopted: [],
  });

/** Answers plans by their query and keeps what is saved. */
function serve() {
  const asked: string[] = [];
  const bodies: Record<string, unknown>[] = [];
  vi.stubGlobal("fetch", async (address: string, options: RequestInit = {}) => {
    asked.push(address);
    if (options.method === "POST") bodies.push(JSON.parse(String(options.body)));
    const reply =
      options.method === "POST"
        ? saved(bodies.at(-1)!)
        : address.includes("strategy=job")
          ? plan({
              strategy: "job",
              targets: [
                {
                  ...target(grinding, "", 0),
                  taskId: null,
                  taskName: null,
                  samplesCount: 5,
                  sampleMin: 84,
                  observed: null,
                },
              ],
            })
          : plan({ seed: "second", people: [person(14, "drawn")] });
    return new Response(JSON.stringify(reply), {
      status: 200,
      headers: { "content-type": "application/json" },
    });
  });
  return { asked, bodies };
}

function show(onSaved = vi.fn()) {
  render(
    <MemoryRouter>
      <TestLanguage>
        <QueryClientProvider client={new QueryClient()}>
          <SurveyForm
            survey={null}
            plan={plan()}
            jobName="Fettlers"
            siteId={siteId}
            jobId={jobId}
            today="2026-12-01"
            onSaved={onSaved}
            onLeave={vi.fn()}
          />
        </QueryClientProvider>
      </TestLanguage>
    </MemoryRouter>,
  );
  return onSaved;
}

test("is filled in from what the standard asks, and saved as it stands", async () => {
  const { bodies } = serve();
  const onSaved = show();
  expect(screen.getByText(/Task by task suits it: the group moves about/)).toBeVisible();
  expect(screen.getByLabelText(/^Task by task/)).toBeChecked();
  // 130 of 100 min is off, 104 is not.
  expect(screen.getByText("as worked 130 ± 8 min, in 12 of 20 shifts")).toHaveClass("is-fault");
  expect(screen.getByText("as worked 104 ± 8 min, in 12 of 20 shifts")).not.toHaveClass("is-fault");
  await userEvent.click(screen.getByLabelText("Leave Rigging out"));
  const count = screen.getByLabelText("Samples of Grinding");
  await userEvent.clear(count);
  await userEvent.type(count, "6");
  await userEvent.type(screen.getByLabelText(/Who observes/), "R. Ahlquist");
  await userEvent.selectOptions(screen.getByLabelText(/^Impulsive noise/), "yes");
  await userEvent.click(screen.getByText("Save"));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  expect(bodies[0]).toMatchObject({
    siteId,
    jobId,
    strategy: "task",
    drawSeed: "first",
    targets: [{ taskId: grinding, samplesCount: 6, sampleMin: 5 }],
    observers: ["R. Ahlquist"],
    riskFactors: { impulse: { answer: "yes", note: "" }, vibration: answer },
    people: [
      { workerId: uuid(11), part: "drawn" },
      { workerId: uuid(12), part: "drawn" },
      { workerId: uuid(13), part: "reserve" },
    ],
  });
});

test("how the noise runs decides how long a sample lasts, and less than is asked for is said", async () => {
  const { bodies } = serve();
  const onSaved = show();
  const pattern = screen.getByLabelText("How the noise of Grinding runs");
  // A third of its 100 minutes, in whole ones.
  await userEvent.selectOptions(pattern, "fluctuating");
  expect(screen.getByLabelText("Minutes of each sample of Grinding")).toHaveValue("34");
  await userEvent.selectOptions(pattern, "cyclic");
  await userEvent.type(screen.getByLabelText("Minutes of a cycle of Grinding"), "4");
  // Three whole cycles.
  const minutes = screen.getByLabelText("Minutes of each sample of Grinding");
  await waitFor(() => expect(minutes).toHaveValue("12"));
  await userEvent.clear(minutes);
  await userEvent.type(minutes, "6");
  expect(screen.getByText(/Below what the standard asks for: 3 × 12 min/)).toBeVisible();
  await userEvent.click(screen.getByText("Save"));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  expect(bodies[0]).toMatchObject({
    targets: [
      { taskId: grinding, sampleMin: 6, pattern: "cyclic", cycleMin: 4 },
      { taskId: rigging, sampleMin: 5, pattern: "steady", cycleMin: null },
    ],
  });
});

test("another strategy asks for another plan with the same seed; drawing again asks for a new seed", async () => {
  const { asked, bodies } = serve();
  const onSaved = show();
  await userEvent.click(screen.getByLabelText(/^By job/));
  expect(await screen.findByLabelText(/Samples of The whole/)).toHaveValue("5");
  expect(asked[0]).toContain("seed=first");
  await userEvent.click(screen.getByLabelText(/^Task by task/));
  await screen.findByLabelText("Samples of Rigging");
  await userEvent.click(screen.getByText("Draw again"));
  expect(await screen.findByText("Worker 14")).toBeVisible();
  expect(asked.at(-1)).not.toContain("seed=");
  await userEvent.click(screen.getByText("Save"));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  expect(bodies[0]).toMatchObject({
    drawSeed: "second",
    people: [{ workerId: uuid(14), part: "drawn" }],
  });
});

test("an instrument is reserved for the survey's days, with a warning where its certificate ends before", async () => {
  const { bodies } = serve();
  const onSaved = show();
  const box = screen.getByLabelText(/Dosimeter, 77 401/);
  await userEvent.click(box);
  const row = box.closest("li")!;
  expect(within(row).getByText(/its certificate ends on 30 Nov 2026, before then/)).toHaveClass(
    "is-fault",
  );
  await userEvent.click(screen.getByText("Save"));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  expect(bodies[0]!.reservations).toEqual([
    { instrumentId, fromDate: "2026-12-01", toDate: "2026-12-01" },
  ]);
});
