import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import { type RunInput, RunPage, RunView } from "../../../shared/schemas/run";
import { api } from "../../lib/api";

export interface RunListFilter {
  readonly siteId?: string;
  readonly instrumentId?: string;
  readonly workerId?: string;
}

export const runQueries = {
  all: ["runs"] as const,
  list: (filter: RunListFilter) =>
    infiniteQueryOptions({
      queryKey: [...runQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/runs", { query: { ...filter, cursor: pageParam }, schema: RunPage, signal }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...runQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/runs/${id}`, { schema: RunView, signal }),
    }),
};

/** A run moves the day that it belongs to, and what hangs from it. */
export function useRunSaved() {
  const client = useQueryClient();
  return (run: RunView) => {
    client.setQueryData(runQueries.one(run.id).queryKey, run);
    for (const name of ["runs", "results", "workers", "findings", "waiting"])
      void client.invalidateQueries({ queryKey: [name] });
  };
}

export function useRecordRun() {
  const saved = useRunSaved();
  return useMutation({
    mutationFn: ({ body, key }: { body: RunInput; key: string }) =>
      api.post("/runs", { body, schema: RunView, idempotencyKey: key }),
    onSuccess: saved,
  });
}
