// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter, Route, Routes } from "react-router-dom";
import { afterEach, expect, test, vi } from "vitest";
import { OpenedLetter } from "../../shared/schemas/letter";
import { TestLanguage } from "../lib/test-i18n";
import { paths } from "../paths";
import { Component as AcknowledgePage } from "./acknowledge-page";

afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
});

const letter = (overrides: Partial<OpenedLetter> = {}) =>
  OpenedLetter.parse({
    state: "open",
    language: "en",
    from: "Engine works, North yard",
    subject: "Results of measurements at your work",
    text: "R. Szabó, 2841\n\n91.3 dB over eight hours.",
    acknowledgedOn: null,
    ...overrides,
  });
const acknowledged = letter({
  state: "acknowledged",
  subject: null,
  text: null,
  acknowledgedOn: "2026-12-02",
});

const reply = (status: number, body: unknown) =>
  new Response(JSON.stringify(body), { status, headers: { "content-type": "application/json" } });

function show(answer: (method: string) => Response) {
  const asked = vi.fn((_address: string, init?: RequestInit) =>
    Promise.resolve(answer(init?.method ?? "GET")),
  );
  vi.stubGlobal("fetch", asked);
  const client = new QueryClient({ defaultOptions: { mutations: { networkMode: "always" } } });
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter initialEntries={[paths.acknowledge("a-secret-of-a-letter")]}>
          <Routes>
            <Route path={paths.acknowledge(":secret")} element={<AcknowledgePage />} />
          </Routes>
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
  const methods = () => asked.mock.calls.map(([, init]) => init?.method ?? "GET");
  return { asked, methods };
}

test("opened, the letter stands there and nothing is said for the reader; the button says it once", async () => {
  const { asked, methods } = show((method) =>
    reply(200, method === "GET" ? letter() : acknowledged),
  );
  await screen.findByText(/91\.3 dB/);
  expect(methods()).toEqual(["GET"]);
  expect(String(asked.mock.calls[0]?.[0])).toBe("/api/acknowledgements/a-secret-of-a-letter");
  await userEvent.dblClick(screen.getByRole("button", { name: "I have read it" }));
  const said = await screen.findByText(/You said on 2 December 2026/);
  expect(methods()).toEqual(["GET", "POST"]);
  expect(screen.queryByRole("button", { name: "I have read it" })).toBeNull();
  await waitFor(() => expect(document.activeElement).toBe(said));
});

test("used meanwhile in another window: it shows how it stands now", async () => {
  let isUsed = false;
  show((method) => {
    if (method === "POST") isUsed = true;
    return method === "POST"
      ? reply(409, { code: "link-used", params: {}, issues: [] })
      : reply(200, isUsed ? acknowledged : letter());
  });
  await userEvent.click(await screen.findByRole("button", { name: "I have read it" }));
  await screen.findByText(/You said on 2 December 2026/);
});

test("a link that has run out, one that leads nowhere, and somebody else's, in words", async () => {
  show(() => reply(200, letter({ state: "expired", subject: null, text: null })));
  await screen.findByText(/This link has run out/);
  cleanup();
  show(() => reply(404, { code: "not-found", params: {}, issues: [] }));
  await screen.findByText(/This link leads to no letter/);
  cleanup();
  show(() => reply(403, { code: "link-not-yours", params: {}, issues: [] }));
  await screen.findByText(/This letter is to somebody else/);
  expect(screen.queryByText("Not shown")).toBeNull();
  expect(screen.queryByRole("button", { name: "Try again" })).toBeNull();
});
