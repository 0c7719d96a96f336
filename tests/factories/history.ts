import { randomUUID } from "node:crypto";
import request, { type Response } from "supertest";
import { readHistoryImport } from "../../server/jobs/read-history";
import type { HistoryMapping } from "../../shared/schemas/history";
import { daysFromToday } from "./days";
import { buildInstrument, type Instrument } from "./instrument";
import { type Client, testApp } from "./sign-in";
import { buildSite, type Site } from "./site";
import { buildWorker, type Worker } from "./worker";

interface HistoryTextOptions {
  /** Local date and time of the first value, as the file writes it. */
  date?: string;
  time?: string;
  count?: number;
  intervalS?: number;
  /** Level of a value by its index; a text where the file has a mark. */
  levelDb?: (index: number) => number | string;
}

/** A file of levels: time, LAeq, LAS and LCpeak, of a clock in UTC. */
export function historyText({
  date = daysFromToday(-3),
  time = "06:00:00",
  count = 600,
  intervalS = 1,
  levelDb = () => 90,
}: HistoryTextOptions = {}): string {
  const start = Date.parse(`${date}T${time}Z`);
  const lines = Array.from({ length: count }, (_, index) => {
    const at = new Date(start + index * intervalS * 1000)
      .toISOString()
      .slice(0, 19)
      .replace("T", " ");
    const level = levelDb(index);
    const peak = typeof level === "number" ? level + 20 : level;
    return `${at},${level},${level},${peak}`;
  });
  return `${["time,LAeq,LAS,LCpeak", ...lines].join("\n")}\n`;
}

export const historyMapping = (overrides: Partial<HistoryMapping> = {}): HistoryMapping => ({
  sheet: null,
  delimiter: ",",
  skipLines: 1,
  decimal: ".",
  time: { kind: "date-time", column: 0 },
  dateOrder: "ymd",
  startsAt: null,
  clock: "site",
  levels: [
    { column: 1, channel: "laeq", unit: "dB" },
    { column: 2, channel: "las", unit: "dB" },
    { column: 3, channel: "lcpeak", unit: "dB" },
  ],
  overRange: [],
  underRange: [],
  ...overrides,
});

interface Sent {
  instrumentId: string;
  runId?: string;
  workerId?: string;
  content: string | Buffer;
  name?: string;
}

export function sendHistory(
  { headers }: Pick<Client, "headers">,
  { content, name = "levels.csv", ...fields }: Sent,
): Promise<Response> {
  const sent = request(testApp())
    .post("/api/history-imports")
    .set(headers)
    .set("Idempotency-Key", randomUUID());
  for (const [field, value] of Object.entries(fields)) sent.field(field, value);
  return sent.attach("file", Buffer.from(content), name).then((answer) => answer);
}

/** Does what the work process would do with the order that is open. */
export const workOn = (site: Pick<Site, "organizationId">, importId: string) =>
  readHistoryImport({ organizationId: site.organizationId, importId });

export interface Imported {
  importId: string;
  historyId: string;
  instrument: Instrument;
  worker: Worker;
}

/** A history that was sent in, read and stored. */
export async function importHistory(
  client: Client,
  overrides: {
    site?: Site;
    worker?: Worker;
    instrument?: Instrument;
    content?: string;
    covers?: "shift" | "projected" | "part";
    answers?: string[];
  } = {},
): Promise<Imported> {
  const { site = await buildSite(), content = historyText(), covers = "shift" } = overrides;
  const { instrument = await buildInstrument({ site }), worker = await buildWorker({ site }) } =
    overrides;
  const sent = await sendHistory(client, {
    instrumentId: instrument.id,
    workerId: worker.id,
    content,
  });
  const path = `/history-imports/${sent.body.id}`;
  await client.post(`${path}/read`, {
    mapping: sent.body.head.proposed,
    answers: overrides.answers ?? [],
  });
  await workOn(site, sent.body.id);
  const stored = await client.post(`${path}/store`, { covers });
  if (stored.status !== 202) throw new Error(JSON.stringify((await client.get(path)).body));
  await workOn(site, sent.body.id);
  const { body } = await client.get(path);
  if (body.state !== "stored") throw new Error(JSON.stringify(body));
  return { importId: body.id, historyId: body.historyId, instrument, worker };
}
