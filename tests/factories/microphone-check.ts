import { randomUUID } from "node:crypto";
import request, { type Response } from "supertest";
import { checkMicrophones } from "../../server/jobs/check-microphones";
import { type TestWav, wav } from "../../server/recordings/test-wav";
import type { CheckInput, TypedCheckInput } from "../../shared/schemas/microphone-check";
import { buildProtector, type Protector } from "./protector";
import { type Client, testApp } from "./sign-in";
import type { Site } from "./site";
import { buildWorker, type Worker } from "./worker";

const rateHz = 48_000;
const BANDS = 8;

/** Gaussian noise, the same in every run: a generator's uniform numbers by Box and Muller. */
export function gaussianNoise(seconds: number, seed: number, amplitude = 0.05): Float32Array {
  let state = seed;
  const uniform = () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0;
    return (state + 0.5) / 2 ** 32;
  };
  return Float32Array.from(
    { length: seconds * rateHz },
    () => amplitude * Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform()),
  );
}

/** A cup that takes the same off everywhere, and is late by so many samples. */
export const behind = (outside: Float32Array, attenuationDb: number, late = 7): Float32Array =>
  outside.map((_, at) => (at < late ? 0 : outside[at - late]!) * 10 ** (-attenuationDb / 20));

/** A canceller's part: the opposite wave, a little late and not quite as large. */
export const cancelled = (inside: Float32Array, late = 6, gain = 0.9): Float32Array =>
  inside.map((value, at) => value - gain * (at < late ? 0 : inside[at - late]!));

export const pairFile = (channels: readonly Float32Array[], options: Partial<TestWav> = {}) =>
  Buffer.from(wav({ sampleFormat: "int24", rateHz, ...options }, channels));

/** An active muff whose report is what `cancelled` does, by octave: −10 lg of |1 − g·e^(−jφ)|² over the band, rounded. */
export const ACTIVE_DB = [19, 18, 14, 9, 3, -3, -5, -2];

export const buildActiveMuff = ({ organizationId }: Pick<Site, "organizationId">) =>
  buildProtector({
    organizationId,
    kind: "active-earmuff",
    data: {
      active: {
        attenuationDb: ACTIVE_DB,
        delayS: null,
        gain: null,
        maximumDb: null,
        bandwidthHz: null,
        saturatesAboveDb: null,
        batteryMin: null,
      },
    },
  });

const noCorrection = { kind: "none", bandsDb: Array(BANDS).fill(0), source: "" } as const;

/** One stereo file, the first channel outside, unless told otherwise. */
export const checkInput = (
  { id: modelId }: Pick<Protector, "id">,
  more: Partial<CheckInput> = {},
): CheckInput => ({
  modelId,
  ear: "left",
  parts: [{ active: "off", outside: { file: 0, channel: 1 }, inside: { file: 0, channel: 2 } }],
  calibration: { kind: "alike" },
  correction: { ...noCorrection, bandsDb: [...noCorrection.bandsDb] },
  taskId: null,
  ...more,
});

/** 100 dB outside in every octave, and so much less inside. */
export const typedInput = (
  { id: modelId }: Pick<Protector, "id">,
  insideDb = 75,
  more: Partial<TypedCheckInput> = {},
): TypedCheckInput => ({
  modelId,
  ear: "left",
  correction: { ...noCorrection, bandsDb: [...noCorrection.bandsDb] },
  taskId: null,
  bands: {
    outsideOffDb: [100, 100, 100, 100, 100, 100, 100, 100],
    insideOffDb: [insideDb, insideDb, insideDb, insideDb, insideDb, insideDb, insideDb, insideDb],
    outsideOnDb: null,
    insideOnDb: null,
  },
  ...more,
});

export function sendCheck(
  { headers }: Pick<Client, "headers">,
  { id }: Pick<Worker, "id">,
  check: object,
  files: readonly Buffer[],
): Promise<Response> {
  const sent = request(testApp())
    .post(`/api/workers/${id}/microphone-checks`)
    .set(headers)
    .set("Idempotency-Key", randomUUID())
    .field("check", JSON.stringify(check));
  for (const [index, file] of files.entries()) sent.attach("files", file, `ear-${index + 1}.wav`);
  return sent.then((answer) => answer);
}

/** Does what the work process would do with the check that waits. */
export const analyseCheck = (
  { organizationId }: Pick<Site, "organizationId">,
  checkId: string,
): Promise<void> => checkMicrophones({ organizationId, checkId });

/** A worker of a site and a protector that can be checked on them. */
export async function buildCheckable(site: Site): Promise<{ worker: Worker; model: Protector }> {
  return {
    worker: await buildWorker({ site }),
    model: await buildProtector({ organizationId: site.organizationId }),
  };
}
