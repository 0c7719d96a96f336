import { infiniteQueryOptions, queryOptions } from "@tanstack/react-query";
import type { z } from "zod";
import type { AuditEventPage } from "../../../shared/schemas/audit-event";
import type { TrailState } from "../../../shared/schemas/trail-check";
import { KeeperView } from "../../../shared/schemas/trail-keeper";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";

export interface TrailFilter {
  readonly subjectKind: string | null;
  readonly subjectId: string | null;
}

export const trailQuery = (filter: TrailFilter) =>
  infiniteQueryOptions({
    queryKey: ["trail", filter],
    queryFn: ({ signal, pageParam }) =>
      api.get("/audit-events", {
        query: { ...filter, cursor: pageParam },
        schema: ownReply<z.infer<typeof AuditEventPage>>("rows", "next", "names"),
        signal,
      }),
    initialPageParam: null as string | null,
    getNextPageParam: ({ next }) => next,
  });

/** Head, tail and what there is to check: asked anew whenever somebody looks. */
export const trailStateQuery = () =>
  queryOptions({
    queryKey: ["trail", "check"],
    queryFn: ({ signal }) =>
      api.get("/trail-check", { schema: ownReply<TrailState>("tail", "tables"), signal }),
    staleTime: 0,
  });

/** Who outside keeps the head. */
export const keeperQuery = queryOptions({
  queryKey: ["trail", "keeper"],
  queryFn: ({ signal }) => api.get("/trail-keeper", { schema: KeeperView, signal }),
});
