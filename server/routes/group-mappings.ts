import { IdParams } from "../../shared/schemas/common";
import { MappingInput, MappingList, MappingView } from "../../shared/schemas/group-mapping";
import { endMapping, mapGroup } from "../commands/map-group";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { authorize } from "../lib/policy";
import { mappingPolicy, may } from "../policies";
import { listMappings } from "../queries/group-mappings";

/** Roles by the groups of the sign-in service. */
export function defineGroupMappingRoutes(): void {
  endpoint.get(
    "/group-mappings",
    { summary: "Which group gives which role", may: may.administer, reply: MappingList },
    async ({ actor }) => ({ rows: await listMappings(actor) }),
  );

  endpoint.post(
    "/group-mappings",
    {
      summary: "Give a role to whoever is in a group, from their next sign-in on",
      may: may.administer,
      body: MappingInput,
      reply: MappingView,
    },
    async ({ actor, body }) => only(await listMappings(actor, await mapGroup(actor, body))),
  );

  endpoint.post(
    "/group-mappings/:id/end",
    {
      summary: "End a mapping, and the roles that it gave",
      may: may.administer,
      params: IdParams,
      reply: MappingView,
      status: 200,
    },
    async ({ actor, params }) => {
      const mapping = only(await listMappings(actor, params.id));
      authorize(mappingPolicy, actor, "change", mapping);
      await endMapping(actor, mapping);
      return only(await listMappings(actor, mapping.id));
    },
  );
}
