import { createReadStream, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { readPairs } from "../server/recordings/pair-job";
import { openWav } from "../server/recordings/read-wav";
import { wav } from "../server/recordings/test-wav";
import { measureBeside, title } from "./lib/measure";

/**
 * A minute of two microphones in stereo, from the file to its noise reductions, coherences and delay, against the minute
 * that it took to record, beside the bare reading of its samples. What a thread does, without the thread.
 */
const SECONDS = 60;
const rateHz = 48_000;
const TIMES = 5;
const GOAL = 50;

function noise(seed: number): Float32Array {
  let state = seed;
  return Float32Array.from({ length: SECONDS * rateHz }, () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return 0.4 * (state / 2 ** 32 - 0.5);
  });
}

/** A tenth of it, seven samples late, with a hundredth of another noise. */
function behind(outside: Float32Array): Float32Array {
  const other = noise(2);
  return outside.map((_, at) => 0.1 * (at < 7 ? 0 : outside[at - 7]!) + 0.01 * other[at]!);
}

const task = (path: string) => ({
  paths: [path],
  parts: [
    {
      active: "off" as const,
      outside: { file: 0, channel: 1 },
      inside: { file: 0, channel: 2 },
    },
  ],
  outsidePa: null,
  insidePa: null,
});

async function main(): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), "dinward-bench-microphones-"));
  try {
    title(`Two microphones: ${SECONDS} s, stereo, ${rateHz / 1000} kHz`);
    const path = join(folder, "ear.wav");
    const outside = noise(1);
    const inside = behind(outside);
    const read = async () => {
      const bytes = createReadStream(path, { highWaterMark: 1 << 20 });
      for await (const [first] of (await openWav(bytes)).blocks)
        if (!Number.isFinite(first![0])) throw new Error("no sample");
    };
    for (const sampleFormat of ["int16", "int24"] as const) {
      writeFileSync(path, wav({ sampleFormat, rateHz }, [outside, inside]));
      let cpuMs = Number.POSITIVE_INFINITY;
      const analyse = async () => {
        const before = process.cpuUsage();
        const reply = await readPairs(task(path), () => {});
        if ("refused" in reply) throw new Error(reply.refused.code);
        const { user, system } = process.cpuUsage(before);
        cpuMs = Math.min(cpuMs, (user + system) / 1000);
      };
      const [ours, bound] = await measureBeside(TIMES, analyse, read);
      const times = (ms: number) => `× ${((1000 * SECONDS) / ms).toFixed(0)}`;
      console.log(
        `  ${sampleFormat}: p50 ${ours.p50.toFixed(0)} ms, ${times(ours.p50)} of real time  (goal ${GOAL}); processor ${cpuMs.toFixed(0)} ms, ${times(cpuMs)}; bare reading p50 ${bound.p50.toFixed(0)} ms`,
      );
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

void main();
