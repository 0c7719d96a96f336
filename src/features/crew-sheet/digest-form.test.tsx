import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { expect, test, vi } from "vitest";
import { DigestView } from "../../../shared/schemas/digest";
import { createQueryClient } from "../../lib/query-client";
import { TestLanguage } from "../../lib/test-i18n";
import { DigestForm } from "./digest-form";

const put = vi.fn<(body: unknown, ifMatch: string | null) => Response>();
const answer = (digest: DigestView) => Response.json(DigestView.parse(digest));

function show(digest: DigestView) {
  put.mockReset();
  vi.mocked(fetch).mockImplementation(async (_, init) =>
    init?.method === "PUT"
      ? put(JSON.parse(String(init.body)), new Headers(init.headers).get("If-Match"))
      : answer(digest),
  );
  render(
    <TestLanguage>
      <QueryClientProvider client={createQueryClient()}>
        <DigestForm />
      </QueryClientProvider>
    </TestLanguage>,
  );
}

test("an hour is chosen and stopped again, each by the revision that was seen", async () => {
  const user = userEvent.setup();
  show({ hour: null, revision: 0, email: "b@ostmere.example", bounced: null });
  await user.selectOptions(await screen.findByLabelText("Comes at"), "05:00");
  put.mockReturnValueOnce(
    answer({ hour: 5, revision: 1, email: "b@ostmere.example", bounced: null }),
  );
  await user.click(screen.getByRole("button", { name: "Save" }));
  expect(await screen.findByText("The mail comes at 05:00.")).toBeVisible();
  expect(screen.getByLabelText("Comes at")).toHaveValue("5");
  await user.selectOptions(screen.getByLabelText("Comes at"), "not at all");
  put.mockReturnValueOnce(
    answer({ hour: null, revision: 2, email: "b@ostmere.example", bounced: null }),
  );
  await user.click(screen.getByRole("button", { name: "Save" }));
  expect(await screen.findByText("No mail comes.")).toBeVisible();
  expect(put.mock.calls).toEqual([
    [{ hour: 5 }, "0"],
    [{ hour: null }, "1"],
  ]);
});

test("without an address there is nothing to choose", async () => {
  show({ hour: null, revision: 0, email: null, bounced: null });
  expect(await screen.findByText(/^You have no mail address here/)).toBeVisible();
  expect(screen.queryByRole("form")).toBeNull();
});

test("that the latest mail came back is said where it was chosen", async () => {
  show({ hour: 5, revision: 1, email: "b@ostmere.example", bounced: "5.1.1" });
  expect(await screen.findByText(/came back undeliverable \(5\.1\.1\)/)).toBeVisible();
});
