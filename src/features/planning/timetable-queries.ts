import { keepPreviousData, queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import { PlanView } from "../../../shared/schemas/plan";
import {
  type TimetableInput,
  type TimetableScope,
  TimetableSubject,
  TimetableView,
} from "../../../shared/schemas/timetable";
import { api } from "../../lib/api";
import { planQueries } from "./queries";

/** While the work process is at it, its progress is asked for this often. */
const PROGRESS_MS = 700;

export const timetableQueries = {
  all: ["timetables"] as const,
  /** Rests on what is assigned, measured and ruled, as what changes are tried on does. */
  subject: (scope: TimetableScope | null, goal: string | null, wornPct: number | null) =>
    queryOptions({
      queryKey: ["workers", "timetable", scope, goal, wornPct],
      queryFn: ({ signal }) =>
        api.get("/timetables/subject", {
          query: { ...scope, goal: goal ?? undefined, wornPct: wornPct ?? undefined },
          schema: TimetableSubject,
          signal,
        }),
      enabled: scope !== null,
      placeholderData: (before, query) =>
        // Another group's people are not shown for a moment as this one's.
        JSON.stringify(query?.queryKey[2]) === JSON.stringify(scope)
          ? keepPreviousData(before)
          : undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...timetableQueries.all, id],
      queryFn: ({ signal }) => api.get(`/timetables/${id}`, { schema: TimetableView, signal }),
      refetchInterval: ({ state }) => (state.data?.state === "working" ? PROGRESS_MS : false),
    }),
};

export function useStartTimetable() {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ body, key }: { body: TimetableInput; key: string }) =>
      api.post("/timetables", { body, schema: TimetableView, idempotencyKey: key }),
    onSuccess: (view) => client.setQueryData(timetableQueries.one(view.id).queryKey, view),
  });
}

export function useCancelTimetable(id: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (key: string) =>
      api.post(`/timetables/${id}/cancel`, { schema: TimetableView, idempotencyKey: key }),
    onSettled: () => client.invalidateQueries({ queryKey: timetableQueries.one(id).queryKey }),
  });
}

export function useKeepTimetable(id: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ name, revision, key }: { name: string; revision: number; key: string }) =>
      api.post(`/timetables/${id}/keep`, {
        body: { name },
        schema: PlanView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSuccess: async (plan) => {
      client.setQueryData(planQueries.one(plan.id).queryKey, plan);
      await Promise.all([
        client.invalidateQueries({ queryKey: timetableQueries.one(id).queryKey }),
        client.invalidateQueries({ queryKey: [...planQueries.all, "list"] }),
      ]);
    },
  });
}
