import { DutyFilter, DutyPage } from "../../shared/schemas/duty";
import { endpoint } from "../lib/endpoint";
import { may } from "../policies";
import { listDuties } from "../queries/duties";

export function defineDutyRoutes(): void {
  endpoint.get(
    "/duties",
    {
      summary: "What is due by rule, by site and by people's own dates, worst first",
      may: may.readCrews,
      query: DutyFilter,
      reply: DutyPage,
    },
    ({ actor, query }) => listDuties(actor, query),
  );
}
