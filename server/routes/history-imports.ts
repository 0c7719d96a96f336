import { IdParams } from "../../shared/schemas/common";
import {
  HISTORY_LIMIT_BYTES,
  HistoryImportFilter,
  HistoryImportForm,
  HistoryImportPage,
  HistoryImportView,
  type HistoryMapping,
  HistoryReadOrder,
  HistoryStoreOrder,
} from "../../shared/schemas/history";
import { cancelHistoryImport } from "../commands/cancel-history-import";
import { orderHistoryReading, orderHistoryStoring } from "../commands/order-history-reading";
import { HISTORY_MEDIA_TYPES, startHistoryImport } from "../commands/start-history-import";
import type { HeadReply } from "../histories/history-worker";
import { row } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { issue, unprocessable } from "../lib/errors";
import { sniffMediaType } from "../lib/file-store";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { runWorker } from "../lib/run-worker";
import { Instrument, Run } from "../models/instrument";
import { HistoryImport } from "../models/survey";
import { Worker } from "../models/worker";
import { historyPolicy, may, programmePolicy, runPolicy, workerPolicy } from "../policies";
import { historyImportView, listHistoryImports } from "../queries/history-imports";

/** Whose history it is: a run of the same instrument, or a worker of the same site. */
async function checkOwner(
  actor: Actor,
  instrument: Instrument,
  { runId, workerId }: { runId: string | null; workerId: string | null },
): Promise<void> {
  if (runId !== null) {
    const run = await findVisible(Run, runPolicy, runId, actor);
    if (run.instrumentId !== instrument.id)
      throw unprocessable([issue(["runId"], "run-of-other-instrument")]);
  } else if (workerId !== null) {
    const worker = await findVisible(Worker, workerPolicy, workerId, actor);
    if (worker.siteId !== instrument.siteId)
      throw unprocessable([issue(["workerId"], "worker-of-other-site")]);
  }
}

async function headOf(file: string, instrumentId: string): Promise<HeadReply> {
  const remembered = await row<{ mapping: HistoryMapping }>(
    "SELECT mapping FROM history_mappings WHERE instrument_id = :instrumentId",
    { instrumentId },
  );
  return runWorker<HeadReply>("history-worker", {
    kind: "head",
    file,
    remembered: remembered?.mapping ?? null,
    sheet: null,
  });
}

export function defineHistoryImportRoutes(): void {
  endpoint.get(
    "/history-imports",
    {
      summary: "Files of time histories that came in, latest first",
      may: may.export,
      query: HistoryImportFilter,
      reply: HistoryImportPage,
    },
    ({ actor, query }) => listHistoryImports(actor, query),
  );

  endpoint.get(
    "/history-imports/:id",
    {
      summary: "A file on its way in: its beginning, its progress, its report",
      may: may.export,
      params: IdParams,
      reply: HistoryImportView,
    },
    async ({ actor, params }) => {
      const found = await findVisible(HistoryImport, historyPolicy, params.id, actor);
      return historyImportView(actor, found.id);
    },
  );

  endpoint.post(
    "/history-imports",
    {
      summary: "Send in a file of an instrument's levels",
      may: may.officer,
      body: HistoryImportForm,
      reply: HistoryImportView,
      upload: { limitBytes: HISTORY_LIMIT_BYTES, toStore: true },
    },
    async ({ actor, body, staged }) => {
      const instrument = await findVisible(Instrument, programmePolicy, body.instrumentId, actor);
      authorize(historyPolicy, actor, "change", instrument);
      await checkOwner(actor, instrument, body);
      const found = await sniffMediaType(staged!.path);
      if (!HISTORY_MEDIA_TYPES.includes(found))
        throw unprocessable([issue(["file"], "file-kind", { found })]);
      const { head, refused } = await headOf(staged!.path, instrument.id);
      if (!head)
        throw unprocessable([issue(["file"], refused?.code ?? "file-kind", refused?.params ?? {})]);
      const id = await startHistoryImport(actor, staged!, {
        instrument,
        runId: body.runId,
        workerId: body.workerId,
        fileName: body.file.name,
        head,
      });
      return historyImportView(actor, id);
    },
  );

  endpoint.post(
    "/history-imports/:id/read",
    {
      summary: "Read the file by a mapping: a report, nothing stored",
      may: may.officer,
      params: IdParams,
      body: HistoryReadOrder,
      reply: HistoryImportView,
      status: 202,
    },
    async ({ actor, params, body }) => {
      const found = await findVisible(HistoryImport, historyPolicy, params.id, actor, {
        lock: true,
      });
      authorize(historyPolicy, actor, "change", found);
      await orderHistoryReading(actor, found, body);
      return historyImportView(actor, found.id);
    },
  );

  endpoint.post(
    "/history-imports/:id/store",
    {
      summary: "Store what was read: all or nothing",
      may: may.officer,
      params: IdParams,
      body: HistoryStoreOrder,
      reply: HistoryImportView,
      status: 202,
    },
    async ({ actor, params, body }) => {
      const found = await findVisible(HistoryImport, historyPolicy, params.id, actor, {
        lock: true,
      });
      authorize(historyPolicy, actor, "change", found);
      await orderHistoryStoring(actor, found, body);
      return historyImportView(actor, found.id);
    },
  );

  endpoint.post(
    "/history-imports/:id/cancel",
    {
      summary: "Give an import up, with its file",
      may: may.officer,
      params: IdParams,
      reply: HistoryImportView,
      status: 200,
    },
    async ({ actor, params }) => {
      const found = await findVisible(HistoryImport, historyPolicy, params.id, actor, {
        lock: true,
      });
      authorize(historyPolicy, actor, "change", found);
      await cancelHistoryImport(actor, found);
      return historyImportView(actor, found.id);
    },
  );
}
