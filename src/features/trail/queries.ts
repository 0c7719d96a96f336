import { infiniteQueryOptions } from "@tanstack/react-query";
import { AuditEventPage } from "../../../shared/schemas/audit-event";
import { api } from "../../lib/api";

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
        schema: AuditEventPage,
        signal,
      }),
    initialPageParam: null as string | null,
    getNextPageParam: ({ next }) => next,
  });
