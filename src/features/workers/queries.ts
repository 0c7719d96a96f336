import { infiniteQueryOptions, queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import { HistoryPage, SignInCodeView, type WorkerInput, WorkerPage, WorkerView } from "../../../shared/schemas/worker";
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
        api.get("/workers", { query: { ...filter, search: filter.search || undefined, cursor: pageParam }, schema: WorkerPage, signal }),
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
      queryFn: ({ pageParam, signal }) => api.get(`/workers/${id}/days`, { query: { cursor: pageParam, limit: 120 }, schema: HistoryPage, signal }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
};

/** A new worker, or the next revision of one. */
export function useSaveWorker(id: string | undefined) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ body, revision, key }: { body: WorkerInput; revision: number; key: string }) =>
      id === undefined
        ? api.post("/workers", { body, schema: WorkerView, idempotencyKey: key })
        : api.put(`/workers/${id}`, { body, schema: WorkerView, ifMatch: String(revision), idempotencyKey: key }),
    onSuccess: (worker) => {
      client.setQueryData(workerQueries.one(worker.id).queryKey, worker);
      return client.invalidateQueries({ queryKey: [...workerQueries.all, "list"] });
    },
  });
}

export function useIssueCode(id: string) {
  return useMutation({ mutationFn: () => api.post(`/workers/${id}/sign-in-codes`, { body: {}, schema: SignInCodeView }) });
}
