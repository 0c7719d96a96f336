// @vitest-environment jsdom
import { cleanup, render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { afterEach, expect, test, vi } from "vitest";
import { z } from "zod";
import type { Locale } from "../../shared/i18n/index";
import { ApiError } from "../lib/api";
import { TestLanguage, testI18n } from "../lib/test-i18n";
import { ComboboxField } from "./combobox-field";
import {
  CheckField,
  DateField,
  DurationField,
  Form,
  NumberField,
  RadioGroup,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "./form";

afterEach(cleanup);

const ReadingInput = z.object({
  levelDb: z.number().min(20).max(160),
  durationMin: z.number().max(1440),
  name: z.string().trim().min(1).max(10),
  date: z.iso.date(),
  workerId: z.string(),
  kind: z.enum(["slow", "fast"]),
  use: z.enum(["everywhere", "task"]),
  isZone: z.boolean(),
});
type ReadingInput = z.infer<typeof ReadingInput>;

const workers = [
  { value: "w1", label: "K. Haldorsen", note: "3982" },
  { value: "w2", label: "H. Lindqvist", note: "3367" },
];

function ReadingForm({
  onSave,
  serverError,
}: {
  onSave: (reading: ReadingInput) => void;
  serverError?: ApiError;
}) {
  const form = useSchemaForm(ReadingInput, {
    defaultValues: { name: "", date: "2026-12-01", kind: "slow", use: "everywhere", isZone: false },
  });
  const refuse = showIssuesOn(form, testI18n());
  return (
    <Form
      aria-label="Reading"
      onSubmit={form.handleSubmit((reading) =>
        serverError ? refuse(serverError) : onSave(reading),
      )}
    >
      <NumberField form={form} name="levelDb" label="Level" unit="dB(A)" note="20 to 160" />
      <DurationField form={form} name="durationMin" label="Duration" unit="min" />
      <TextField form={form} name="name" label="Name" />
      <DateField form={form} name="date" label="Day" />
      <ComboboxField
        form={form}
        name="workerId"
        label="Worker"
        search={async (text) => workers.filter((worker) => worker.label.includes(text))}
      />
      <SelectField
        form={form}
        name="kind"
        label="Response"
        choices={[
          { value: "slow", label: "Slow" },
          { value: "fast", label: "Fast" },
        ]}
      />
      <RadioGroup
        form={form}
        name="use"
        label="Use"
        choices={[
          { value: "everywhere", label: "Everywhere" },
          { value: "task", label: "In one task" },
        ]}
      />
      <CheckField form={form} name="isZone" label="Zone" text="A hearing-protection zone" />
      <SubmitButton>Save</SubmitButton>
    </Form>
  );
}

function show(locale: Locale = "en", serverError?: ApiError) {
  const onSave = vi.fn<(reading: ReadingInput) => void>();
  render(
    <TestLanguage locale={locale}>
      <ReadingForm onSave={onSave} serverError={serverError} />
    </TestLanguage>,
  );
  return { onSave, user: userEvent.setup() };
}

test("what is typed into a choice and is none stays, is refused, and never becomes none", async () => {
  const { onSave, user } = show();
  await user.type(screen.getByRole("textbox", { name: "Level" }), "90");
  await user.type(screen.getByRole("textbox", { name: "Duration" }), "7:30");
  await user.type(screen.getByRole("textbox", { name: "Name" }), "A");
  await user.type(screen.getByRole("combobox", { name: "Worker" }), "Nobody Here");
  await user.tab();
  expect(screen.getByRole("combobox", { name: "Worker" })).toHaveValue("Nobody Here");
  expect(screen.getByText("Choose one of these.")).toBeVisible();
  await user.click(screen.getByRole("button", { name: "Save" }));
  expect(onSave).not.toHaveBeenCalled();
  await user.clear(screen.getByRole("combobox", { name: "Worker" }));
  await user.type(screen.getByRole("combobox", { name: "Worker" }), "Lind");
  await user.click(await screen.findByRole("option", { name: /Lind/ }));
  await user.click(screen.getByRole("button", { name: "Save" }));
  expect(onSave).toHaveBeenCalledOnce();
});

test("a form is filled by label alone, and saves what was meant", async () => {
  const { onSave, user } = show("de");
  await user.type(screen.getByRole("textbox", { name: "Level" }), "102,6");
  await user.type(screen.getByRole("textbox", { name: "Duration" }), "7:30");
  await user.type(screen.getByRole("textbox", { name: "Name" }), "Ría 李");
  await user.clear(screen.getByRole("textbox", { name: "Day" }));
  await user.type(screen.getByRole("textbox", { name: "Day" }), "30.11.2026");
  await user.type(screen.getByRole("combobox", { name: "Worker" }), "Lind");
  await screen.findByRole("option", { name: /H\. Lindqvist/ });
  await user.keyboard("{Enter}");
  await user.selectOptions(screen.getByRole("combobox", { name: "Response" }), "Fast");
  await user.click(screen.getByRole("radio", { name: "In one task" }));
  await user.click(screen.getByRole("checkbox", { name: "A hearing-protection zone" }));
  await user.click(screen.getByRole("button", { name: "Save" }));
  await waitFor(() => expect(onSave).toHaveBeenCalledTimes(1));
  expect(onSave.mock.calls[0]?.[0]).toEqual({
    levelDb: 102.6,
    durationMin: 450,
    name: "Ría 李",
    date: "2026-11-30",
    workerId: "w2",
    kind: "fast",
    use: "task",
    isZone: true,
  });
});

const Dates = z.object({ from: z.iso.date(), to: z.iso.date() });
function DatesForm() {
  const form = useSchemaForm(Dates, { defaultValues: { from: "", to: "" } });
  return (
    <Form aria-label="Dates" onSubmit={form.handleSubmit(() => undefined)}>
      <DateField form={form} name="from" label="From" />
      <DateField form={form} name="to" label="To" />
      <SubmitButton>Save</SubmitButton>
    </Form>
  );
}

test("a date that was not written is needed, and one that is none is no date", async () => {
  const user = userEvent.setup();
  render(
    <TestLanguage>
      <DatesForm />
    </TestLanguage>,
  );
  await user.type(screen.getByRole("textbox", { name: "To" }), "soon");
  await user.click(screen.getByRole("button", { name: "Save" }));
  await screen.findByText("This is needed.");
  expect(screen.getAllByText("This is needed.")).toHaveLength(1);
  expect(screen.getAllByText("This is not a date.")).toHaveLength(1);
});

test("unit, note and error belong to their field; the first wrong field has the focus", async () => {
  const { onSave, user } = show();
  const level = screen.getByRole("textbox", { name: "Level" });
  await user.type(level, "12");
  await user.click(screen.getByRole("button", { name: "Save" }));
  await screen.findByText("At least 20.");
  const described = (level.getAttribute("aria-describedby") ?? "")
    .split(" ")
    .map((id) => document.getElementById(id)?.textContent);
  expect(described).toEqual(["dB(A)", "20 to 160", "At least 20."]);
  expect(level.getAttribute("aria-invalid")).toBe("true");
  expect(document.activeElement).toBe(level);
  expect(onSave).not.toHaveBeenCalled();
});

test("a comma where a point is written is asked about, and stays as typed", async () => {
  const { user } = show("en");
  const level = screen.getByRole<HTMLInputElement>("textbox", { name: "Level" });
  await user.type(level, "102,6");
  await user.tab();
  await screen.findByText(/read in two ways/);
  expect(level.value).toBe("102,6");
});

test("what the server refuses stands at its field", async () => {
  const refused = new ApiError(
    422,
    "invalid",
    {},
    [{ path: "name", code: "name-taken", params: {} }],
    null,
    "invalid",
  );
  const { user } = show("en", refused);
  await user.type(screen.getByRole("textbox", { name: "Level" }), "90");
  await user.type(screen.getByRole("textbox", { name: "Duration" }), "30");
  await user.type(screen.getByRole("textbox", { name: "Name" }), "Run-up");
  await user.type(screen.getByRole("combobox", { name: "Worker" }), "Hal");
  await user.click(await screen.findByRole("option", { name: /K\. Haldorsen/ }));
  await user.click(screen.getByRole("button", { name: "Save" }));
  await screen.findByText("This name is taken.");
  expect(screen.getByRole("textbox", { name: "Name" }).getAttribute("aria-invalid")).toBe("true");
});

test("a busy button refuses a second press and keeps the focus", async () => {
  const onSubmit = vi.fn((event: React.FormEvent) => event.preventDefault());
  render(
    <TestLanguage>
      <Form onSubmit={onSubmit} aria-label="Reading">
        <SubmitButton isBusy>Save</SubmitButton>
      </Form>
    </TestLanguage>,
  );
  const button = screen.getByRole("button", { name: "Save" });
  await userEvent.click(button);
  expect(onSubmit).not.toHaveBeenCalled();
  expect(document.activeElement).toBe(button);
});

function Late() {
  const form = useSchemaForm(z.object({ levelDb: z.number().nullable() }), {
    mode: "onSubmit",
    defaultValues: { levelDb: null },
  });
  return <NumberField form={form} name="levelDb" label="Level" />;
}

test("what can't be read is said on leaving the field, also in a form that says all else when it is sent", async () => {
  const user = userEvent.setup();
  render(
    <TestLanguage>
      <Late />
    </TestLanguage>,
  );
  const field = screen.getByLabelText("Level");
  await user.type(field, "86,7");
  expect(field).not.toHaveAttribute("aria-invalid");
  await user.tab();
  expect(field).toHaveValue("86,7");
  expect(field).toHaveAccessibleDescription(/can be read in two ways/);
  await user.clear(field);
  await user.type(field, "86.7");
  expect(field).not.toHaveAttribute("aria-invalid");
});
