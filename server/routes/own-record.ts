import { IdParams } from "../../shared/schemas/common";
import { TaskTimes } from "../../shared/schemas/own-record";
import { ownRecord, writeOwnRecord } from "../exports/own-record";
import { recordAudit } from "../lib/audit";
import { inTransaction, row } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { only } from "../lib/only";
import { findVisible } from "../lib/policy";
import { Worker } from "../models/worker";
import { exposureRecordPolicy, may, ownRecordPolicy } from "../policies";
import { taskTimes } from "../queries/task-times";
import { findWorkerDetail } from "../queries/workers";
import { plainName } from "../reports/pdf";

/** What a worker may take along or plan by, beside the pages. */
export function defineOwnRecordRoutes(): void {
  endpoint.get(
    "/workers/:id/task-times",
    {
      summary: "How long tasks of the worker's nominal day may last today, where that is certain",
      may: may.readExposureRecord,
      params: IdParams,
      reply: TaskTimes,
      reads: { kind: "page", worker: ({ params }) => params.id },
    },
    async ({ actor, params }) =>
      taskTimes(await findVisible(Worker, exposureRecordPolicy, params.id, actor)),
  );

  endpoint.get(
    "/me/record.zip",
    {
      summary: "All that is on record of oneself as a worker, as JSON and CSV in a ZIP",
      may: may.takeOwnRecord,
      streams: true,
    },
    async ({ actor, response }) => {
      const { organizationId, workerId } = actor;
      if (workerId === null) throw notFound();
      const record = await inTransaction(
        { organizationId, isolation: "repeatable-read" },
        async () => {
          const worker = await findVisible(Worker, ownRecordPolicy, workerId, actor);
          const detail = only(await findWorkerDetail(actor, worker.id));
          const site = await row<{ timeZone: string }>(
            `SELECT time_zone AS "timeZone" FROM sites WHERE id = :siteId`,
            { siteId: worker.siteId },
          );
          await recordAudit(actor, {
            action: "take-own-record",
            subjectKind: "worker",
            subjectId: worker.id,
            values: {},
          });
          return ownRecord(actor, detail, site?.timeZone ?? "UTC");
        },
      );
      response
        .attachment(`${plainName("my-record", String(record.worker.employeeNumber))}.zip`)
        .type("application/zip");
      await writeOwnRecord(record, new Date(), response);
      response.end();
    },
  );
}
