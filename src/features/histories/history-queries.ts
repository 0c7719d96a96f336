import { queryOptions } from "@tanstack/react-query";
import { Envelope, HistoryAnalysis, HistoryView } from "../../../shared/schemas/history";
import { api } from "../../lib/api";
import type { Span } from "./history-span";

/** What the whole shift is drawn from at once, and a part of it when one looks closer. */
const WHOLE_BUCKETS = 1200;
const PART_BUCKETS = 2400;

export const historyQueries = {
  all: ["histories"] as const,
  one: (id: string) =>
    queryOptions({
      queryKey: [...historyQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/histories/${id}`, { schema: HistoryView, signal }),
    }),
  analysis: (id: string) =>
    queryOptions({
      queryKey: [...historyQueries.all, "analysis", id],
      queryFn: ({ signal }) =>
        api.get(`/histories/${id}/analysis`, { schema: HistoryAnalysis, signal }),
    }),
  /** The levels never change, so that an envelope is asked for once. */
  envelope: (id: string, span: Span | null) =>
    queryOptions({
      queryKey: [...historyQueries.all, "envelope", id, span?.fromS ?? null, span?.toS ?? null],
      queryFn: ({ signal }) =>
        api.get(`/histories/${id}/envelope`, {
          query: span ? { ...span, buckets: PART_BUCKETS } : { buckets: WHOLE_BUCKETS },
          schema: Envelope,
          signal,
        }),
      staleTime: Number.POSITIVE_INFINITY,
      gcTime: span ? 60_000 : undefined,
    }),
};
