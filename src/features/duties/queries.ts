import { infiniteQueryOptions, queryOptions } from "@tanstack/react-query";
import { type DutyKind, DutyPage } from "../../../shared/schemas/duty";
import { api } from "../../lib/api";

export const dutyQueries = {
  all: ["duties"] as const,
  list: (filter: { siteId?: string; kind?: DutyKind }) =>
    infiniteQueryOptions({
      queryKey: [...dutyQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/duties", {
          query: { ...filter, cursor: pageParam },
          schema: DutyPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  /** The first 200 of a span of days: more than a month's grid can show. */
  between: (filter: { siteId?: string; kind?: DutyKind; from: string; to: string }) =>
    queryOptions({
      queryKey: [...dutyQueries.all, "between", filter],
      queryFn: ({ signal }) =>
        api.get("/duties", { query: { ...filter, limit: 200 }, schema: DutyPage, signal }),
    }),
};
