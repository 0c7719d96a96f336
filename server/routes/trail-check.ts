import {
  RowsChecked,
  RowsParams,
  SealsChecked,
  SealsQuery,
  TrailState,
} from "../../shared/schemas/trail-check";
import { endpoint } from "../lib/endpoint";
import { may } from "../policies";
import { checkRows, checkSeals, trailState } from "../queries/trail-check";

/** The check in pieces: whoever asks goes through the seals, then table by table, and sees how far it is. */
export function defineTrailCheckRoutes(): void {
  endpoint.get(
    "/trail-check",
    {
      summary: "The trail's head, what is not sealed yet, and what there is to check",
      may: may.checkTrail,
      reply: TrailState,
    },
    ({ actor }) => trailState(actor.organizationId),
  );

  endpoint.get(
    "/trail-check/seals",
    {
      summary: "A stretch of the chain recomputed from its events",
      may: may.checkTrail,
      query: SealsQuery,
      reply: SealsChecked,
    },
    ({ actor, query }) => checkSeals(actor.organizationId, query.after),
  );

  endpoint.get(
    "/trail-check/rows/:table",
    {
      summary: "A table's rows against what the trail last said of each",
      may: may.checkTrail,
      params: RowsParams,
      reply: RowsChecked,
    },
    ({ actor, params }) => checkRows(actor.organizationId, params.table),
  );
}
