import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { Readable } from "node:stream";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { analyseRecording } from "./analyse-recording";
import type { LevelsJob, ToneJob } from "./recording-job";
import { runRecordingJob } from "./recording-job";
import { pieces, wav, wavHeader } from "./test-wav";

const rateHz = 48_000;
const job: LevelsJob = {
  kind: "levels",
  paPerFullScale: 10,
  bands: true,
  selfNoiseDb: null,
  accept: [],
};
const sine = (seconds: number, amplitude: number) =>
  Float64Array.from({ length: seconds * rateHz }, (_, at) => {
    return amplitude * Math.sin((2 * Math.PI * 1000 * at) / rateHz);
  });
const recording = (channels: readonly ArrayLike<number>[]) =>
  wav({ sampleFormat: "int24", rateHz }, channels);
const here = (bytes: Uint8Array, one: LevelsJob | ToneJob = job) =>
  runRecordingJob({ bytes: pieces(bytes, 65_536), sizeBytes: bytes.length }, one, () => {});

let folder: string;
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "dinward-recordings-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe("in a thread", { timeout: 60_000 }, () => {
  // 0.1 of 10 Pa at the crest: 20 lg(1/√2/20 µPa) = 90.97 dB.
  const expectedDb = 20 * Math.log10(1 / Math.SQRT2 / 20e-6);

  test("a file's levels come back by channel, with progress on the way", async () => {
    const path = join(folder, "tone.wav");
    writeFileSync(path, recording([sine(4, 0.1), sine(4, 0.05)]));
    const shares: number[] = [];
    const found = await analyseRecording(path, job, { onProgress: (share) => shares.push(share) });
    expect(found).toMatchObject({
      rateHz,
      channels: 2,
      durationS: 4,
      faults: [],
      silentChannels: [],
    });
    expect(found.levels[0]!.laeqDb).toBeCloseTo(expectedDb, 1);
    expect(found.levels[0]!.laeqDb! - found.levels[1]!.laeqDb!).toBeCloseTo(6.02, 2);
    expect(found.levels[0]!.octaveBandsDb).toHaveLength(10);
    expect(shares.at(-1)).toBe(1);
    expect(shares).toEqual([...shares].sort((a, b) => a - b));
  });

  test("a stream gives the same as the file", async () => {
    const bytes = recording([sine(2, 0.1)]);
    const found = await analyseRecording(
      { stream: Readable.from(pieces(bytes, 50_000)), sizeBytes: null },
      job,
    );
    expect(found).toEqual(await here(bytes));
  });

  test("a refusal keeps its code and its figures", async () => {
    const path = join(folder, "short.wav");
    writeFileSync(path, recording([sine(2, 0.1)]).subarray(0, 144_044));
    await expect(analyseRecording(path, job)).rejects.toMatchObject({
      code: "recording-truncated",
      params: { missingS: 1, statedS: 2, foundS: 1 },
    });
  });

  test("cancelling ends it, though the sender has stalled", async () => {
    const header = wavHeader({ sampleFormat: "int16", rateHz }, 1, 1_000_000);
    const stalled = new Readable({ read() {} });
    stalled.push(header);
    const controller = new AbortController();
    const analysis = analyseRecording({ stream: stalled, sizeBytes: null }, job, {
      signal: controller.signal,
    });
    const reason = new Error("not wanted any more");
    setTimeout(() => controller.abort(reason), 50);
    await expect(analysis).rejects.toBe(reason);
    expect(stalled.destroyed).toBe(true);
  });
});

describe("faults of what was recorded", () => {
  test("silence in every channel is refused, in one it is named", async () => {
    const silence = new Float64Array(rateHz);
    await expect(here(recording([silence, silence]))).rejects.toMatchObject({
      code: "recording-silent",
    });
    const found = await here(recording([sine(1, 0.1), silence]));
    expect(found).toMatchObject({ silentChannels: [2] });
    await expect(
      here(recording([sine(1, 1e-5)]), { ...job, selfNoiseDb: 25 }),
    ).rejects.toMatchObject({ code: "recording-silent" });
  });

  test("clipping is counted, and refused unless somebody takes it as it is", async () => {
    const clipped = sine(1, 2).map((value) => Math.max(-1, Math.min(1, value)));
    // Of every half period the part above half the amplitude, 2/3 of 24 samples: 150° − 30°, its ends included, is 17.
    const params = { channel: 1, runs: 2000, samples: 34_000, sharePct: (100 * 34_000) / rateHz };
    await expect(here(recording([clipped]))).rejects.toMatchObject({
      code: "recording-clipped",
      params,
    });
    const found = await here(recording([clipped]), { ...job, accept: ["recording-clipped"] });
    expect(found.faults).toEqual([{ code: "recording-clipped", params }]);
  });

  test("what is there of a truncated recording can be taken", async () => {
    const bytes = recording([sine(2, 0.1)]).subarray(0, 144_044);
    const found = await here(bytes, { ...job, accept: ["recording-truncated"] });
    expect(found.durationS).toBe(1);
    expect(found.faults.map(({ code }) => code)).toEqual(["recording-truncated"]);
  });
});

describe("a calibration recording", () => {
  const tone: ToneJob = { kind: "tone", toneLevelDb: 94, frequencyHz: 1000, accept: [] };

  test("gives the pascals at full scale of the channel that has the tone", async () => {
    const found = await here(recording([sine(4, 0.1), new Float64Array(4 * rateHz)]), tone);
    if (!("tones" in found)) throw new Error("no tones");
    // 94 dB are 1.0024 Pa; full scale is √2/0.1 times as much.
    expect(found.tones[0]).toMatchObject({ found: true });
    expect(found.tones[0]!.found && found.tones[0]!.paPerFullScale).toBeCloseTo(14.1757, 3);
    expect(found.tones[1]).toMatchObject({ found: false, reason: "no-tone" });
  });

  test("without a tone is refused", async () => {
    await expect(here(recording([new Float64Array(4 * rateHz)]), tone)).rejects.toMatchObject({
      code: "tone-not-found",
    });
  });
});

test("memory does not grow with the length", { timeout: 120_000 }, async () => {
  const seconds = 1000;
  const second = wav({ sampleFormat: "int16", rateHz: 96_000 }, [
    Float64Array.from({ length: 96_000 }, (_, at) => 0.1 * Math.sin(at)),
  ]).subarray(44);
  let highest = 0;
  async function* endless() {
    yield wavHeader({ sampleFormat: "int16", rateHz: 96_000 }, 1, seconds * second.length);
    for (let index = 0; index < seconds; index++) {
      yield second;
      if (index % 50 === 0) highest = Math.max(highest, process.memoryUsage().rss);
    }
  }
  const before = process.memoryUsage().rss;
  const found = await runRecordingJob(
    { bytes: endless(), sizeBytes: null },
    { ...job, bands: false },
    () => {},
  );
  expect(found.durationS).toBe(seconds);
  // 192 MB went through; twenty times as much takes no more.
  expect(highest - before).toBeLessThan(64e6);
});
