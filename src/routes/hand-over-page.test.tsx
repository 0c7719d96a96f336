import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes } from "react-router-dom";
import { beforeEach, expect, test, vi } from "vitest";
import { HandOverDraft, HandOverPage, HandOverView } from "../../shared/schemas/hand-over";
import { sessionQuery } from "../features/session/session";
import { createQueryClient } from "../lib/query-client";
import { TestLanguage } from "../lib/test-i18n";
import { paths } from "../paths";
import { Component } from "./hand-over-page";

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const [crew, next] = [id(1), id(2)];
const content = (absent: HandOverDraft["content"]["absent"] = []): HandOverDraft["content"] => ({
  sheetDate: "2026-12-03",
  orders: [],
  absent,
  loans: [],
});
const draft = (fingerprint: string, shown = content()): HandOverDraft => ({
  crew: { id: crew, name: "Days", timeZone: "Europe/London" },
  content: shown,
  fingerprint: fingerprint.repeat(64),
  recipients: [{ id: next, name: "A. Winterfeldt" }],
});
const given = (overrides: Partial<HandOverView> = {}): HandOverView => ({
  id: id(3),
  content: content([{ workerName: "Ada", untilDate: null }]),
  note: "The door seal leaks.",
  byName: "S. Ferrand",
  toName: "B. Rowntree-Adair",
  givenAt: "2026-12-02T12:36:00.000Z",
  receivedAt: null,
  canReceive: true,
  ...overrides,
});

const post = vi.fn<(path: string, body: unknown) => Response>();
let listed: HandOverView[] = [];

beforeEach(() => {
  post.mockReset();
  listed = [];
});

function open(role: "supervisor" | "auditor" = "supervisor") {
  vi.mocked(fetch).mockImplementation(async (input, init) => {
    const path = String(input);
    if (init?.method === "POST") return post(path, JSON.parse(String(init.body)));
    if (path === `/api/crews/${crew}/hand-over-draft`)
      return Response.json(HandOverDraft.parse(draft("a")));
    if (path.startsWith(`/api/crews/${crew}/hand-overs`))
      return Response.json(HandOverPage.parse({ rows: listed, next: null, total: listed.length }));
    throw new Error(`unhandled request: ${path}`);
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
      roles: [role],
      organizationName: "Ostmere",
      sites: [{ id: id(8), name: "Ostmere works", timeZone: "Europe/London", language: "en" }],
      visits: [],
    },
  });
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter initialEntries={[paths.handOvers(crew)]}>
          <Routes>
            <Route path={paths.handOvers(":crewId")} element={<Component />} />
          </Routes>
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

test("what was handed to the reader stands first, and goes to the earlier ones once read", async () => {
  const user = userEvent.setup();
  listed = [given()];
  open();
  const waiting = await screen.findByRole("region", { name: "Handed to you by S. Ferrand" });
  expect(waiting).toHaveTextContent("The door seal leaks.");
  expect(waiting).toHaveTextContent("Ada until further notice");
  post.mockImplementation(() => {
    const read = given({ canReceive: false, receivedAt: "2026-12-02T13:00:00.000Z" });
    listed = [read];
    return Response.json(HandOverView.parse(read), { status: 201 });
  });
  await user.dblClick(within(waiting).getByRole("button", { name: "I have read the hand-over" }));
  const earlier = within(await screen.findByRole("region", { name: "Earlier" }));
  expect(await earlier.findByText(/S. Ferrand to B. Rowntree-Adair, read 2 Dec/)).toBeVisible();
  expect(post.mock.calls.map(([path]) => path)).toEqual([`/api/hand-overs/${id(3)}/receipt`]);
  await waitFor(() => expect(document.activeElement?.tagName).toBe("SUMMARY"));
});

test("where the sheet has changed nothing is given, the new lists show, and what was written stays", async () => {
  const user = userEvent.setup();
  open();
  const form = within(await screen.findByRole("form", { name: "Hand over" }));
  const note = form.getByLabelText(/^What the next in charge should know/);
  await user.type(note, "The fitter comes at ten.");
  await user.selectOptions(form.getByLabelText("To whom"), "A. Winterfeldt");
  post.mockReturnValueOnce(
    Response.json(
      {
        type: "about:blank",
        title: "t",
        status: 412,
        code: "stale",
        current: draft("b", content([{ workerName: "Ben", untilDate: "2026-12-04" }])),
      },
      { status: 412, headers: { "content-type": "application/problem+json" } },
    ),
  );
  await user.click(form.getByRole("button", { name: "Hand over" }));
  expect(await screen.findByText(/^The sheet has changed meanwhile/)).toBeVisible();
  expect(screen.getByText("Ben")).toBeVisible();
  expect(note).toHaveValue("The fitter comes at ten.");

  post.mockReturnValueOnce(
    Response.json(HandOverView.parse(given({ toName: "A. Winterfeldt", canReceive: false })), {
      status: 201,
    }),
  );
  await user.click(form.getByRole("button", { name: "Hand over" }));
  expect(await screen.findByText("Handed over to A. Winterfeldt.")).toBeVisible();
  expect(note).toHaveValue("");
  expect(post.mock.calls.map(([, body]) => body)).toEqual(
    ["a", "b"].map((letter) => ({
      recipientId: next,
      note: "The fitter comes at ten.",
      fingerprint: letter.repeat(64),
    })),
  );
});

test("an auditor reads what was handed over and gives nothing", async () => {
  listed = [given({ canReceive: false })];
  open("auditor");
  expect(await screen.findByText(/not read yet/)).toBeVisible();
  expect(screen.queryByRole("form")).toBeNull();
});
