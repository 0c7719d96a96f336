import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import {
  MeasuringNeeds,
  type Strategy,
  SurveyDetail,
  SurveyPage,
  SurveyPlan,
} from "../../../shared/schemas/survey";
import { ChosenBefore, WorkplaceChangePage } from "../../../shared/schemas/workplace-change";
import { api } from "../../lib/api";

interface PlanOf {
  siteId: string;
  jobId: string;
  strategy?: Strategy;
  seed?: string;
}

interface SurveysOf {
  siteId?: string;
  jobId?: string;
  state?: string;
}

export const surveyQueries = {
  all: ["surveys"] as const,
  list: (filter: SurveysOf) =>
    infiniteQueryOptions({
      queryKey: [...surveyQueries.all, "list", filter],
      queryFn: ({ signal, pageParam }) =>
        api.get("/surveys", {
          query: { ...filter, cursor: pageParam },
          schema: SurveyPage,
          signal,
        }),
      initialPageParam: null as string | null,
      getNextPageParam: (page) => page.next,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...surveyQueries.all, id],
      queryFn: ({ signal }) => api.get(`/surveys/${id}`, { schema: SurveyDetail, signal }),
    }),
  /** A draw has to stay what was shown: it is asked for anew only on purpose. */
  plan: (of: PlanOf) =>
    queryOptions({
      queryKey: [...surveyQueries.all, "plan", of],
      queryFn: ({ signal }) =>
        api.get("/survey-plan", { query: { ...of }, schema: SurveyPlan, signal }),
      staleTime: Number.POSITIVE_INFINITY,
      gcTime: 0,
    }),
  needs: (siteId?: string) =>
    queryOptions({
      queryKey: ["measuring-needs", siteId ?? null],
      queryFn: ({ signal }) =>
        api.get("/measuring-needs", { query: { siteId }, schema: MeasuringNeeds, signal }),
    }),
};

export const workplaceChangeQueries = {
  all: ["workplace-changes"] as const,
  protectors: (id: string) =>
    queryOptions({
      queryKey: [...workplaceChangeQueries.all, "protectors", id],
      queryFn: ({ signal }) =>
        api.get(`/workplace-changes/${id}/protectors`, { schema: ChosenBefore, signal }),
    }),
  list: (siteId?: string) =>
    infiniteQueryOptions({
      queryKey: [...workplaceChangeQueries.all, siteId ?? null],
      queryFn: ({ signal, pageParam }) =>
        api.get("/workplace-changes", {
          query: { siteId, cursor: pageParam },
          schema: WorkplaceChangePage,
          signal,
        }),
      initialPageParam: null as string | null,
      getNextPageParam: (page) => page.next,
    }),
};

export function useLookAtProtectors(changeId: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ assignmentIds, key }: { assignmentIds: readonly string[]; key: string }) =>
      api.post(`/workplace-changes/${changeId}/protectors`, {
        body: { assignmentIds },
        schema: ChosenBefore,
        idempotencyKey: key,
      }),
    onSuccess: (view) => {
      client.setQueryData(workplaceChangeQueries.protectors(changeId).queryKey, view);
      void client.invalidateQueries({ queryKey: ["measuring-needs"] });
    },
  });
}
