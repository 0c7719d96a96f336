import type { Response } from "express";
import { IdParams } from "../../shared/schemas/common";
import {
  RecordReceiptInput,
  RecordTransferInput,
  RecordTransferList,
  RecordTransferView,
} from "../../shared/schemas/record-transfer";
import { lockProposal } from "../commands/decide-proposal";
import { recordYearRead } from "../commands/record-read";
import {
  approveTransfer,
  proposeTransfer,
  receiveTransfer,
  recordHandedOut,
  withdrawTransfer,
} from "../commands/transfer-records";
import { streamTransferZip } from "../exports/transfer-zip";
import { recordAudit } from "../lib/audit";
import { cutOffOnError } from "../lib/cut-off";
import { inTransaction } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { may, recordTransferPolicy, retentionPolicy, sitePolicy } from "../policies";
import {
  listRecordTransfers,
  successionDuties,
  yearsWithRecords,
} from "../queries/record-transfers";

/** One that nobody else decides meanwhile, as the actor saw it, and who proposed it. */
async function transferToDecide(actor: Actor, id: string, ifMatch: number) {
  const proposedBy = await lockProposal("record_transfers", id);
  const transfer = only(await listRecordTransfers(actor, id));
  await requireRevision(transfer, ifMatch, async () => transfer);
  return { transfer, proposedBy };
}

/** Waits until the system has taken all that was written. @throws Error where the reader has gone */
const hasLeft = (response: Response): Promise<void> =>
  new Promise((resolve, reject) => {
    const gone = () => reject(new Error("the reader has gone"));
    if (response.destroyed) return gone();
    response.once("close", gone);
    response.write("", (error) => {
      response.off("close", gone);
      if (error) reject(error);
      else resolve();
    });
  });

/** What the file is called: no name of a site, which another system may not take. */
const fileName = (passesOn: string) => `records-${passesOn}.zip`;

/** Handing a site's records over to the employer that follows. */
export function defineRecordTransferRoutes(): void {
  endpoint.get(
    "/record-transfers",
    {
      summary:
        "Records of sites handed over to a successor, how far that is, and what rules say of it",
      may: may.retain,
      reply: RecordTransferList,
    },
    async ({ actor }) => ({
      rows: await listRecordTransfers(actor),
      duties: await successionDuties(actor),
    }),
  );

  endpoint.post(
    "/record-transfers",
    {
      summary: "Propose to hand a site's records over to the employer that follows",
      may: may.retain,
      body: RecordTransferInput,
      reply: RecordTransferView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(retentionPolicy, actor, "propose", { siteId: site.id });
      return only(await listRecordTransfers(actor, await proposeTransfer(actor, body)));
    },
  );

  endpoint.post(
    "/record-transfers/:id/approval",
    {
      summary: "Approve what somebody else proposed: the file can then be taken",
      may: may.retain,
      params: IdParams,
      reply: RecordTransferView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const { transfer, proposedBy } = await transferToDecide(actor, params.id, ifMatch);
      await approveTransfer(actor, transfer, proposedBy);
      return only(await listRecordTransfers(actor, params.id));
    },
  );

  endpoint.post(
    "/record-transfers/:id/withdrawal",
    {
      summary: "Withdraw a handing over that is not done",
      may: may.retain,
      params: IdParams,
      reply: RecordTransferView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const { transfer } = await transferToDecide(actor, params.id, ifMatch);
      await withdrawTransfer(actor, transfer);
      return only(await listRecordTransfers(actor, params.id));
    },
  );

  endpoint.get(
    "/record-transfers/:id/records.zip",
    {
      summary: "All the site's records for its successor, a year's file for each year, streamed",
      may: may.officer,
      params: IdParams,
      streams: true,
    },
    async ({ actor, params, response }) => {
      const { organizationId } = actor;
      // Committed before anything leaves: a file that breaks off was read too.
      const { transfer, years } = await inTransaction({ organizationId }, async () => {
        const found = only(await listRecordTransfers(actor, params.id));
        if (found.state !== "approved") throw new AppError("wrong-state", 409);
        authorize(recordTransferPolicy, actor, "take", { ...found, proposedBy: "" });
        const withRecords = await yearsWithRecords(actor, found.siteId);
        await recordAudit(actor, {
          action: "begin-transfer-file",
          subjectKind: "record-transfer",
          subjectId: found.id,
          values: { years: withRecords },
        });
        for (const year of withRecords) await recordYearRead(actor, found.siteId, year);
        return { transfer: found, years: withRecords };
      });
      response.attachment(fileName(transfer.passesOn)).type("application/zip");
      // Cut off in the middle, it has no list of files and no manifest, and nobody can sign for it.
      await cutOffOnError(response, async () => {
        const facts = await streamTransferZip(
          actor,
          transfer,
          years,
          new Date(),
          response,
          (year, manifestSha256) =>
            inTransaction({ organizationId }, () =>
              recordAudit(actor, {
                action: "finish-year-records",
                subjectKind: "site",
                subjectId: transfer.siteId,
                values: { year, workers: "number", manifestSha256 },
              }),
            ),
        );
        // Not before all of it has left; and a reader whose file nobody knows sees it broken off.
        await hasLeft(response);
        await inTransaction({ organizationId }, () =>
          recordHandedOut(actor, transfer, { ...facts, years }),
        );
        response.end();
      });
    },
  );

  endpoint.post(
    "/record-transfers/:id/receipt",
    {
      summary: "Record the successor's receipt: the SHA-256 that they counted, who signed and when",
      may: may.retain,
      params: IdParams,
      body: RecordReceiptInput,
      reply: RecordTransferView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const { transfer } = await transferToDecide(actor, params.id, ifMatch);
      await receiveTransfer(actor, transfer, body);
      return only(await listRecordTransfers(actor, params.id));
    },
  );
}
