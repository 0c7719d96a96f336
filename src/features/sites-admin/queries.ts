import { queryOptions } from "@tanstack/react-query";
import { SiteList } from "../../../shared/schemas/site";
import { api } from "../../lib/api";

export const siteQueries = {
  all: ["sites-admin"] as const,
  list: queryOptions({
    queryKey: ["sites-admin", "list"],
    queryFn: ({ signal }) => api.get("/sites", { schema: SiteList, signal }),
    select: ({ rows }) => rows,
  }),
};
