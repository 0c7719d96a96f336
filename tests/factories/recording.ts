import { createHash, randomUUID } from "node:crypto";
import { mkdirSync, writeFileSync } from "node:fs";
import { dirname } from "node:path";
import request, { type Response } from "supertest";
import { analyseStoredRecording } from "../../server/jobs/analyse-recording";
import { fileStore } from "../../server/lib/file-store";
import { type TestWav, wav } from "../../server/recordings/test-wav";
import type { RecordingAnalysis, RecordingView } from "../../shared/schemas/recording";
import { insert, next } from "./insert";
import { type Client, testApp } from "./sign-in";
import { buildSite, type Site } from "./site";
import { buildTask, type Task } from "./task";

const rateHz = 48_000;

/** A sine of so many seconds, its amplitude as a share of full scale. */
export const sine = (seconds: number, amplitude: number, frequencyHz = 1000): Float64Array =>
  Float64Array.from(
    { length: seconds * rateHz },
    (_, at) => amplitude * Math.sin((2 * Math.PI * frequencyHz * at) / rateHz),
  );

export const soundFile = (
  channels: readonly ArrayLike<number>[] = [sine(2, 0.1)],
  options: Partial<TestWav> = {},
): Buffer => Buffer.from(wav({ sampleFormat: "int24", rateHz, ...options }, channels));

interface Sent {
  taskId: string;
  content?: Buffer;
  name?: string;
  calibration?: object;
  keepReason?: string;
  deleteOn?: string;
}

const post = (
  { headers }: Pick<Client, "headers">,
  path: string,
  fields: Record<string, string>,
  file: Buffer,
  name: string,
): Promise<Response> => {
  const sent = request(testApp())
    .post(`/api${path}`)
    .set(headers)
    .set("Idempotency-Key", randomUUID());
  for (const [field, value] of Object.entries(fields)) sent.field(field, value);
  return sent.attach("file", file, name).then((answer) => answer);
};

export function sendRecording(
  client: Pick<Client, "headers">,
  { content = soundFile(), name = "saw.wav", calibration, ...fields }: Sent,
): Promise<Response> {
  const said = calibration ?? { kind: "sensitivity", pascalPerFullScale: 20 };
  return post(
    client,
    "/recordings",
    { ...fields, calibration: JSON.stringify(said) },
    content,
    name,
  );
}

export const sendTone = (
  client: Pick<Client, "headers">,
  fields: Record<string, string>,
  content: Buffer,
): Promise<Response> => post(client, "/recordings/tones", fields, content, "tone.wav");

/** Does what the work process would do with the recording that waits. */
export const analyse = ({ organizationId }: Pick<Site, "organizationId">, recordingId: string) =>
  analyseStoredRecording({ organizationId, recordingId });

const HZ = [31.5, 63, 125, 250, 500, 1000, 2000, 4000, 8000, 16_000];

/** One channel whose octave bands are all at 80 dB. */
export const flatAnalysis = (): RecordingAnalysis => ({
  durationS: 10,
  sampleRateHz: rateHz,
  sampleFormat: "int24",
  channels: [
    {
      isAbsolute: true,
      isSilent: false,
      laeqDb: 87,
      lceqDb: 88.5,
      lcPeakDb: 103,
      lafMaxDb: 91,
      lasMaxDb: 89,
      octaveBandsDb: HZ.map((frequencyHz) => ({ frequencyHz, levelDb: 80 })),
      thirdOctavesDb: [],
      clippedPct: 0,
    },
  ],
  faults: [],
});

interface RecordingOverrides {
  site?: Site;
  task?: Task;
  state?: RecordingView["state"];
  analysis?: RecordingAnalysis;
  accepted?: RecordingView["accepted"];
  /** Audio kept until then. */
  deleteOn?: string;
}

export interface BuiltRecording {
  id: string;
  task: Task;
  /** Where its audio lies; null: it has gone. */
  path: string | null;
}

/** A recording laid out in the database, analysed unless told otherwise. */
export async function buildRecording(overrides: RecordingOverrides = {}): Promise<BuiltRecording> {
  const site = overrides.site ?? (await buildSite());
  const task = overrides.task ?? (await buildTask({ site }));
  const { state = "analysed", deleteOn } = overrides;
  const { organizationId } = site;
  const content = Buffer.from(`sound ${next()}`);
  const sha256 = createHash("sha256").update(content).digest();
  const hasAudio = deleteOn !== undefined || ["uploaded", "analysing", "asked"].includes(state);
  const path = hasAudio ? fileStore().pathOf(organizationId, sha256.toString("hex")) : null;
  let fileId: string | undefined;
  if (path) {
    mkdirSync(dirname(path), { recursive: true });
    writeFileSync(path, content);
    const sizeBytes = content.length;
    const file = { organizationId, sha256, sizeBytes, mediaType: "audio/wav", name: "saw.wav" };
    fileId = await insert("files", file);
  }
  const analysis = state === "analysed" ? (overrides.analysis ?? flatAnalysis()) : null;
  const id = await insert("recordings", {
    organizationId,
    siteId: site.id,
    taskId: task.id,
    fileName: "saw.wav",
    sha256,
    sizeBytes: content.length,
    state,
    calibration: JSON.stringify({ kind: "sensitivity", pascalPerFullScale: 20 }),
    analysis: analysis && JSON.stringify(analysis),
    accepted: JSON.stringify(overrides.accepted ?? []),
    failure:
      state === "asked"
        ? JSON.stringify({ code: "recording-clipped", params: { channel: 1 } })
        : undefined,
    fileId,
    keepReason: deleteOn && "to show what the blower does",
    deleteOn,
  });
  return { id, task, path };
}
