import { queryOptions } from "@tanstack/react-query";
import { JobList } from "../../../shared/schemas/task";
import { api } from "../../lib/api";

export const jobQueries = {
  all: ["jobs"] as const,
  list: (siteId?: string) =>
    queryOptions({
      queryKey: [...jobQueries.all, "list", siteId ?? null],
      queryFn: ({ signal }) => api.get("/jobs", { query: { siteId }, schema: JobList, signal }),
    }),
};
