// @vitest-environment jsdom
import { render, screen, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { MemoryRouter } from "react-router-dom";
import { expect, test, vi } from "vitest";
import { ChangePreview } from "../../shared/schemas/site";
import { TestLanguage } from "../lib/test-i18n";
import { ChangeReview } from "./change-preview";

const ada = "0190a8f4-0000-7000-8000-000000000001";
const bo = "0190a8f4-0000-7000-8000-000000000002";
const atEar = { line: "at-the-ear", before: "under", after: "cant-tell-yet" };
const on = (firstDate: string, lastDate: string, days: number) => ({ firstDate, lastDate, days });

function show(reply: object, onSave = vi.fn()) {
  render(
    <MemoryRouter>
      <TestLanguage>
        <ChangeReview
          preview={ChangePreview.parse(reply)}
          what="Grinding: 99.5 dB(A) from 1 March 2026 on."
          workerPath={(id, date) => `/workers/${id}/days/${date}`}
          onSave={onSave}
          onBack={vi.fn()}
          isSaving={false}
          error={null}
        />
      </TestLanguage>
    </MemoryRouter>,
  );
  return onSave;
}

test("says how many days become what, and gives each worker one row for the same change", async () => {
  const onSave = show({
    days: 40,
    workers: 2,
    changedDays: 3,
    overDays: 0,
    cantTellDays: 2,
    tally: [
      { line: "at-the-ear", after: "cant-tell-yet", days: 2 },
      { line: "protector", after: "too-much", days: 1 },
    ],
    people: 3,
    tooMany: 0,
    changesCount: 2,
    changes: [
      { workerId: ada, workerName: "A. Holm", ...atEar, ...on("2026-03-02", "2026-03-04", 2) },
      {
        workerId: bo,
        workerName: "B. Quist",
        line: "protector",
        before: "good",
        after: "too-much",
        ...on("2026-03-03", "2026-03-03", 1),
      },
    ],
  });
  expect(screen.getByRole("heading", { name: "2 days become Can’t tell yet" })).toHaveFocus();
  expect(
    screen.getByText(/ 40 days of 2 workers rest on this .* 3 people will be told by mail\./),
  ).toBeVisible();
  expect(screen.queryByText(/change verdict/)).toBeNull();
  expect(screen.getByText("1 day becomes Too much")).toBeVisible();
  const [, first, second] = screen.getAllByRole("row");
  expect(within(first!).getByRole("link", { name: "A. Holm" })).toHaveAttribute(
    "href",
    `/workers/${ada}/days/2026-03-04`,
  );
  expect(first).toHaveTextContent("2 Mar 2026 to 4 Mar 2026");
  expect(second).toHaveTextContent("B. Quist");
  await userEvent.click(screen.getByRole("button", { name: "Save and compute anew" }));
  expect(onSave).toHaveBeenCalledOnce();
});

test("who comes over the limit is said first, and the lines’ sum is explained", () => {
  show({
    days: 5660,
    workers: 21,
    changedDays: 4991,
    overDays: 40,
    cantTellDays: 87,
    tally: [
      { line: "at-the-ear", after: "over", days: 40 },
      { line: "at-the-ear", after: "cant-tell-yet", days: 87 },
      { line: "protector", after: "too-little", days: 1359 },
      { line: "protector", after: "just-enough", days: 3592 },
    ],
    people: 3,
    tooMany: 0,
    changesCount: 700,
    changes: [
      { workerId: ada, workerName: "A. Holm", ...atEar, ...on("2026-03-04", "2026-03-04", 1) },
    ],
  });
  expect(
    screen.getByRole("heading", { name: "40 days become Over, 87 days become Can’t tell yet" }),
  ).toHaveFocus();
  // 40 + 87 + 1359 + 3592 = 5078, and not 4991.
  expect(screen.getByText(/more than one line is counted in each/)).toBeVisible();
  expect(screen.getByText("3 592 days become Just enough")).toBeVisible();
  expect(screen.getByText(/1 of 700 such changes are listed/)).toBeVisible();
});

test("where days were not looked at, the counts are lower bounds", () => {
  show({
    days: 5120,
    workers: 30,
    changedDays: 900,
    overDays: 0,
    cantTellDays: 1,
    tally: [{ line: "at-the-ear", after: "cant-tell-yet", days: 1 }],
    people: 1,
    tooMany: 120,
    changesCount: 1,
    changes: [
      { workerId: ada, workerName: "A. Holm", ...atEar, ...on("2026-03-04", "2026-03-04", 1) },
    ],
  });
  expect(
    screen.getByRole("heading", { name: "At least 1 day becomes Can’t tell yet" }),
  ).toHaveFocus();
  expect(screen.getByText("at least 1 day becomes Can’t tell yet")).toBeVisible();
  expect(screen.getByText(/120 earlier days were not looked at here/)).toBeVisible();
  expect(screen.getByText(/1 person will be told by mail/)).toBeVisible();
});

test("nobody changes verdict: the change can still be saved", () => {
  show({
    days: 12,
    workers: 3,
    changedDays: 0,
    overDays: 0,
    cantTellDays: 0,
    tally: [],
    people: 0,
    tooMany: 0,
    changesCount: 0,
    changes: [],
  });
  expect(screen.getByRole("heading", { name: "Nobody changes verdict" })).toBeVisible();
  expect(screen.getByText(/Nobody is told by mail/)).toBeVisible();
  expect(screen.queryByRole("table")).toBeNull();
  expect(screen.getByRole("button", { name: "Save and compute anew" })).toBeVisible();
});
