import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes } from "react-router-dom";
import { beforeEach, expect, test, vi } from "vitest";
import { AttendanceView } from "../../shared/schemas/attendance";
import { createQueryClient } from "../lib/query-client";
import { TestLanguage } from "../lib/test-i18n";
import { paths } from "../paths";
import { Component } from "./crew-people-page";

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const [crew, other, ada, ben] = [id(1), id(2), id(3), id(4)];
const person = { id: ada, name: "Ada" };
const view = (overrides: Partial<AttendanceView> = {}): AttendanceView => ({
  crew: { id: crew, name: "Days", timeZone: "Europe/London" },
  today: "2026-12-02",
  members: [
    { ...person, isLoan: false },
    { id: ben, name: "Ben", isLoan: true },
  ],
  absences: [],
  loans: [],
  otherCrews: [{ id: other, name: "Nights" }],
  ...overrides,
});
const absence = {
  id: id(5),
  worker: person,
  fromDate: "2026-12-01",
  toDate: null,
  revision: 3,
  canChange: true,
};

interface Sent {
  path: string;
  body: unknown;
  ifMatch: string | null;
  key: string | null;
}
const change = vi.fn<(sent: Sent) => Response>();
const answer = (body: AttendanceView, status = 200) =>
  Response.json(AttendanceView.parse(body), { status });

beforeEach(() => change.mockReset());

function open(shown: AttendanceView) {
  vi.mocked(fetch).mockImplementation(async (input, init) => {
    if (init?.method === "GET") return answer(shown);
    const headers = new Headers(init?.headers);
    return change({
      path: String(input),
      body: JSON.parse(String(init?.body)),
      ifMatch: headers.get("If-Match"),
      key: headers.get("Idempotency-Key"),
    });
  });
  render(
    <TestLanguage>
      <QueryClientProvider client={createQueryClient()}>
        <MemoryRouter initialEntries={[paths.crewPeople(crew)]}>
          <Routes>
            <Route path={paths.crewPeople(":crewId")} element={<Component />} />
          </Routes>
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
}

test("somebody is marked as not in from today, and the keyboard stays where it was", async () => {
  const user = userEvent.setup();
  open(view());
  await user.click(await screen.findByRole("button", { name: "Somebody is not in" }));
  const form = within(screen.getByRole("form", { name: "Not in" }));
  expect(form.getByLabelText("Who")).toHaveFocus();
  await user.selectOptions(form.getByLabelText("Who"), "Ada");
  change.mockReturnValue(answer(view({ absences: [{ ...absence, toDate: "2026-12-02" }] })));
  await user.dblClick(form.getByRole("button", { name: "Mark as not in" }));
  expect(await screen.findByRole("heading", { name: "Ada" })).toBeVisible();
  expect(change.mock.calls).toEqual([
    [
      {
        path: `/api/crews/${crew}/absences`,
        body: { workerId: ada, fromDate: "2026-12-02", toDate: "2026-12-02" },
        ifMatch: null,
        key: expect.any(String),
      },
    ],
  ]);
  await waitFor(() =>
    expect(screen.getByRole("button", { name: "Somebody is not in" })).toHaveFocus(),
  );
});

test("opening the other form loses nothing of what was typed into the one", async () => {
  const user = userEvent.setup();
  open(view());
  await user.click(await screen.findByRole("button", { name: "Somebody is not in" }));
  const absent = within(screen.getByRole("form", { name: "Not in" }));
  await user.selectOptions(absent.getByLabelText("Who"), "Ada");
  await user.click(screen.getByRole("button", { name: "Lend somebody" }));
  const lend = within(screen.getByRole("form", { name: "Lend somebody" }));
  expect(lend.getByLabelText("Who")).toHaveFocus();
  await user.click(lend.getByRole("button", { name: "Cancel" }));
  await waitFor(() => expect(screen.getByRole("button", { name: "Lend somebody" })).toHaveFocus());
  expect(absent.getByLabelText("Who")).toHaveValue(ada);
});

test("an absence without an end is said so, and taken back by the revision that was seen", async () => {
  const user = userEvent.setup();
  open(view({ absences: [absence] }));
  expect(await screen.findByText(/^From .* until further notice$/)).toBeVisible();
  change.mockReturnValue(answer(view()));
  await user.click(screen.getByRole("button", { name: "Take back: Ada" }));
  expect(await screen.findByText("Everybody is in, as far as is known.")).toBeVisible();
  expect(change.mock.calls[0]?.[0]).toMatchObject({
    path: `/api/crews/${crew}/absences/${absence.id}/strike`,
    ifMatch: "3",
  });
  await waitFor(() =>
    expect(screen.getByRole("button", { name: "Somebody is not in" })).toHaveFocus(),
  );
});

test("only one’s own people are lent, and a refusal says why, at its field where it has one", async () => {
  const user = userEvent.setup();
  open(view());
  await user.click(await screen.findByRole("button", { name: "Lend somebody" }));
  const form = within(screen.getByRole("form", { name: "Lend somebody" }));
  expect(form.queryByRole("option", { name: "Ben" })).toBeNull();
  await user.selectOptions(form.getByLabelText("Who"), "Ada");
  await user.selectOptions(form.getByLabelText("To which crew"), "Nights");
  const refuse = (status: number, problem: object) =>
    change.mockReturnValueOnce(
      Response.json(
        { type: "about:blank", detail: "", params: {}, requestId: "1", status, ...problem },
        { status },
      ),
    );
  refuse(422, {
    title: "Invalid",
    code: "invalid",
    issues: [{ path: ["workerId"], code: "not-in-crew" }],
  });
  await user.click(form.getByRole("button", { name: "Lend" }));
  expect(
    await form.findByText("This person does not belong to the crew on those days."),
  ).toBeVisible();
  expect(form.getByLabelText("Who")).toHaveAccessibleDescription(/does not belong to the crew/);
  refuse(409, { title: "Overlap", code: "loan-overlaps", issues: [] });
  await user.click(form.getByRole("button", { name: "Lend" }));
  expect(
    await form.findByText("This person is lent to a crew on some of these days already."),
  ).toBeVisible();
  expect(form.getByLabelText("Who")).toHaveValue(ada);
});

test("a loan that has begun is ended, not taken back; one from another crew is only shown", async () => {
  open(
    view({
      loans: [
        { ...absence, toDate: "2026-12-04", way: "out", crewName: "Nights" },
        {
          ...absence,
          id: id(6),
          worker: { id: ben, name: "Ben" },
          toDate: "2026-12-02",
          canChange: false,
          way: "in",
          crewName: "Lates",
        },
      ],
    }),
  );
  expect(await screen.findByText("lent to Nights")).toBeVisible();
  expect(screen.getByText("on loan from Lates")).toBeVisible();
  expect(screen.getByRole("button", { name: "Last day… Ada" })).toBeVisible();
  expect(screen.queryByRole("button", { name: /^Take back/ })).toBeNull();
  expect(screen.queryByRole("button", { name: "Last day… Ben" })).toBeNull();
});
