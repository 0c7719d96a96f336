import { infiniteQueryOptions, queryOptions, useMutation } from "@tanstack/react-query";
import {
  HistoryPage,
  SignInCodeView,
  WorkerPage,
  WorkerView,
} from "../../../shared/schemas/worker";
import { api } from "../../lib/api";

export interface WorkerListFilter {
  readonly search?: string;
  readonly siteId?: string;
  readonly crewId?: string;
  readonly includeLeft?: boolean;
}

export const workerQueries = {
  all: ["workers"] as const,
  list: (filter: WorkerListFilter) =>
    infiniteQueryOptions({
      queryKey: [...workerQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/workers", {
          query: { ...filter, search: filter.search || undefined, cursor: pageParam },
          schema: WorkerPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...workerQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/workers/${id}`, { schema: WorkerView, signal }),
    }),
  history: (id: string) =>
    infiniteQueryOptions({
      queryKey: [...workerQueries.all, "history", id],
      queryFn: ({ pageParam, signal }) =>
        api.get(`/workers/${id}/days`, {
          query: { cursor: pageParam, limit: 120 },
          schema: HistoryPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
};

export function useIssueCode(id: string) {
  return useMutation({
    mutationFn: () =>
      api.post(`/workers/${id}/sign-in-codes`, { body: {}, schema: SignInCodeView }),
  });
}
