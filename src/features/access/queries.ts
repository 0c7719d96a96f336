import { infiniteQueryOptions, queryOptions } from "@tanstack/react-query";
import type { z } from "zod";
import type { OwnAccess, ReadPage, WorkerReaders } from "../../../shared/schemas/access";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

export const accessQueries = {
  own: queryOptions({
    queryKey: ["access", "own"],
    queryFn: ({ signal }) =>
      api.get("/me/access", { schema: ownReply<OwnAccess>("account", "record"), signal }),
  }),
  worker: (id: string) =>
    queryOptions({
      queryKey: ["access", "worker", id],
      queryFn: ({ signal }) =>
        api.get(`/workers/${id}/access`, {
          schema: ownReply<z.infer<typeof WorkerReaders>>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  /** Without filter: all that the reader may see of it. */
  reads: (filter: { workerId?: string; readerId?: string } = {}) =>
    infiniteQueryOptions({
      queryKey: ["access", "reads", filter],
      queryFn: ({ signal, pageParam }) =>
        api.get("/record-reads", {
          query: { ...filter, cursor: pageParam },
          schema: ownReply<z.infer<typeof ReadPage>>("rows", "next"),
          signal,
        }),
      initialPageParam: null as string | null,
      getNextPageParam: ({ next }) => next,
      staleTime: 0,
    }),
};
