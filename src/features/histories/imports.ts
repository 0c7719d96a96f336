import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import { useRef, useState } from "react";
import {
  HistoryImportPage,
  HistoryImportView,
  type HistoryReadOrder,
  type HistoryStoreOrder,
} from "../../../shared/schemas/history";
import { api } from "../../lib/api";
import { sendFile } from "../../lib/send-file";

/** While the work process is at it, its progress is asked for this often. */
const PROGRESS_MS = 1000;

export const isAtWork = (state: HistoryImportView["state"] | undefined): boolean =>
  state === "reading" || state === "storing";

export const historyImportQueries = {
  all: ["history-imports"] as const,
  list: (siteId?: string) =>
    infiniteQueryOptions({
      queryKey: [...historyImportQueries.all, "list", siteId ?? null],
      queryFn: ({ pageParam, signal }) =>
        api.get("/history-imports", {
          query: { siteId, cursor: pageParam, limit: 20 },
          schema: HistoryImportPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...historyImportQueries.all, "one", id],
      queryFn: ({ signal }) =>
        api.get(`/history-imports/${id}`, { schema: HistoryImportView, signal }),
      refetchInterval: ({ state }) => (isAtWork(state.data?.state) ? PROGRESS_MS : false),
    }),
};

export interface NewImport {
  readonly file: File;
  readonly instrumentId: string;
  readonly workerId: string | null;
  readonly runId: string | null;
}

/** Sends a file in, telling how far it is; `cancel` gives it up on the way. */
export function useStartImport() {
  const client = useQueryClient();
  const aborter = useRef<AbortController | null>(null);
  const [progressPct, setProgressPct] = useState(0);
  const start = useMutation({
    mutationFn: ({ file, instrumentId, workerId, runId }: NewImport) => {
      const body = new FormData();
      body.set("instrumentId", instrumentId);
      if (workerId !== null) body.set("workerId", workerId);
      if (runId !== null) body.set("runId", runId);
      body.set("file", file);
      aborter.current = new AbortController();
      setProgressPct(0);
      return sendFile("/history-imports", {
        body,
        schema: HistoryImportView,
        signal: aborter.current.signal,
        onProgress: setProgressPct,
      });
    },
    onSuccess: (view) => {
      client.setQueryData(historyImportQueries.one(view.id).queryKey, view);
      return client.invalidateQueries({ queryKey: [...historyImportQueries.all, "list"] });
    },
  });
  const cancel = () => {
    aborter.current?.abort();
    start.reset();
  };
  return { start, progressPct, cancel };
}

function useOrder<Body>(id: string, order: "read" | "store" | "cancel") {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (body: Body) =>
      api.post(`/history-imports/${id}/${order}`, { body, schema: HistoryImportView }),
    onSuccess: (view) => client.setQueryData(historyImportQueries.one(id).queryKey, view),
  });
}

export const useReadImport = (id: string) => useOrder<HistoryReadOrder>(id, "read");
export const useStoreImport = (id: string) => useOrder<HistoryStoreOrder>(id, "store");
export const useCancelImport = (id: string) => useOrder<Record<string, never>>(id, "cancel");
