// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { afterEach, expect, test, vi } from "vitest";
import { UserView } from "../../../shared/schemas/user";
import { TestLanguage } from "../../lib/test-i18n";
import { PersonForm } from "./person-form";

const id = (last: number) => `00000000-0000-4000-8000-0000000000${String(last).padStart(2, "0")}`;
const [here, elsewhere] = [id(1), id(2)];
const grant = (more: Partial<UserView["grants"][number]>): UserView["grants"][number] => ({
  id: id(9),
  role: "worker",
  siteId: here,
  siteName: "Mill",
  year: null,
  endsAt: null,
  groupName: null,
  isWithinReach: true,
  ...more,
});
const person = UserView.parse({
  id: id(5),
  name: "Inés Roldán",
  email: null,
  expectedSubject: null,
  isBound: true,
  workerId: null,
  workerName: null,
  language: "es",
  grants: [
    grant({ role: "supervisor" }),
    grant({
      id: id(8),
      role: "officer",
      siteId: elsewhere,
      siteName: "Quarry",
      isWithinReach: false,
    }),
  ],
  lastSignInAt: null,
  revokedAt: null,
  revision: 1,
  can: { change: true, revoke: false },
} satisfies UserView);

afterEach(() => vi.unstubAllGlobals());

test("a role beyond one's own sites stands as it is, by its site; language and it are sent unchanged", async () => {
  const sent: { body: unknown }[] = [];
  vi.stubGlobal("fetch", async (_path: string, init: RequestInit = {}) => {
    if (init.method === "GET") return Response.json({ rows: [] });
    sent.push({ body: JSON.parse(String(init.body)) });
    return Response.json(person);
  });
  render(
    <TestLanguage>
      <QueryClientProvider
        client={new QueryClient({ defaultOptions: { mutations: { networkMode: "always" } } })}
      >
        <PersonForm
          person={person}
          administered={{ sites: [{ id: here, name: "Mill" }], isAll: false }}
          onSaved={() => undefined}
          onLeave={() => undefined}
        />
      </QueryClientProvider>
    </TestLanguage>,
  );
  const user = userEvent.setup();
  const roles = within(screen.getByRole("group", { name: "Roles" }));
  expect(roles.getByText(/officer, Quarry$/i)).toBeVisible();
  expect(roles.getAllByRole("button", { name: /^Take away/ })).toHaveLength(1);
  expect(roles.queryByRole("option", { name: "All sites" })).toBeNull();
  await user.type(screen.getByLabelText("Name"), " Vega");
  await user.click(screen.getByRole("button", { name: /^Save/ }));
  await waitFor(() => expect(sent).toHaveLength(1));
  expect(sent[0]?.body).toMatchObject({
    name: "Inés Roldán Vega",
    language: "es",
    grants: [
      { role: "supervisor", siteId: here },
      { role: "officer", siteId: elsewhere },
    ],
  });
});
