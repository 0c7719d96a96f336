import { queryOptions } from "@tanstack/react-query";
import { CrewDetail, CrewList } from "../../../shared/schemas/crew";
import { api } from "../../lib/api";

export const crewQueries = {
  all: ["crews"] as const,
  list: (siteId?: string) =>
    queryOptions({
      queryKey: [...crewQueries.all, "list", siteId ?? null],
      queryFn: ({ signal }) => api.get("/crews", { query: { siteId }, schema: CrewList, signal }),
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...crewQueries.all, id],
      queryFn: ({ signal }) => api.get(`/crews/${id}`, { schema: CrewDetail, signal }),
    }),
};
