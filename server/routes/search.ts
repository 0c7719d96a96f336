import { SearchQuery, SearchView } from "../../shared/schemas/search";
import { endpoint } from "../lib/endpoint";
import { may } from "../policies";
import { searchByName } from "../queries/search";

export function defineSearchRoutes(): void {
  endpoint.get(
    "/search",
    {
      summary: "Workers, crews, tasks and protectors by name or number",
      may: may.readCrews,
      query: SearchQuery,
      reply: SearchView,
    },
    async ({ actor, query }) => searchByName(actor, query.q),
  );
}
