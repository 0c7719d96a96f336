import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router-dom";
import { expect, test } from "vitest";
import type { CrewSheetRow } from "../../../shared/schemas/crew";
import { stripFrame } from "../../components/day-figures";
import { createQueryClient } from "../../lib/query-client";
import { TestLanguage, testI18n } from "../../lib/test-i18n";
import { sessionQuery } from "../session/session";
import { SheetRow } from "./sheet-row";

const id = (last: number) => `00000000-0000-4000-8000-00000000000${last}`;
const figures: NonNullable<CrewSheetRow["figures"]> = {
  resultId: id(1),
  date: "2026-12-03",
  origin: "computed",
  outsideDb: 97.6,
  outsideBound: "exact",
  atEarDb: 77.9,
  atEarOffDb: null,
  atEarBound: "exact",
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  uncertaintyDb: null,
  whileWornDb: 78,
  whileWornBound: "exact",
  verdictOutside: "over",
  verdictAtEar: "under",
  word: "good",
  decidingTaskName: "Run-up",
  hasProtector: "yes",
  reason: null,
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
  ownTargetDb: null,
  governingCriteria: [],
};

function show(more: Partial<CrewSheetRow>) {
  const client = createQueryClient();
  client.setQueryData(sessionQuery.queryKey, {
    user: { id: id(9), roles: ["supervisor"] },
  } as never);
  const row: CrewSheetRow = {
    worker: {
      id: id(1),
      name: "Ada",
      employeeNumber: "1",
      employer: "own",
      employerName: null,
    },
    isAbsent: false,
    isLoan: false,
    lentBy: null,
    lentTo: null,
    figures,
    order: null,
    ahead: null,
    ...more,
  };
  render(
    <QueryClientProvider client={client}>
      <TestLanguage>
        <MemoryRouter>
          <ul>
            <SheetRow
              row={row}
              part="expected"
              frame={stripFrame(testI18n(), "en", "uk-2005", 1)}
              crewId={id(2)}
              timeZone="Europe/London"
              isFlagged
              onStale={() => {}}
            />
          </ul>
        </MemoryRouter>
      </TestLanguage>
    </QueryClientProvider>,
  );
}

test("over the limit by the wearing time: the word, why, and one order that nobody marks done", () => {
  show({
    figures: { ...figures, atEarDb: 91.3, verdictAtEar: "over" },
    ahead: {
      kind: "not-worn-long-enough",
      facts: { isExpected: true, taskName: "Run-up", offMin: 100, levelDb: 91.3, valueDb: 87 },
    },
  });
  expect(screen.getByText("Not worn long enough")).toBeVisible();
  expect(screen.queryByText("Good")).toBeNull();
  expect(screen.getByText("See that it stays on the whole time in Run-up.")).toBeVisible();
  expect(screen.getByText(/off for .+ in Run-up: 91\.3 at the ear, limit 87\.$/)).toBeVisible();
  expect(screen.queryByRole("button")).toBeNull();
  expect(screen.queryByText(/Nothing for you to do/)).toBeNull();
});

test("an order of an earlier day stands under the word of the day expected and says of which day it is", () => {
  show({
    order: {
      findingId: id(3),
      kind: "protects-too-little",
      state: "in-hand",
      facts: { taskName: "Run-up", protector: "Tern active", wornDb: 93.3 },
      ofDate: "2026-11-27",
      rulesUntil: null,
      cannot: null,
      revision: 1,
      canMarkDone: true,
    },
  });
  expect(screen.getByText("Good")).toBeVisible();
  expect(screen.queryByText("Protects too little")).toBeNull();
  expect(
    screen.getByText("Friday 27 November: Tern active: 93.3 in Run-up while worn."),
  ).toBeVisible();
});
