import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes } from "react-router-dom";
import { beforeEach, describe, expect, test, vi } from "vitest";
import { TimetableSubject, TimetableView } from "../../shared/schemas/timetable";
import { TimetableForm } from "../features/planning/timetable-form";
import { createQueryClient } from "../lib/query-client";
import { TestLanguage } from "../lib/test-i18n";
import { paths } from "../paths";
import { Component as AnswerPage } from "./plan-timetable-page";

const id = (last: number) => `00000000-0000-4000-8000-0000000000${String(last).padStart(2, "0")}`;
const [site, crew, hammer, bench, ash, birch] = [1, 2, 3, 4, 5, 6].map(id) as [
  string,
  string,
  string,
  string,
  string,
  string,
];
const scope = {
  scopeKind: "crew",
  scopeId: crew,
  name: "Days",
  siteId: site,
  siteName: "Ostmere works",
} as const;
const people = [
  { id: ash, name: "Ash", employeeNumber: "1" },
  { id: birch, name: "Birch", employeeNumber: "2" },
];

const subject: TimetableSubject = {
  scope,
  date: "2026-12-01",
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
  goal: "limit",
  startsAt: "06:00",
  slots: 8,
  people,
  tasks: [
    {
      id: hammer,
      name: "Hammering",
      levelDb: 98,
      levelFrom: "2026-06-01",
      isTheirs: true,
      hourPct: [20, 31],
      isUpper: false,
    },
    {
      id: bench,
      name: "Bench work",
      levelDb: 72,
      levelFrom: null,
      isTheirs: true,
      hourPct: [0.4, 0.4],
      isUpper: false,
    },
  ],
  withoutDay: [{ id: id(7), name: "Cedar" }],
  hasMore: false,
};

const request = {
  scopeKind: "crew" as const,
  scopeId: crew,
  goal: "limit",
  startsAt: "06:00",
  slots: 8,
  mostPct: 100,
  wornPct: null,
  personIds: [ash, birch],
  tasks: [
    {
      taskId: hammer,
      staffing: [{ from: 0, to: 8, people: 1 }],
      qualifiedIds: [ash],
      longestStay: 4,
      longestTotal: null,
    },
  ],
  restTaskId: bench,
  quietDb: null,
};

const view = (more: Partial<TimetableView>): TimetableView =>
  TimetableView.parse({
    id: id(9),
    scope,
    state: "working",
    progressPct: 40,
    baseDate: "2026-12-01",
    ruleSetKey: "uk-2005",
    ruleSetVersion: 1,
    methodVersion: 1,
    request,
    basis: {
      people,
      tasks: [
        {
          id: hammer,
          name: "Hammering",
          levelDb: 98,
          levelFrom: "2026-06-01",
          isUpper: false,
          slotPct: [5, 7.75],
        },
      ],
      rest: { name: "Bench work", levelDb: 72, slotPct: [0.1, 0.1] },
    },
    answer: null,
    planId: null,
    revision: 1,
    can: { keep: true },
    ...more,
  });

let sent: { path: string; body: unknown }[];
let at: TimetableView;

beforeEach(() => {
  sent = [];
  at = view({});
  sessionStorage.clear();
  vi.stubGlobal("fetch", async (path: string, init: RequestInit = {}) => {
    const { pathname } = new URL(path, "http://localhost");
    if (init.method === "POST") {
      sent.push({ path: pathname, body: init.body ? JSON.parse(String(init.body)) : null });
      if (pathname.endsWith("/cancel")) at = view({ state: "cancelled", revision: 2 });
      return Response.json(at, { status: 201 });
    }
    if (pathname === "/api/timetables/subject")
      return Response.json(TimetableSubject.parse(subject));
    return Response.json(at);
  });
  return () => vi.unstubAllGlobals();
});

function open(address: string) {
  const client = createQueryClient();
  return render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter initialEntries={[address]}>
          <Routes>
            <Route path={paths.newTimetable} element={<TimetableForm subject={subject} />} />
            <Route path={paths.timetable(":id")} element={<AnswerPage />} />
          </Routes>
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

describe("asking for a timetable", () => {
  test("starts with the crew’s loudest task, says what an hour takes, and sends what is asked", async () => {
    const user = userEvent.setup();
    open(paths.newTimetableFor("crew", crew));
    const task = await screen.findByRole("group", { name: "Hammering" });
    expect(task).toHaveTextContent("an hour takes 20 % to 31 % of the limit, by person");
    await user.selectOptions(within(task).getByLabelText(/Longest in one go/), "4");
    await user.click(screen.getByRole("button", { name: "Search for a timetable" }));
    expect(await screen.findByText("A timetable is being searched for.")).toBeVisible();
    expect(sent).toEqual([
      {
        path: "/api/timetables",
        body: { ...request, tasks: [{ ...request.tasks[0], qualifiedIds: null }] },
      },
    ]);
  });

  test("a task that nobody may do is said at its place, before anything is sent", async () => {
    const user = userEvent.setup();
    open(paths.newTimetableFor("crew", crew));
    const task = await screen.findByRole("group", { name: "Hammering" });
    await user.click(within(task).getByRole("button", { name: /Who may/ }));
    const who = within(task).getByRole("group", { name: "Who may do Hammering" });
    for (const name of [/Ash/, /Birch/])
      await user.click(within(who).getByRole("checkbox", { name }));
    expect(task).toHaveTextContent("Nobody may do this task");
    await user.click(screen.getByRole("button", { name: "Search for a timetable" }));
    expect(sent).toEqual([]);
  });
});

describe("what comes of it", () => {
  test("a search can be given up", async () => {
    const user = userEvent.setup();
    open(paths.timetable(id(9)));
    await user.click(await screen.findByRole("button", { name: "Stop" }));
    expect(await screen.findByText("The search was given up.")).toBeVisible();
  });

  test("a timetable with the bound that says how good it is", async () => {
    at = view({
      state: "answered",
      answer: {
        kind: "timetable",
        table: [
          [0, 0, 0, 0, -1, -1, -1, -1],
          [-1, -1, -1, -1, 0, 0, 0, 0],
        ],
        sharesPct: [20.4, 31.4],
        largestPct: 31.4,
        boundPct: 28.2,
        outcome: { workers: [] },
      },
    });
    open(paths.timetable(id(9)));
    expect(
      await screen.findByText("Largest dose 31 % of the limit; no timetable can be below 28 %."),
    ).toBeVisible();
    const table = screen.getByRole("table", { name: "Who is where when" });
    const birchRow = within(table).getByRole("row", { name: /Birch/ });
    expect(birchRow).toHaveTextContent("06:00 to 07:00: Bench work");
    expect(birchRow).toHaveTextContent("07:00 to 08:00: Hammering");
    expect(screen.getByRole("form", { name: "Keep it as a Plan" })).toBeVisible();
  });

  test("what contradicts one another, in words", async () => {
    at = view({
      state: "answered",
      answer: {
        kind: "contradiction",
        isSmallest: true,
        demands: [
          { kind: "stay", task: 0 },
          { kind: "qualified", task: 0 },
          { kind: "staffing", task: 0, line: 0 },
        ],
      },
    });
    open(paths.timetable(id(9)));
    const list = await screen.findByRole("list");
    const plain = (list.textContent ?? "").replace(/[\u2068\u2069]/g, "").replaceAll("\u00a0", " ");
    expect(plain).toContain("Nobody stays at Hammering for longer than 1 h in one go.");
    expect(plain).toContain("Hammering may be done only by Ash.");
    expect(plain).toContain("Hammering takes 1 person from 06:00 to 08:00.");
  });
});
