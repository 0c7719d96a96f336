import { queryOptions } from "@tanstack/react-query";
import { AreaList } from "../../../shared/schemas/site";
import { api } from "../../lib/api";

export const areaQueries = {
  all: ["areas"] as const,
  list: (siteId?: string) =>
    queryOptions({
      queryKey: [...areaQueries.all, "list", siteId ?? null],
      queryFn: ({ signal }) => api.get("/areas", { query: { siteId }, schema: AreaList, signal }),
    }),
};
