import { infiniteQueryOptions } from "@tanstack/react-query";
import type { z } from "zod";
import type { AuditEventPage } from "../../../shared/schemas/audit-event";
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
