// @vitest-environment jsdom
import { render, screen } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { describe, expect, test, vi } from "vitest";
import { z } from "zod";
import type { Locale } from "../../shared/i18n/index";
import { LevelDb } from "../../shared/schemas/common";
import { OctaveBands } from "../../shared/schemas/evaluation";
import { TestLanguage } from "../lib/test-i18n";
import { Form, NumberField, SubmitButton, useSchemaForm } from "./form";
import { checkSpectrum, SpectrumField, useSpectrumCheck } from "./spectrum-field";

const Input = z.object({ levelDb: LevelDb, bands: OctaveBands.nullable() });

function LevelForm({ onSave }: { onSave: (value: unknown) => void }) {
  const form = useSchemaForm(Input, {
    defaultValues: { levelDb: null as unknown as number, bands: null },
  });
  const [levelDb, bands] = form.watch(["levelDb", "bands"]);
  const check = useSpectrumCheck(bands, levelDb);
  const submit = form.handleSubmit((value) => {
    if (check.isSettled()) onSave(value);
  });
  return (
    <Form aria-label="Noise of a task" onSubmit={submit}>
      <NumberField form={form} name="levelDb" label="Level" />
      <SpectrumField form={form} name="bands" label="Octave bands" check={check} />
      <SubmitButton>Save</SubmitButton>
    </Form>
  );
}

function show(locale: Locale = "en") {
  const onSave = vi.fn();
  render(
    <TestLanguage locale={locale}>
      <LevelForm onSave={onSave} />
    </TestLanguage>,
  );
  return onSave;
}

// By text and label, for nine fields make a search by role slow.
const save = () => userEvent.click(screen.getByText("Save"));
const paste = async (text: string) => {
  await userEvent.click(screen.getByLabelText("Octave band level, 500 Hz"));
  await userEvent.paste(text);
};
const type = (level: string) => userEvent.type(screen.getByLabelText("Level"), level);

/*
 * Eight bands of 80 dB. With the A-weightings of IEC 61672-1, Table 3, by hand: 10^(A/10) = 0.0024 + 0.0245 + 0.1380 +
 * 0.4786 + 1 + 1.3183 + 1.2589 + 0.7762 = 4.9970, so 80 + 6.99 dB(A). C likewise: 0.8318 + 0.9550 + 1 + 1 + 1 + 0.9550 +
 * 0.8318 + 0.5012 = 7.0747, 80 + 8.50 dB(C); LC − LA = 1.51.
 */
const flat = Array.from({ length: 8 }, () => "80").join("\t");

test("sum and difference of eight equal bands, against a calculation by hand", () => {
  const found = checkSpectrum([80, 80, 80, 80, 80, 80, 80, 80], 87.5)!;
  expect(found.sumDb).toBeCloseTo(86.99, 2);
  expect(found.lcMinusLaDb).toBeCloseTo(1.51, 2);
  expect(found.offDb).toBeCloseTo(-0.51, 2);
});

describe("a spectrum is held to its level", () => {
  test("within a decibel it is saved as it is", async () => {
    const onSave = show();
    await type("87.9");
    await paste(flat);
    expect(screen.getByText(/A-weighted sum 87.0 dB\(A\), LC − LA 1.5 dB/)).toBeVisible();
    expect(screen.queryByText(/although the bands/)).toBeNull();
    await save();
    expect(onSave).toHaveBeenCalledWith({ levelDb: 87.9, bands: Array(8).fill(80) });
  });

  test("further apart it is asked about, and the answer holds for these figures only", async () => {
    const onSave = show();
    await type("88.1");
    await paste(flat);
    const question = screen.getByLabelText(/bands lie −1.1 dB away/);
    await save();
    expect(onSave).not.toHaveBeenCalled();
    expect(question).toHaveFocus();
    await userEvent.click(question);
    await type("1");
    expect(question).not.toBeChecked();
    await userEvent.click(question);
    await save();
    expect(onSave).toHaveBeenCalledWith({ levelDb: 88.11, bands: Array(8).fill(80) });
  });

  test("without a level, or with 63 Hz alone missing, nothing is asked", () => {
    expect(checkSpectrum([80, 80, 80, 80, 80, 80, 80, 80], null)?.isAsked).toBe(false);
    // Without 63 Hz the sum is 4.9946 instead of 4.9970: nothing that is heard.
    expect(checkSpectrum([null, 80, 80, 80, 80, 80, 80, 80], 87)?.sumDb).toBeCloseTo(86.985, 2);
    expect(checkSpectrum([80, null, 80, 80, 80, 80, 80, 80], 87)).toBeNull();
  });
});

describe("from a file", () => {
  const choose = (text: string) =>
    userEvent.upload(screen.getByLabelText("From a file"), new File([text], "bands.csv"));

  test("a table with frequencies fills the bands", async () => {
    const onSave = show();
    await type("87");
    await choose(
      "Hz;dB\n63;80\n125;80\n250;80\n500;80\n1000;80\n2000;80\n4000;80\n8000;80\n16000;60\n",
    );
    expect(await screen.findByText(/Read from bands.csv/)).toBeVisible();
    await save();
    expect(onSave).toHaveBeenCalledWith({ levelDb: 87, bands: Array(8).fill(80) });
  });

  test("what holds no eight bands changes nothing and says so", async () => {
    show();
    await choose("nothing of the kind");
    expect(
      await screen.findByText("bands.csv holds no levels of eight octave bands."),
    ).toBeVisible();
    expect(screen.getByLabelText("Octave band level, 1000 Hz")).toHaveValue("");
  });
});
