import { pipeline } from "node:stream/promises";
import { IdParams } from "../../shared/schemas/common";
import { FILE_KINDS, FILE_LIMIT_BYTES, FileForm, FileView } from "../../shared/schemas/outing";
import { storeFile } from "../commands/store-file";
import { recordAudit } from "../lib/audit";
import { inTransaction } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { fileStore } from "../lib/file-store";
import { only } from "../lib/only";
import { may } from "../policies";
import { visibleFiles } from "../queries/files";

export function defineFileRoutes(): void {
  endpoint.post(
    "/files",
    {
      summary: "Send a photograph or a certificate, to be attached to what it belongs to",
      may: may.officer,
      body: FileForm,
      reply: FileView,
      upload: { limitBytes: FILE_LIMIT_BYTES, toStore: true },
    },
    async ({ actor, body, staged }) => {
      const { id } = await storeFile(actor, staged!, body.file.name, FILE_KINDS);
      const { name, sha256, sizeBytes } = body.file;
      await recordAudit(actor, {
        action: "upload-file",
        subjectKind: "file",
        subjectId: id,
        values: { fileName: name, sha256, sizeBytes },
      });
      const file = only(await visibleFiles(actor, [id]));
      return { ...file, uploadedAt: file.uploadedAt.toISOString() };
    },
  );

  endpoint.get(
    "/files/:id",
    {
      summary: "A file, as an attachment",
      may: may.readDays,
      params: IdParams,
      streams: true,
    },
    async ({ actor, params, response }) => {
      const file = await inTransaction(
        { organizationId: actor.organizationId, readOnly: true },
        async () => only(await visibleFiles(actor, [params.id])),
      );
      response
        .attachment(file.name)
        .type(file.mediaType)
        .set("X-Content-Type-Options", "nosniff")
        .set("Cache-Control", "private, no-store")
        .set("Content-Length", String(file.sizeBytes));
      await pipeline(fileStore().read(actor.organizationId, file.sha256), response);
    },
  );
}
