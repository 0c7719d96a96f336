import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import {
  type PlanInput,
  PlanPage,
  type PlanScope,
  type PlanStepChange,
  type PlanStepInput,
  type PlanStepMark,
  PlanView,
  TrySubject,
} from "../../../shared/schemas/plan";
import { api } from "../../lib/api";

export const planQueries = {
  all: ["plans"] as const,
  /** Rests on what is assigned, measured and ruled: asked for anew whenever the page is opened. */
  subject: (scope: PlanScope | null) =>
    queryOptions({
      queryKey: ["workers", "try-changes", scope],
      queryFn: ({ signal }) =>
        api.get("/try-changes", { query: { ...scope }, schema: TrySubject, signal }),
      enabled: scope !== null,
    }),
  list: (filter: { siteId?: string; state: "kept" | "all" }) =>
    infiniteQueryOptions({
      queryKey: [...planQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/plans", { query: { ...filter, cursor: pageParam }, schema: PlanPage, signal }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...planQueries.all, id],
      queryFn: ({ signal }) => api.get(`/plans/${id}`, { schema: PlanView, signal }),
    }),
};

export function useKeepPlan() {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ body, key }: { body: PlanInput; key: string }) =>
      api.post("/plans", { body, schema: PlanView, idempotencyKey: key }),
    onSuccess: (view) => {
      client.setQueryData(planQueries.one(view.id).queryKey, view);
      return client.invalidateQueries({ queryKey: [...planQueries.all, "list"] });
    },
  });
}

export function usePutAside(id: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ reason, revision, key }: { reason: string; revision: number; key: string }) =>
      api.post(`/plans/${id}/put-aside`, {
        body: { reason },
        schema: PlanView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSuccess: (view) => {
      client.setQueryData(planQueries.one(id).queryKey, view);
      return client.invalidateQueries({ queryKey: [...planQueries.all, "list"] });
    },
  });
}

/** What becomes of a plan's steps; each answer is the whole plan. */
export type StepChange =
  | { kind: "add"; body: PlanStepInput }
  | { kind: "change"; stepId: string; revision: number; body: PlanStepChange }
  | { kind: "mark"; stepId: string; revision: number; body: PlanStepMark };

export function useChangeStep(planId: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ change, key }: { change: StepChange; key: string }) => {
      const path = `/plans/${planId}/steps`;
      switch (change.kind) {
        case "add":
          return api.post(path, { body: change.body, schema: PlanView, idempotencyKey: key });
        case "change":
          return api.put(`${path}/${change.stepId}`, {
            body: change.body,
            schema: PlanView,
            ifMatch: String(change.revision),
          });
        case "mark":
          return api.post(`${path}/${change.stepId}/mark`, {
            body: change.body,
            schema: PlanView,
            ifMatch: String(change.revision),
            idempotencyKey: key,
          });
      }
    },
    onSuccess: (view) => {
      client.setQueryData(planQueries.one(planId).queryKey, view);
      return Promise.all([
        client.invalidateQueries({ queryKey: [...planQueries.all, "list"] }),
        client.invalidateQueries({ queryKey: ["findings"] }),
      ]);
    },
    // Somebody else was there first: what stands now is shown.
    onError: () => client.invalidateQueries({ queryKey: planQueries.one(planId).queryKey }),
  });
}
