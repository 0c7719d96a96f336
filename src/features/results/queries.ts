import { queryOptions } from "@tanstack/react-query";
import { ResultView } from "../../../shared/schemas/result";
import { api } from "../../lib/api";

/** The current result of a worker's day. */
export const dayResultQuery = (workerId: string, date: string) =>
  queryOptions({
    queryKey: ["results", "day", workerId, date],
    queryFn: ({ signal }) =>
      api.get(`/workers/${workerId}/days/${date}`, { schema: ResultView, signal }),
  });

/** Any result ever computed; it never changes. */
export const storedResultQuery = (id: string) =>
  queryOptions({
    queryKey: ["results", "stored", id],
    queryFn: ({ signal }) => api.get(`/results/${id}`, { schema: ResultView, signal }),
  });
