import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import { TrainingDuePage, TrainingPage, TrainingView } from "../../../shared/schemas/training";
import { api } from "../../lib/api";

export const trainingQueries = {
  all: ["training"] as const,
  list: (siteId: string | undefined) =>
    infiniteQueryOptions({
      queryKey: [...trainingQueries.all, "list", siteId],
      queryFn: ({ pageParam, signal }) =>
        api.get("/trainings", {
          query: { siteId, cursor: pageParam },
          schema: TrainingPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  dues: (siteId: string | undefined) =>
    infiniteQueryOptions({
      queryKey: [...trainingQueries.all, "dues", siteId],
      queryFn: ({ pageParam, signal }) =>
        api.get("/training-dues", {
          query: { siteId, cursor: pageParam },
          schema: TrainingDuePage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...trainingQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/trainings/${id}`, { schema: TrainingView, signal }),
    }),
};

export function useStrikeTraining() {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({
      training,
      reason,
      key,
    }: {
      training: TrainingView;
      reason: string;
      key: string;
    }) =>
      api.post(`/trainings/${training.id}/strike`, {
        body: { reason },
        schema: TrainingView,
        ifMatch: String(training.revision),
        idempotencyKey: key,
      }),
    onSuccess: () => client.invalidateQueries({ queryKey: trainingQueries.all }),
  });
}
