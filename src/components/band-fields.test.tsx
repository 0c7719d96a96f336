// @vitest-environment jsdom
import { render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { expect, test, vi } from "vitest";
import { z } from "zod";
import type { Locale } from "../../shared/i18n/index";
import { Attenuation } from "../../shared/schemas/evaluation";
import { TestLanguage } from "../lib/test-i18n";
import { BandFields } from "./band-fields";
import { Form, SubmitButton, useSchemaForm } from "./form";

const Input = z.object({ bands: Attenuation.nullable() });

function BandForm({ onSave }: { onSave: (value: unknown) => void }) {
  const form = useSchemaForm(Input, { defaultValues: { bands: null } });
  return (
    <Form aria-label="Bands" onSubmit={form.handleSubmit((value) => onSave(value.bands))}>
      <BandFields
        form={form}
        name="bands"
        label="By octave band"
        rows={[
          { key: "meanDb", label: "Mean" },
          { key: "sdDb", label: "Deviation" },
        ]}
        thirds="centre"
      />
      <SubmitButton>Save</SubmitButton>
    </Form>
  );
}

function show(locale: Locale = "en") {
  const onSave = vi.fn();
  render(
    <TestLanguage locale={locale}>
      <BandForm onSave={onSave} />
    </TestLanguage>,
  );
  return onSave;
}

// By label, for sixteen fields make a search by role slow.
const cell = (name: string) => screen.getByLabelText(name);

async function paste(name: string, text: string) {
  await userEvent.click(cell(name));
  await userEvent.paste(text);
}
const save = () => userEvent.click(screen.getByRole("button", { name: "Save" }));

test("all empty means not stated", async () => {
  const onSave = show();
  await save();
  expect(onSave).toHaveBeenCalledWith(null);
});

test("eight values pasted into any cell fill the row, seven the row from 125 Hz on", async () => {
  const onSave = show();
  await paste("Mean, 500 Hz", "12\t10\t14\t23\t30\t32\t36\t35");
  await paste("Deviation, 63 Hz", "2.6 2.4 2.5 2.6 2.8 3 3.4");
  expect(cell("Deviation, 125 Hz")).toHaveValue("2.6");
  await userEvent.type(cell("Deviation, 63 Hz"), "3");
  await save();
  expect(onSave).toHaveBeenCalledWith({
    meanDb: [12, 10, 14, 23, 30, 32, 36, 35],
    sdDb: [3, 2.6, 2.4, 2.5, 2.6, 2.8, 3, 3.4],
  });
});

test("missing bands are named together; 63 Hz may stay empty", async () => {
  const onSave = show();
  await paste("Mean, 63 Hz", "10;14;23;30;32;36;35");
  await paste("Deviation, 125 Hz", "3 3 3 3 3");
  await save();
  expect(screen.getByText("Deviation: 4000, 8000 Hz missing.")).toBeVisible();
  expect(cell("Deviation, 8000 Hz")).toBeInvalid();
  expect(cell("Deviation, 63 Hz")).toBeValid();
  expect(onSave).not.toHaveBeenCalled();
});

test("what can't be read stays as typed and is named", async () => {
  const onSave = show("de");
  await paste("Mean, 63 Hz", "12,5 10 14 23 30 32 36 35");
  await paste("Deviation, 63 Hz", "3 3 3 3 3 3 3 drei");
  expect(cell("Mean, 63 Hz")).toHaveValue("12,5");
  await save();
  expect(screen.getByText("8000 Hz: This is not a number.")).toBeVisible();
  expect(cell("Deviation, 8000 Hz")).toHaveValue("drei");
  expect(onSave).not.toHaveBeenCalled();
});

test("an empty cell keeps its place, and what was left out or refused is said", async () => {
  show();
  await paste("Mean, 500 Hz", "\t10\t14\t\t30\t32\t36\t");
  expect(cell("Mean, 63 Hz")).toHaveValue("");
  expect(cell("Mean, 125 Hz")).toHaveValue("10");
  expect(cell("Mean, 500 Hz")).toHaveValue("");
  expect(cell("Mean, 4000 Hz")).toHaveValue("36");
  expect(cell("Mean, 8000 Hz")).toHaveValue("");
  await paste("Mean, 63 Hz", "3150\t4000\t6300\t8000\n31\t32\t33\t34");
  expect(cell("Mean, 4000 Hz")).toHaveValue("32");
  expect(screen.getByRole("status")).toHaveTextContent(/left out: 3150, 6300 Hz\.$/);
  await paste("Mean, 63 Hz", "1 2 3 4 5 6 7 8 9");
  expect(
    screen.getByText(/^Nothing was taken: 9 cells were pasted, and 8 bands are left/),
  ).toBeVisible();
  expect(screen.getByRole("status")).toBeEmptyDOMElement();
  expect(cell("Mean, 4000 Hz")).toHaveValue("32");
  await userEvent.type(cell("Mean, 63 Hz"), "9");
  expect(screen.queryByText(/^Nothing was taken/)).toBeNull();
});
