// @vitest-environment jsdom
import { QueryClient, QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { beforeEach, expect, test, vi } from "vitest";
import { AreaInput, AreaView } from "../../shared/schemas/site";
import { TestLanguage } from "../lib/test-i18n";
import { SelectField, TextField } from "./form";
import { RecordForm } from "./record-form";

// jsdom has the element without its methods.
beforeEach(() => {
  HTMLDialogElement.prototype.showModal = function showModal() {
    this.open = true;
  };
  HTMLDialogElement.prototype.close = function close() {
    this.open = false;
  };
});

const area = AreaView.parse({
  id: "0190a8f4-0000-7000-8000-0000000000aa",
  siteId: "0190a8f4-0000-7000-8000-0000000000bb",
  name: "Fettling shop",
  zone: "single",
  isArchived: false,
  revision: 3,
  can: { change: true },
});
const toBody = ({ siteId, name, zone, isArchived }: typeof area) => ({
  siteId,
  name,
  zone,
  isArchived,
});

function show(record: typeof area | null) {
  const onSaved = vi.fn();
  render(
    <QueryClientProvider client={new QueryClient()}>
      <TestLanguage>
        <RecordForm
          name="Area"
          schema={AreaInput}
          viewSchema={AreaView}
          path="/areas"
          record={record}
          defaultValues={record ? toBody(record) : { siteId: area.siteId, name: "", zone: "none" }}
          toBody={toBody}
          fields={[
            { key: "name", label: "Name", show: ({ name }) => name },
            { key: "zone", label: "Zone", show: ({ zone }) => zone },
          ]}
          conflictTitle="Someone saved this area before you"
          onSaved={onSaved}
          onLeave={vi.fn()}
        >
          {(form) => (
            <>
              <TextField form={form} name="name" label="Name" />
              <SelectField
                form={form}
                name="zone"
                label="Zone"
                choices={["none", "single", "double"].map((value) => ({ value, label: value }))}
              />
            </>
          )}
        </RecordForm>
      </TestLanguage>
    </QueryClientProvider>,
  );
  return onSaved;
}

const problem = (status: number, code: string, extra: object = {}) =>
  new Response(
    JSON.stringify({
      type: "",
      title: code,
      status,
      code,
      params: {},
      issues: [],
      requestId: "r",
      ...extra,
    }),
    { status, headers: { "content-type": "application/problem+json" } },
  );
const calls = () =>
  vi.mocked(fetch).mock.calls.map(([url, init]) => ({
    url,
    headers: new Headers(init?.headers),
    body: JSON.parse(String(init?.body)),
  }));

test("a stale change shows both versions; what is chosen field by field is saved on the newer one", async () => {
  const saved = { ...area, name: "Fettling hall", zone: "double", revision: 4 };
  vi.mocked(fetch)
    .mockResolvedValueOnce(problem(412, "stale", { current: saved }))
    .mockResolvedValueOnce(Response.json({ ...saved, revision: 5 }));
  const onSaved = show(area);
  const name = screen.getByRole("textbox", { name: "Name" });
  await userEvent.clear(name);
  await userEvent.type(name, "Fettling");
  await userEvent.click(screen.getByRole("button", { name: "Save" }));

  expect(
    await screen.findByRole("heading", { name: "Someone saved this area before you" }),
  ).toBeVisible();
  await userEvent.click(screen.getByRole("radio", { name: "double" }));
  await userEvent.click(screen.getByRole("button", { name: "Save as chosen, revision 5" }));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  const [first, second] = calls();
  expect(first?.headers.get("if-match")).toBe("3");
  expect(second?.headers.get("if-match")).toBe("4");
  expect(second?.body).toMatchObject({ name: "Fettling", zone: "double" });
});

test("the same new record sent again after a lost connection goes under the same key", async () => {
  vi.mocked(fetch)
    .mockRejectedValueOnce(new TypeError("no network"))
    .mockResolvedValueOnce(Response.json(area));
  const onSaved = show(null);
  await userEvent.type(screen.getByRole("textbox", { name: "Name" }), "Fettling shop");
  await userEvent.click(screen.getByRole("button", { name: "Save" }));
  expect(await screen.findByRole("alert")).toHaveTextContent("What you typed is kept.");
  await userEvent.click(screen.getByRole("button", { name: "Save" }));
  await waitFor(() => expect(onSaved).toHaveBeenCalledOnce());
  const [first, second] = calls();
  expect(second?.headers.get("idempotency-key")).toBe(first?.headers.get("idempotency-key"));
});
