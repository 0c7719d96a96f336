import { render, screen, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter } from "react-router-dom";
import { expect, test, vi } from "vitest";
import type { GivingPreview } from "../../../shared/schemas/choice";
import { TestLanguage } from "../../lib/test-i18n";
import { countFromTo, GiveReview } from "./give-review";

type Change = GivingPreview["changes"][number];
const day = (verdictAtEar: Change["before"]["verdictAtEar"], word: Change["before"]["word"]) => ({
  verdictAtEar,
  word,
  atEarDb: 80,
});
const change = (workerName: string, before: Change["before"], after: Change["before"]): Change => ({
  workerId: workerName,
  workerName,
  before,
  after,
});
const changes = [
  change("Ada", day("under", "good"), day("over", "too-little")),
  change("Ben", day("over", null), day("under", "good")),
  change("Cem", day("over", null), day("under", "good")),
];
const preview: GivingPreview = {
  changes,
  daysCount: 11,
  withoutDayCount: 1,
  recorded: {
    days: 0,
    workers: 0,
    overDays: 0,
    cantTellDays: 0,
    tally: [],
    changes: [],
    changesCount: 0,
    changedDays: 0,
    people: 0,
    tooMany: 0,
  },
  stock: [
    {
      siteName: "Works",
      modelId: "one",
      modelName: "Plug",
      neededCount: 12,
      assignedCount: 2,
      stockCount: 7,
    },
    {
      siteName: "Works",
      modelId: "two",
      modelName: "Muff",
      neededCount: 12,
      assignedCount: 0,
      stockCount: 30,
    },
    {
      siteName: "Works",
      modelId: "three",
      modelName: "Band",
      neededCount: 12,
      assignedCount: 0,
      stockCount: null,
    },
  ],
};

test("counts who goes from which state to which, per line, the gravest first", () => {
  expect(countFromTo(changes)).toEqual([
    { line: "verdictAtEar", before: "under", after: "over", count: 1 },
    { line: "verdictAtEar", before: "over", after: "under", count: 2 },
    { line: "word", before: "good", after: "too-little", count: 1 },
    { line: "word", before: "none", after: "good", count: 2 },
  ]);
});

test("a stock that does not go round is a caution, not a refusal", async () => {
  const onGive = vi.fn();
  render(
    <TestLanguage>
      <MemoryRouter>
        <GiveReview
          preview={preview}
          protector="Plug + Muff"
          count={12}
          fromDate="2026-12-02"
          isSaving={false}
          error={null}
          onGive={onGive}
          onBack={() => undefined}
        />
      </MemoryRouter>
    </TestLanguage>,
  );
  expect(
    screen.getByRole("heading", { name: "The usual days of 3 people change verdict or word" }),
  ).toHaveFocus();
  expect(screen.getByText("12 of Plug to hand out at Works, 7 in stock.")).toBeVisible();
  expect(screen.getByText(/2 of them have it assigned, but not issued here\./)).toBeVisible();
  expect(screen.queryByText(/of Muff to hand out|of Band to hand out/)).toBeNull();
  expect(screen.getByText("2 people from “none” to “good”")).toBeVisible();
  // Each line is named once, however many ways its people go.
  const [lines] = screen.getAllByRole("list");
  expect(within(lines!).getAllByText(/^(At the ear|Protector while worn)$/)).toHaveLength(2);
  await userEvent.click(screen.getByRole("button", { name: "Give Plug + Muff" }));
  expect(onGive).toHaveBeenCalledOnce();
});
