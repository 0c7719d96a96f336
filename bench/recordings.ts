import { createReadStream, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { openWav } from "../server/recordings/read-wav";
import { type LevelsJob, runRecordingJob } from "../server/recordings/recording-job";
import { wav } from "../server/recordings/test-wav";
import { measureBeside, title } from "./lib/measure";

/**
 * A minute of noise in stereo, from the file to its levels, against the minute that it took to record, beside the bare
 * reading of its samples. What a thread does, without the thread. Run as one bundle, as the server has it.
 */
const SECONDS = 60;
const rateHz = 48_000;
const TIMES = 5;

function noise(seed: number): Float32Array {
  let state = seed;
  return Float32Array.from({ length: SECONDS * rateHz }, () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return 0.4 * (state / 2 ** 32 - 0.5);
  });
}

const job: LevelsJob = {
  kind: "levels",
  paPerFullScale: 20,
  bands: true,
  selfNoiseDb: null,
  accept: [],
};

async function main(): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), "dinward-bench-recordings-"));
  try {
    title(`Recordings: ${SECONDS} s, stereo, ${rateHz / 1000} kHz`);
    const path = join(folder, "noise.wav");
    const bytes = () => createReadStream(path, { highWaterMark: 1 << 20 });
    const read = async () => {
      for await (const [first] of (await openWav(bytes())).blocks)
        if (!Number.isFinite(first![0])) throw new Error("no sample");
    };
    for (const sampleFormat of ["int16", "int24"] as const) {
      writeFileSync(path, wav({ sampleFormat, rateHz }, [noise(1), noise(2)]));
      for (const bands of [false, true]) {
        let cpuMs = Number.POSITIVE_INFINITY;
        const analyse = async () => {
          const before = process.cpuUsage();
          await runRecordingJob({ bytes: bytes(), sizeBytes: null }, { ...job, bands }, () => {});
          const { user, system } = process.cpuUsage(before);
          cpuMs = Math.min(cpuMs, (user + system) / 1000);
        };
        const [ours, bound] = await measureBeside(TIMES, analyse, read);
        const times = (ms: number) => `× ${((1000 * SECONDS) / ms).toFixed(0)}`;
        const what = bands ? "weighted levels, octaves and third-octaves" : "weighted levels alone";
        console.log(
          `  ${sampleFormat}, ${what}: p50 ${ours.p50.toFixed(0)} ms, ${times(ours.p50)} of real time${bands ? "  (goal 100)" : ""}; processor ${cpuMs.toFixed(0)} ms, ${times(cpuMs)}; bare reading p50 ${bound.p50.toFixed(0)} ms`,
        );
      }
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

void main();
