// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import type { ComponentProps } from "react";
import { afterEach, expect, test, vi } from "vitest";
import { TestLanguage } from "../../lib/test-i18n";
import { SignInSlip } from "./sign-in-slip";

afterEach(() => {
  cleanup();
  vi.unstubAllGlobals();
});

const worker = {
  id: "00000000-0000-4000-8000-000000000001",
  name: "R. Szabó",
  employeeNumber: "2841",
  hasSignIn: false,
} as ComponentProps<typeof SignInSlip>["worker"];

test("the focus goes to the code, and back to the button when the slip is put away", async () => {
  const code = { code: "KLMN-PQRS", expiresAt: "2026-12-08T10:00:00.000Z" };
  vi.stubGlobal(
    "fetch",
    vi.fn().mockResolvedValue(
      new Response(JSON.stringify(code), {
        status: 201,
        headers: { "content-type": "application/json" },
      }),
    ),
  );
  render(
    <TestLanguage>
      <QueryClientProvider
        client={new QueryClient({ defaultOptions: { mutations: { networkMode: "always" } } })}
      >
        <SignInSlip
          worker={worker}
          timeZone="Europe/London"
          organizationName="Engine works"
          issuedBy="S. Ferrand"
        />
      </QueryClientProvider>
    </TestLanguage>,
  );
  const user = userEvent.setup();
  await user.click(screen.getByRole("button", { name: "Make a sign-in code" }));
  const shown = await screen.findByText("KLMN-PQRS");
  expect(document.activeElement).toBe(shown);
  await user.click(screen.getByRole("button", { name: "Put it away" }));
  const button = await screen.findByRole("button", { name: "Make a sign-in code" });
  await waitFor(() => expect(document.activeElement).toBe(button));
});
