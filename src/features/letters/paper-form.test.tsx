// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { afterEach, expect, test, vi } from "vitest";
import { LetterView } from "../../../shared/schemas/letter";
import { TestLanguage } from "../../lib/test-i18n";
import { PaperForm } from "./paper-form";

afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
});

const id = "00000000-0000-4000-8000-000000000001";
const letter = LetterView.parse({
  id,
  siteId: id,
  worker: { id, name: "R. Szabó", employeeNumber: "2841" },
  state: "to-print",
  noticeState: null,
  days: [{ date: "2026-12-01", levelDb: 91.3, isOver: true }],
  dueOn: "2026-12-15",
  isLate: false,
  writtenAt: "2026-12-02T06:00:00.000Z",
  sentAt: null,
  acknowledged: null,
  can: { acknowledge: true },
  language: "en",
  subject: "Results of measurements at your work",
  text: "91.3 dB",
  paper: { from: "Engine works, North yard", signature: "Date and signature" },
  replacesId: null,
  replacedById: null,
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
});

function show(answer: () => Response) {
  const asked = vi.fn(
    (_address: string, _init?: RequestInit) =>
      new Promise<Response>((resolve) => setTimeout(() => resolve(answer()), 300)),
  );
  vi.stubGlobal("fetch", asked);
  const onSaved = vi.fn();
  render(
    <TestLanguage>
      <QueryClientProvider
        client={new QueryClient({ defaultOptions: { mutations: { networkMode: "always" } } })}
      >
        <PaperForm letter={letter} today="2026-12-02" onSaved={onSaved} />
      </QueryClientProvider>
    </TestLanguage>,
  );
  return { asked, onSaved };
}

const reply = (status: number, body: unknown) =>
  new Response(JSON.stringify(body), { status, headers: { "content-type": "application/json" } });

test("a double click records the signed letter once", async () => {
  const { asked, onSaved } = show(() => reply(201, { ...letter, state: "acknowledged" }));
  await userEvent.dblClick(screen.getByRole("button", { name: "Record it" }));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  expect(asked.mock.calls).toHaveLength(1);
  expect(JSON.parse(String(asked.mock.calls[0]?.[1]?.body))).toEqual({ signedOn: "2026-12-02" });
});

test("a date that the server refuses is said at its field", async () => {
  const { onSaved } = show(() =>
    reply(422, {
      code: "invalid",
      issues: [{ path: ["signedOn"], code: "signed-before-written", params: {} }],
    }),
  );
  await userEvent.click(screen.getByRole("button", { name: "Record it" }));
  expect(await screen.findByText("The letter was written later than that.")).toBeTruthy();
  expect(screen.getByRole("textbox", { name: "Signed on" }).getAttribute("aria-invalid")).toBe(
    "true",
  );
  expect(onSaved).not.toHaveBeenCalled();
});
