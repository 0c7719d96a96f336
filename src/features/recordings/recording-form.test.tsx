import { QueryClientProvider } from "@tanstack/react-query";
import { render, screen, waitFor } from "@testing-library/react";
import userEvent from "@testing-library/user-event";
import { beforeEach, expect, test, vi } from "vitest";
import { createQueryClient } from "../../lib/query-client";
import { sendFile } from "../../lib/send-file";
import { TestLanguage } from "../../lib/test-i18n";
import { RecordingForm } from "./recording-form";

vi.mock("../../lib/send-file", () => ({ sendFile: vi.fn() }));

const task = "00000000-0000-4000-8000-000000000001";
const sent = () =>
  vi.mocked(sendFile).mock.calls.map(([path, { body }]) => ({
    path,
    fields: Object.fromEntries((body as FormData).entries()),
  }));

beforeEach(() => {
  let count = 0;
  vi.mocked(sendFile).mockReset();
  vi.mocked(sendFile).mockImplementation(async (_, { body }) => {
    const form = body as FormData;
    count += 1;
    return {
      id: `00000000-0000-4000-8000-00000000010${count}`,
      fileName: "tone.wav",
      toneDb: Number(form.get("toneDb")),
      frequencyHz: Number(form.get("frequencyHz")),
      channels: [
        {
          // A calibrator 20 dB louder is ten times the pressure.
          pascalPerFullScale: form.get("toneDb") === "114" ? 20 : 2,
          frequencyHz: 1000,
          spreadDb: 0,
          durationS: 5,
        },
      ],
    } as never;
  });
});

function open() {
  render(
    <TestLanguage>
      <QueryClientProvider client={createQueryClient()}>
        <RecordingForm
          tasks={[{ value: task, label: "Grinding" }]}
          taskId={task}
          onSent={() => {}}
        />
      </QueryClientProvider>
    </TestLanguage>,
  );
  return userEvent.setup();
}

const wav = (name: string) => new File(["RIFF"], name, { type: "audio/wav" });

test("a tone is measured again with the level and the frequency as they stand, and no other is sent", async () => {
  const user = open();
  await user.upload(screen.getByLabelText("Tone"), wav("tone.wav"));
  await waitFor(() => expect(sent()).toHaveLength(1));
  expect(sent()[0]).toMatchObject({ path: "/recordings/tones", fields: { toneDb: "94" } });
  await user.upload(screen.getByLabelText("Recording"), wav("grinding.wav"));
  const level = screen.getByLabelText("The calibrator gives");
  await user.clear(level);
  await user.type(level, "114");
  // Sent at once: the tone of 94 dB is none any more.
  await user.click(screen.getByRole("button", { name: "Send the recording in" }));
  expect(sent().every(({ path }) => path === "/recordings/tones")).toBe(true);
  // Nothing is measured while somebody still types.
  await waitFor(() => expect(sent().at(-1)?.fields).toMatchObject({ toneDb: "114" }), {
    timeout: 5000,
  });
  await screen.findByText(/a sine at full scale is 117.0 dB/, {}, { timeout: 5000 });
  await user.click(screen.getByRole("button", { name: "Send the recording in" }));
  await waitFor(() => expect(sent().at(-1)?.path).toBe("/recordings"));
  const { calibration } = sent().at(-1)?.fields ?? {};
  expect(JSON.parse(String(calibration))).toEqual({
    kind: "tone",
    toneId: `00000000-0000-4000-8000-00000000010${sent().length - 1}`,
  });
});

test("chosen before its task, the tone is measured once there is one", async () => {
  const user = open();
  await user.selectOptions(screen.getByLabelText("Task"), "");
  await user.upload(screen.getByLabelText("Tone"), wav("tone.wav"));
  expect(await screen.findByText("Choose the task first, then the tone.")).toBeVisible();
  await user.selectOptions(screen.getByLabelText("Task"), task);
  await waitFor(() => expect(sent()).toHaveLength(1));
  await waitFor(() =>
    expect(screen.queryByText("Choose the task first, then the tone.")).toBeNull(),
  );
});
