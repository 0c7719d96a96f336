// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { expect, test, vi } from "vitest";
import { useRevisedSave } from "./revised-save";
import { isSameValue } from "./same-value";

interface Body {
  stretches: object[];
  reason: string | null;
}
interface View {
  stretches: object[];
  revision: number;
}
const schema = { parse: (value: unknown) => value as View };
const mine: Body = { stretches: [{ kind: "task", fromS: 0, toS: 60 }], reason: "drawn" };

function Saver({ onSaved }: { onSaved: (view: View) => void }) {
  const { save, conflict, error } = useRevisedSave<Body, View>({
    path: () => "/histories/1/stretches",
    schema,
    toBody: ({ stretches }) => ({ stretches }),
    onSaved,
  });
  // As a form whose button has not heard yet that something is being sent.
  return (
    <>
      <button
        type="button"
        onClick={() => {
          save(mine, 1);
          save(mine, 1);
        }}
      >
        Save
      </button>
      {conflict && <p>conflict</p>}
      {error != null && <p>failed</p>}
    </>
  );
}

function show() {
  const onSaved = vi.fn();
  render(
    <QueryClientProvider client={new QueryClient()}>
      <Saver onSaved={onSaved} />
    </QueryClientProvider>,
  );
  return onSaved;
}
const stale = (current: View) =>
  new Response(JSON.stringify({ code: "stale", title: "stale", status: 412, current }), {
    status: 412,
    headers: { "content-type": "application/problem+json" },
  });
const press = () => userEvent.click(screen.getByRole("button", { name: "Save" }));

test("a double click sends one change, and the next press another", async () => {
  vi.mocked(fetch).mockImplementation(async () =>
    Response.json({ stretches: mine.stretches, revision: 2 }),
  );
  const onSaved = show();
  await press();
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  expect(fetch).toHaveBeenCalledTimes(1);
  await press();
  await waitFor(() => expect(onSaved).toHaveBeenCalledTimes(2));
  expect(fetch).toHaveBeenCalledTimes(2);
});

test("what was saved in between and says the same counts as saved", async () => {
  const current = { stretches: [{ toS: 60, fromS: 0, kind: "task" }], revision: 2 };
  vi.mocked(fetch).mockImplementation(async () => stale(current));
  const onSaved = show();
  await press();
  await waitFor(() => expect(onSaved).toHaveBeenCalledExactlyOnceWith(current));
  expect(screen.queryByText("conflict")).toBeNull();
  expect(screen.queryByText("failed")).toBeNull();
});

test("what says something else is a conflict", async () => {
  vi.mocked(fetch).mockImplementation(async () => stale({ stretches: [], revision: 2 }));
  const onSaved = show();
  await press();
  expect(await screen.findByText("conflict")).toBeVisible();
  expect(onSaved).not.toHaveBeenCalled();
});

test("values are compared by what they say, not by the order of their keys", () => {
  expect(isSameValue({ a: 1, b: [{ c: null }] }, { b: [{ c: null }], a: 1 })).toBe(true);
  expect(isSameValue([1, 2], [2, 1])).toBe(false);
  expect(isSameValue({ a: 1 }, { a: 1, b: 0 })).toBe(false);
  expect(isSameValue({ a: 1 }, { a: 1, b: undefined })).toBe(true);
  expect(isSameValue({ a: null }, {})).toBe(false);
});
