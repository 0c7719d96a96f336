import { queryOptions } from "@tanstack/react-query";
import { RuleSetList } from "../../../shared/schemas/rule-set";
import { SiteList, SiteView } from "../../../shared/schemas/site";
import { api } from "../../lib/api";

export const ruleQueries = {
  ruleSets: queryOptions({
    queryKey: ["rule-sets"] as const,
    queryFn: ({ signal }) => api.get("/rule-sets", { schema: RuleSetList, signal }),
    // They change with the program only.
    staleTime: Number.POSITIVE_INFINITY,
  }),
  sites: ["sites"] as const,
  listSites: () =>
    queryOptions({
      queryKey: [...ruleQueries.sites, "list"],
      queryFn: ({ signal }) => api.get("/sites", { schema: SiteList, signal }),
    }),
  site: (id: string) =>
    queryOptions({
      queryKey: [...ruleQueries.sites, id],
      queryFn: ({ signal }) => api.get(`/sites/${id}`, { schema: SiteView, signal }),
    }),
};
