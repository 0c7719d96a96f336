import { IdParams } from "../../shared/schemas/common";
import {
  NewProtectorInput,
  ProtectorDetail,
  ProtectorInput,
  ProtectorList,
  ProtectorRevisionInput,
} from "../../shared/schemas/protector";
import { addProtectorRevision } from "../commands/add-protector-revision";
import { changeProtector } from "../commands/change-protector";
import { createProtector } from "../commands/create-protector";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { ProtectorModel } from "../models/protector";
import { may, protectorPolicy } from "../policies";
import { presentProtector, presentProtectorDetail } from "../presenters/protector";
import { countWearers, listProtectorRevisions, listProtectors } from "../queries/protectors";

async function view(actor: Actor, id: string) {
  const protector = only(await listProtectors(actor, id));
  return presentProtectorDetail(actor, protector, await listProtectorRevisions([id], "all"));
}

export function defineProtectorRoutes(): void {
  endpoint.get(
    "/protectors",
    {
      summary: "The register of protectors, with the data in force",
      may: may.readProgramme,
      reply: ProtectorList,
    },
    async ({ actor }) => {
      const protectors = await listProtectors(actor);
      const revisions = await listProtectorRevisions(
        protectors.map(({ id }) => id),
        "in-force",
      );
      const dataOf = new Map(revisions.map((revision) => [revision.modelId, revision]));
      return {
        rows: protectors.map((row) => presentProtector(actor, row, dataOf.get(row.id))),
        wearersToday: await countWearers(actor),
      };
    },
  );

  endpoint.get(
    "/protectors/:id",
    {
      summary: "One protector with the history of its data",
      may: may.readProgramme,
      params: IdParams,
      reply: ProtectorDetail,
    },
    async ({ actor, params }) => view(actor, params.id),
  );

  endpoint.post(
    "/protectors",
    {
      summary: "Add a protector with its first data",
      may: may.officer,
      body: NewProtectorInput,
      reply: ProtectorDetail,
    },
    async ({ actor, body }) => {
      authorize(protectorPolicy, actor, "change", {});
      const model = await createProtector(actor, body);
      return view(actor, model.id);
    },
  );

  endpoint.put(
    "/protectors/:id",
    {
      summary: "Rename or archive a protector",
      may: may.officer,
      params: IdParams,
      body: ProtectorInput,
      reply: ProtectorDetail,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, params.id, actor, {
        lock: true,
      });
      authorize(protectorPolicy, actor, "change", model);
      await requireRevision(model, ifMatch, () => view(actor, model.id));
      await changeProtector(actor, model, body);
      return view(actor, model.id);
    },
  );

  endpoint.post(
    "/protectors/:id/revisions",
    {
      summary: "A protector's data from a date on",
      may: may.officer,
      params: IdParams,
      body: ProtectorRevisionInput,
      reply: ProtectorDetail,
    },
    async ({ actor, params, body }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, params.id, actor, {
        lock: true,
      });
      authorize(protectorPolicy, actor, "change", model);
      await addProtectorRevision(actor, model, body);
      return view(actor, model.id);
    },
  );
}
