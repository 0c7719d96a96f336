// @vitest-environment jsdom
import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { expect, test } from "vitest";
import { clientOf } from "../session/test-session";
import { MeasuredLink } from "./measured-link";

test.each([
  ["officer", 1],
  ["auditor", 1],
  ["supervisor", 0],
] as const)(
  "a survey is named to the %s, and a link only to whom its page is open",
  (role, links) => {
    const client = clientOf(role);
    render(
      <QueryClientProvider client={client}>
        <MemoryRouter>
          <MeasuredLink to="/measuring/surveys/1">Spring survey</MeasuredLink>
        </MemoryRouter>
      </QueryClientProvider>,
    );
    expect(screen.getByText("Spring survey")).toBeTruthy();
    expect(screen.queryAllByRole("link")).toHaveLength(links);
  },
);
