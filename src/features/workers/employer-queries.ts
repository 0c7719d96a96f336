import { queryOptions } from "@tanstack/react-query";
import { EmployerList } from "../../../shared/schemas/employer";
import { api } from "../../lib/api";

const all = ["employers"] as const;

export const employerQueries = {
  all,
  at: (siteId: string) =>
    queryOptions({
      queryKey: [...all, siteId],
      queryFn: ({ signal }) =>
        api.get(`/sites/${siteId}/employers`, { schema: EmployerList, signal }),
      select: ({ rows }) => rows,
    }),
};
