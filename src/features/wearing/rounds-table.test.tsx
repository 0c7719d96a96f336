import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { expect, test } from "vitest";
import type { WearingRoundView } from "../../../shared/schemas/wearing";
import { createQueryClient } from "../../lib/query-client";
import { TestLanguage } from "../../lib/test-i18n";
import { RoundsTable } from "./rounds-table";

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const round = (last: number, source: WearingRoundView["source"]): WearingRoundView => ({
  id: id(last),
  revision: 1,
  siteId: id(7),
  siteName: "Ostmere works",
  seenOn: "2026-12-01",
  source,
  note: "",
  authorName: null,
  struckReason: null,
  wornCount: 0,
  seenCount: 4,
  looks: [
    {
      workerId: id(8),
      workerName: "D. Tavernor",
      taskId: id(9),
      taskName: "Chipping",
      wornCount: 0,
      seenCount: 4,
      isReplaced: false,
    },
  ],
  can: { strike: false },
});

test("an own report stands in the worker's words, and as no look of anybody", () => {
  render(
    <TestLanguage>
      <QueryClientProvider client={createQueryClient()}>
        <MemoryRouter>
          <RoundsTable
            showsSite={false}
            rows={[round(1, "own-report"), round(2, "round")]}
            state="ready"
            empty={null}
          />
        </MemoryRouter>
      </QueryClientProvider>
    </TestLanguage>,
  );
  expect(screen.getByText("Not at all")).toBeVisible();
  expect(screen.getByText(/^own report, nobody looked/)).toBeVisible();
  expect(screen.getAllByText("0 of 4 looks")).toHaveLength(1);
  expect(screen.getByRole("button", { name: "Own report of 1 Dec 2026" })).toBeVisible();
});
