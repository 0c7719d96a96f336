// @vitest-environment jsdom
import { cleanup, fireEvent, render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { StrictMode } from "react";
import { useFieldArray } from "react-hook-form";
import { afterEach, beforeEach, expect, test } from "vitest";
import { z } from "zod";
import { ComboboxField } from "../components/combobox-field";
import { Form, NumberField, TextAreaField, TextField, useSchemaForm } from "../components/form";
import { connectionEvents } from "./api";
import { forgetTyped, TypedBy, useTypedText } from "./keep-typed";
import { TestLanguage } from "./test-i18n";

beforeEach(() => {
  sessionStorage.clear();
  connectionEvents.tell("ok");
});
afterEach(cleanup);

/** A reload takes the page away without its parts being told. */
function reload() {
  const kept = { ...sessionStorage } as Record<string, string>;
  cleanup();
  for (const [key, value] of Object.entries(kept)) sessionStorage.setItem(key, value);
}

const LevelInput = z.object({
  levelDb: z.number().min(20),
  workerId: z.string(),
  note: z.string(),
  tasks: z.array(z.object({ name: z.string() })),
});

function LevelForm({ note = "", keepAs }: { note?: string; keepAs?: string | null }) {
  const form = useSchemaForm(LevelInput, {
    defaultValues: { note, workerId: "", tasks: [{ name: "Fettling" }] },
    keepAs,
  });
  const rows = useFieldArray({ control: form.control, name: "tasks" });
  return (
    <Form aria-label="Level" onSubmit={form.handleSubmit(() => form.reset())}>
      <NumberField form={form} name="levelDb" label="Level" />
      <TextAreaField form={form} name="note" label="Note" />
      <ComboboxField
        form={form}
        name="workerId"
        label="Worker"
        search={async () => [{ value: "w1", label: "K. Haldorsen" }]}
      />
      {rows.fields.map((row, index) => (
        <TextField key={row.id} form={form} name={`tasks.${index}.name`} label={`Task ${index}`} />
      ))}
      <button type="button" onClick={() => rows.append({ name: "" })}>
        Another
      </button>
      <button type="button" onClick={() => form.reset()}>
        Empty it
      </button>
    </Form>
  );
}

function show(props: Parameters<typeof LevelForm>[0] = {}, userId: string | null = "u1") {
  return render(
    <StrictMode>
      <TestLanguage>
        <TypedBy value={userId}>
          <LevelForm {...props} />
        </TypedBy>
      </TestLanguage>
    </StrictMode>,
  );
}

const shown = (name: string) => screen.getByRole<HTMLInputElement>("textbox", { name }).value;
const type = (name: string, value: string) =>
  fireEvent.change(screen.getByRole("textbox", { name }), { target: { value } });

test("a form is after a reload as it was: texts, rows and what can't be read", async () => {
  show();
  type("Level", "8o");
  type("Note", "beside the press");
  await userEvent.click(screen.getByRole("button", { name: "Another" }));
  type("Task 1", "Grinding");
  reload();
  show();
  expect(shown("Level")).toBe("8o");
  expect(shown("Note")).toBe("beside the press");
  expect(shown("Task 0")).toBe("Fettling");
  expect(shown("Task 1")).toBe("Grinding");
});

test("a choice comes back with its words", async () => {
  show();
  const worker = screen.getByRole("combobox", { name: "Worker" });
  fireEvent.change(worker, { target: { value: "Hal" } });
  fireEvent.click(await screen.findByRole("option", { name: "K. Haldorsen" }));
  reload();
  show();
  expect(screen.getByRole<HTMLInputElement>("combobox", { name: "Worker" }).value).toBe(
    "K. Haldorsen",
  );
});

test("only what was typed comes back: another's change of the other fields stands", () => {
  show({ note: "old" });
  type("Level", "91");
  reload();
  show({ note: "changed by another" });
  expect(shown("Level")).toBe("91");
  expect(shown("Note")).toBe("changed by another");
});

test("nobody else sees it, nor another record's form, nor the form that keeps it elsewhere", () => {
  show({ keepAs: "a" });
  type("Level", "91");
  for (const [props, userId] of [
    [{ keepAs: "a" }, "u2"],
    [{ keepAs: "b" }, "u1"],
    [{ keepAs: null }, "u1"],
    [{ keepAs: "a" }, null],
  ] as const) {
    reload();
    show(props, userId);
    expect(shown("Level")).toBe("");
  }
});

test("a form that is left while all is well is empty the next time; so is one that was reset", async () => {
  const { unmount } = show();
  type("Level", "91");
  unmount();
  show();
  expect(shown("Level")).toBe("");
  type("Level", "92");
  await userEvent.click(screen.getByRole("button", { name: "Empty it" }));
  reload();
  show();
  expect(shown("Level")).toBe("");
});

test("one that is left because nobody is signed in any more comes back", () => {
  const { unmount } = show();
  type("Level", "91");
  connectionEvents.tell("session-expired");
  unmount();
  connectionEvents.tell("ok");
  show();
  expect(shown("Level")).toBe("91");
  forgetTyped();
  reload();
  show();
  expect(shown("Level")).toBe("");
});

function Reason({ record }: { record: string }) {
  const [text, setText] = useTypedText(`cannot ${record}`);
  return (
    <textarea aria-label="Why" value={text} onChange={(event) => setText(event.target.value)} />
  );
}
const showReason = (record: string) => (
  <TypedBy value="u1">
    <Reason record={record} />
  </TypedBy>
);

test("a text is kept by record until it is emptied", async () => {
  const { rerender } = render(showReason("f1"));
  type("Why", "no muffs left");
  rerender(showReason("f2"));
  expect(shown("Why")).toBe("");
  rerender(showReason("f1"));
  expect(shown("Why")).toBe("no muffs left");
  cleanup();
  render(showReason("f1"));
  expect(shown("Why")).toBe("no muffs left");
  await userEvent.clear(screen.getByRole("textbox"));
  expect(sessionStorage.length).toBe(0);
});
