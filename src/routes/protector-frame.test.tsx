// @vitest-environment jsdom
import { QueryClientProvider } from "@tanstack/react-query";
import { cleanup, render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { expect, test } from "vitest";
import type { SessionRole } from "../../shared/schemas/session";
import { clientOf } from "../features/session/test-session";
import { TestLanguage } from "../lib/test-i18n";
import { ProtectorWays } from "./protector-frame";
import { registerRoutes } from "./register-routes";

function waysOf(role: SessionRole): string[] {
  const client = clientOf(role);
  render(
    <TestLanguage>
      <QueryClientProvider client={client}>
        <MemoryRouter>
          <ProtectorWays />
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
  const found = screen.getAllByRole("link").map((link) => link.getAttribute("href") ?? "");
  cleanup();
  return found;
}

test.each([
  ["officer", 7],
  ["auditor", 6],
  ["supervisor", 2],
] as const)("the ways of the %s lead to pages that open to them", (role, count) => {
  const ways = waysOf(role);
  expect(ways).toHaveLength(count);
  for (const way of ways) {
    const route = registerRoutes.find(({ path }) => path === way);
    expect(route, way).toBeDefined();
    expect(route?.roles ?? ["officer", "auditor", "supervisor"], way).toContain(role);
  }
});
