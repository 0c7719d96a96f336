// @vitest-environment jsdom
import { render, screen, within } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { expect, test, vi } from "vitest";
import { NewProtectorInput } from "../../../shared/schemas/protector";
import { Form, SubmitButton, useSchemaForm } from "../../components/form";
import { TestLanguage } from "../../lib/test-i18n";
import { ProtectorDataFields } from "./data-fields";

const NOTHING = {
  usRatingDb: null,
  snrDb: null,
  hDb: null,
  mDb: null,
  lDb: null,
  slc80Db: null,
  bands: null,
  active: null,
  percentile: null,
  usLabel: null,
  subjectsDb: null,
  sizes: [],
  worksWith: { helmet: null, glasses: null, respirator: null },
  cushionsEveryDays: null,
  tipsEveryDays: null,
  auClass: null,
  effectiveFrom: "2026-01-05",
  reason: null,
};

type Kind = "earmuff" | "foam-plug" | "active-earmuff";

function DataForm({
  kind,
  data,
  onSave,
}: {
  kind: Kind;
  data: object;
  onSave: (value: unknown) => void;
}) {
  const form = useSchemaForm(NewProtectorInput, {
    defaultValues: { name: "Slate", kind, data: { ...NOTHING, ...data } },
    keepAs: null,
  });
  return (
    <Form aria-label="Data" onSubmit={form.handleSubmit((value) => onSave(value.data))}>
      <ProtectorDataFields form={form} needsReason={false} />
      <SubmitButton>Save</SubmitButton>
    </Form>
  );
}

function show({ kind = "earmuff", data = {} }: { kind?: Kind; data?: object } = {}) {
  const onSave = vi.fn();
  render(
    <TestLanguage>
      <DataForm kind={kind} data={data} onSave={onSave} />
    </TestLanguage>,
  );
  return onSave;
}

// By label, for a search by role among so many fields is slow.
const cell = (name: string | RegExp) => screen.getByLabelText(name);
const save = () => userEvent.click(screen.getByText("Save"));
const same = (value: number, count = 8) => Array<number>(count).fill(value);

test("what the label can't say stands at its field, with what to do", async () => {
  const percentile = { mostDb: 28, fewDb: null };
  const onSave = show({ data: { hDb: 31, mDb: 25, lDb: 18, percentile } });
  await userEvent.type(cell("SNR, dB"), "15");
  await userEvent.type(cell("Few users, dB"), "20");
  await save();
  expect(cell("SNR, dB").getAttribute("aria-invalid")).toBe("true");
  expect(cell("SNR, dB").getAttribute("aria-describedby")).toBeTruthy();
  expect(screen.getByText(/^SNR: The SNR lies below the L/)).toBeTruthy();
  expect(cell("Few users, dB").getAttribute("aria-invalid")).toBe("true");
  expect(screen.getByText(/The two may be swapped/)).toBeTruthy();
  expect(onSave).not.toHaveBeenCalled();
}, 15_000);

test("label and bands are held against each other while they are typed", async () => {
  // 30 dB less a deviation of 2 in every band; SNR counts from the C-weighted level, 1.5 dB above the A-weighted of pink noise.
  show({ data: { bands: { meanDb: same(30), sdDb: same(2) } } });
  const beside = screen.getByRole("region", { name: "The label beside its test data" });
  expect(within(beside).queryByText(/lie further apart/)).toBeNull();
  await userEvent.type(cell("SNR, dB"), "33");
  expect(within(beside).getByText(/^SNR: label and test data lie further apart/)).toBeTruthy();
  expect(within(beside).getByText("+3.5")).toBeTruthy();
});

test("nothing is recomputed from a deviation below zero, and the reason stands in its place", async () => {
  const sdDb = same(2);
  sdDb[3] = -2;
  show({ data: { bands: { meanDb: same(30), sdDb }, snrDb: 31 } });
  const beside = () => screen.getByRole("region", { name: "The label beside its test data" });
  const snr = within(beside()).getByRole("row", { name: /^SNR/ });
  expect(snr.textContent).toContain("not recomputed: a standard deviation is below zero");
  expect(within(snr).getByText("31.0")).toBeTruthy();
  expect(within(beside()).queryByText("means and deviations (1994)")).toBeNull();
  await userEvent.clear(screen.getAllByLabelText("Standard deviation, 500 Hz")[0]!);
  await userEvent.type(screen.getAllByLabelText("Standard deviation, 500 Hz")[0]!, "2");
  expect(within(beside()).getAllByText("means and deviations (1994)")).toHaveLength(4);
}, 15_000);

test("nine third-octaves go in by one paste, and give the US number", async () => {
  const onSave = show({ data: { usRatingDb: 20 } });
  for (const row of ["Mean attenuation", "Standard deviation"]) {
    await userEvent.click(cell(`${row}, 3150 Hz`));
    await userEvent.paste(same(row.startsWith("Mean") ? 30 : 2, 9).join("\t"));
  }
  expect(screen.getByText("US test data")).toBeTruthy();
  await save();
  expect(onSave).toHaveBeenCalledWith(
    expect.objectContaining({ usLabel: { meanDb: same(30, 9), sdDb: same(2, 9) } }),
  );
});

test("a subject's missing bands are named with its line, in one sentence", async () => {
  const onSave = show();
  const head = [63, 125, 250, 500, 1000, 2000, 4000, 8000].join("\t");
  const lines = [head, same(24).join("\t"), same(26).slice(0, 6).join("\t")].join("\n");
  await userEvent.click(cell(/^One subject a line/));
  await userEvent.paste(lines);
  await save();
  expect(screen.getByText("Line 3: 4000, 8000 Hz missing.")).toBeTruthy();
  expect(onSave).not.toHaveBeenCalled();
});

test("seven values among lines of eight are not taken a band too high without a word", async () => {
  const onSave = show({ data: { bands: { meanDb: same(30), sdDb: same(3) } } });
  await userEvent.click(cell(/^One subject a line/));
  await userEvent.paste([same(24), same(26, 7), same(28)].map((one) => one.join("\t")).join("\n"));
  await save();
  expect(screen.getByText(/^Line 2: It has other bands than the rest: eight values/)).toBeTruthy();
  expect(onSave).not.toHaveBeenCalled();
}, 15_000);

test("all that is wrong with bands and label is said at once", async () => {
  const [meanDb, sdDb]: (number | null)[][] = [same(30), same(3)];
  meanDb![4] = null;
  sdDb![3] = -2;
  const onSave = show({ data: { bands: { meanDb, sdDb }, hDb: 31, mDb: 25, lDb: 18, snrDb: 12 } });
  await save();
  expect(
    screen.getByText(
      /^Mean attenuation: 1000 Hz missing\. 500 Hz: A standard deviation can’t be negative/,
    ),
  ).toBeTruthy();
  expect(screen.getByText(/^SNR: The SNR lies below the L/)).toBeTruthy();
  expect(onSave).not.toHaveBeenCalled();
}, 15_000);

test("means and deviations can be taken from the subjects", async () => {
  const onSave = show();
  await userEvent.click(cell(/^One subject a line/));
  await userEvent.paste([24, 26, 28].map((value) => same(value).join("\t")).join("\n"));
  // The cells were empty: they are filled without being asked for, and nothing is left to press.
  expect(screen.queryByText(/^Take mean and deviation/)).toBeNull();
  expect(screen.getByText(/^3 subjects\. Mean and deviation by band above are taken/)).toBeTruthy();
  await save();
  // 24, 26 and 28 have a mean of 26 and a deviation of 2.
  expect(onSave).toHaveBeenCalledWith(
    expect.objectContaining({ bands: { meanDb: same(26), sdDb: same(2) } }),
  );
});

test("what was typed for a band stays until the subjects’ means are asked for; a broken line is no subject", async () => {
  const onSave = show({ data: { bands: { meanDb: same(30), sdDb: same(3) } } });
  const subjects = cell(/^One subject a line/);
  await userEvent.click(subjects);
  await userEvent.paste([same(24).join("\t"), same(28).join("\t"), "26\tx"].join("\n"));
  expect(screen.getByText(/^2 subjects\. 1 line is not whole and does not count\.$/)).toBeTruthy();
  await save();
  // All of its faults together.
  const fault =
    "Line 3, 125 Hz, “x”: This is not a number. Line 3: 250, 500, 1000, 2000, 4000, 8000 Hz missing.";
  expect(screen.getByText(fault)).toBeTruthy();
  await userEvent.clear(subjects);
  await userEvent.click(subjects);
  await userEvent.paste([24, 28].map((value) => same(value).join("\t")).join("\n"));
  await save();
  expect(onSave).toHaveBeenLastCalledWith(
    expect.objectContaining({ bands: { meanDb: same(30), sdDb: same(3) } }),
  );
  await userEvent.click(screen.getByText(/^Take mean and deviation/));
  await save();
  expect(onSave.mock.lastCall?.[0]).toMatchObject({ bands: { meanDb: same(26) } });
}, 15_000);

test("subjects whose means were taken out again are not kept for nothing", async () => {
  const onSave = show({ data: { subjectsDb: [same(24), same(28)] } });
  await save();
  expect(screen.getByText(/the subjects count for nothing/)).toBeTruthy();
  expect(onSave).not.toHaveBeenCalled();
});

test("one bad deviation marks its own cell, and the sentence says which", async () => {
  const sdDb = [...same(2)];
  sdDb[3] = -2;
  const onSave = show({ data: { bands: { meanDb: same(25), sdDb } } });
  await save();
  expect(screen.getByText(/^500 Hz: A standard deviation can’t be negative/)).toBeTruthy();
  const marked = [...document.querySelectorAll('.band-input[aria-invalid="true"]')];
  expect(marked).toEqual([screen.getAllByLabelText("Standard deviation, 500 Hz")[0]]);
  expect(onSave).not.toHaveBeenCalled();
}, 15_000);

test("a delay is typed in µs, and goes out in seconds", async () => {
  const active = {
    attenuationDb: null,
    delayS: 0.00012,
    gain: 0.9,
    maximumDb: null,
    bandwidthHz: 1000,
    saturatesAboveDb: null,
    batteryMin: null,
  };
  const onSave = show({ kind: "active-earmuff", data: { active } });
  const delay = cell(/^Delay/);
  expect((delay as HTMLInputElement).value).toBe("120");
  await userEvent.clear(delay);
  await userEvent.type(delay, "200000");
  await save();
  expect(screen.getByText(/at most a tenth of a second/)).toBeTruthy();
  await userEvent.clear(delay);
  await userEvent.type(delay, "50");
  await save();
  expect(onSave).toHaveBeenCalledWith(
    expect.objectContaining({ active: { ...active, delayS: 0.00005 } }),
  );
}, 15_000);

test("a battery is typed in hours, and goes out in minutes", async () => {
  const active = {
    attenuationDb: [12, 15, 18, 10, 2, 0, 0, 0],
    delayS: null,
    gain: null,
    maximumDb: null,
    bandwidthHz: 1000,
    saturatesAboveDb: null,
    batteryMin: 450,
  };
  const onSave = show({ kind: "active-earmuff", data: { active } });
  const battery = cell(/^Battery lasts/);
  expect((battery as HTMLInputElement).value).toBe("7.5");
  await userEvent.clear(battery);
  await userEvent.type(battery, "720");
  await save();
  expect(screen.getByText("A battery lasts at most 166 h.")).toBeTruthy();
  await userEvent.clear(battery);
  await userEvent.type(battery, "12.1");
  await save();
  expect(onSave).toHaveBeenCalledWith(
    expect.objectContaining({ active: { ...active, batteryMin: 726 } }),
  );
}, 15_000);

test("only what a kind can have is asked for", () => {
  show({ kind: "foam-plug" });
  expect(screen.queryByText("It cancels noise electronically")).toBeNull();
  expect(screen.queryByLabelText(/^New cushions every/)).toBeNull();
  expect(cell(/^New tips every/)).toBeTruthy();
});

test("what is stated is never hidden, whatever the kind", () => {
  show({ kind: "foam-plug", data: { cushionsEveryDays: 90 } });
  expect(cell(/^New cushions every/)).toBeTruthy();
});

test("sizes and gear go with the rest", async () => {
  const onSave = show();
  await userEvent.type(cell(/^Sizes/), "S, M,L");
  await userEvent.selectOptions(cell("glasses"), "no");
  await save();
  expect(onSave).toHaveBeenCalledWith(
    expect.objectContaining({
      sizes: ["S", "M", "L"],
      worksWith: { helmet: null, glasses: false, respirator: null },
    }),
  );
});
