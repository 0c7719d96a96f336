import {
  CombinationFilter,
  CombinationInput,
  CombinationList,
} from "../../shared/schemas/protector";
import { ChangePreview } from "../../shared/schemas/site";
import { addProtectorCombination, insertCombination } from "../commands/add-protector-combination";
import { previewChange } from "../commands/preview-change";
import { endpoint } from "../lib/endpoint";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import { may, protectorPolicy } from "../policies";
import { presentCombination } from "../presenters/protector";
import { listCombinations } from "../queries/protector-combinations";

/** A look needs no reason yet; the row that bears this one is taken back. */
const PREVIEW = "preview";

const view = async (modelId: string) => ({
  rows: (await listCombinations(modelId)).map(presentCombination),
});

/** Both models, theirs to change; the inner one's row is what two savers of a pair wait for. */
async function pairToChange(actor: Actor, { innerModelId, outerModelId }: CombinationInput) {
  const inner = await findVisible(ProtectorModel, protectorPolicy, innerModelId, actor, {
    lock: true,
  });
  const outer = await findVisible(ProtectorModel, protectorPolicy, outerModelId, actor);
  authorize(protectorPolicy, actor, "change", inner);
  authorize(protectorPolicy, actor, "change", outer);
}

export function defineProtectorCombinationRoutes(): void {
  endpoint.get(
    "/protector-combinations",
    {
      summary: "Test data of a protector worn together with another",
      may: may.readProgramme,
      query: CombinationFilter,
      reply: CombinationList,
    },
    async ({ actor, query }) => {
      const model = await findVisible(ProtectorModel, protectorPolicy, query.modelId, actor);
      return view(model.id);
    },
  );

  endpoint.post(
    "/protector-combinations",
    {
      summary: "Test data of two protectors worn together, from a date on",
      may: may.officer,
      body: CombinationInput,
      reply: CombinationList,
    },
    async ({ actor, body }) => {
      await pairToChange(actor, body);
      await addProtectorCombination(actor, body);
      return view(body.innerModelId);
    },
  );

  endpoint.post(
    "/protector-combinations/preview",
    {
      summary: "Who would change verdict with other data of two worn together",
      may: may.officer,
      body: CombinationInput,
      reply: ChangePreview,
      storesNothing: true,
    },
    async ({ actor, body }) => {
      await pairToChange(actor, body);
      const { innerModelId, outerModelId, effectiveFrom } = body;
      return previewChange(
        actor,
        { pair: { innerModelId, outerModelId }, fromDate: effectiveFrom },
        () => insertCombination(actor, { ...body, reason: PREVIEW }),
      );
    },
  );
}
