import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import {
  ProtectorFileInput,
  ProtectorFileList,
  ProtectorFileRemoval,
} from "../../shared/schemas/protector";
import { attachProtectorFile } from "../commands/attach-protector-file";
import { removeProtectorFile } from "../commands/remove-protector-file";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { authorize, findVisible } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import { may, protectorPolicy } from "../policies";
import { presentProtectorFile } from "../presenters/protector";
import { visibleFiles } from "../queries/files";
import { listProtectorFiles } from "../queries/protector-files";

const view = async (modelId: string) => ({
  rows: (await listProtectorFiles(modelId)).map(presentProtectorFile),
});

export function defineProtectorFileRoutes(): void {
  endpoint.get(
    "/protectors/:id/files",
    {
      summary: "A protector's data sheets",
      may: may.readProgramme,
      params: IdParams,
      reply: ProtectorFileList,
    },
    async ({ actor, params }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, params.id, actor);
      return view(model.id);
    },
  );

  endpoint.post(
    "/protectors/:id/files",
    {
      summary: "Attach a data sheet that was sent before",
      may: may.officer,
      params: IdParams,
      body: ProtectorFileInput,
      reply: ProtectorFileList,
    },
    async ({ actor, params, body }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, params.id, actor, {
        lock: true,
      });
      authorize(protectorPolicy, actor, "change", model);
      const [file] = await visibleFiles(actor, [body.fileId]);
      if (!file) throw notFound();
      await attachProtectorFile(actor, model, file, body.title);
      return view(model.id);
    },
  );

  endpoint.post(
    "/protectors/:id/files/:attachmentId/removal",
    {
      summary: "Take a data sheet off a protector, with the reason",
      may: may.officer,
      params: IdParams.extend({ attachmentId: z.uuid() }),
      body: ProtectorFileRemoval,
      reply: ProtectorFileList,
      status: 200,
    },
    async ({ actor, params, body }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, params.id, actor, {
        lock: true,
      });
      authorize(protectorPolicy, actor, "change", model);
      await removeProtectorFile(actor, model, params.attachmentId, body.reason);
      return view(model.id);
    },
  );
}
