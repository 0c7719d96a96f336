import { queryOptions } from "@tanstack/react-query";
import { InstrumentList } from "../../../shared/schemas/run";
import { api } from "../../lib/api";

export const instrumentQueries = {
  all: ["instruments"] as const,
  list: (siteId?: string) =>
    queryOptions({
      queryKey: [...instrumentQueries.all, "list", siteId ?? null],
      queryFn: ({ signal }) =>
        api.get("/instruments", { query: { siteId }, schema: InstrumentList, signal }),
    }),
};
