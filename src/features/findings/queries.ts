import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import {
  type FindingKind,
  FindingPage,
  type FindingStepInput,
  FindingView,
} from "../../../shared/schemas/finding";
import { api } from "../../lib/api";

export interface FindingListFilter {
  readonly state?: "open" | "closed" | "all" | "done";
  readonly siteId?: string;
  readonly workerId?: string;
  readonly kind?: FindingKind;
}

export const findingQueries = {
  all: ["findings"] as const,
  list: (filter: FindingListFilter) =>
    infiniteQueryOptions({
      queryKey: [...findingQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/findings", {
          query: { ...filter, cursor: pageParam },
          schema: FindingPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...findingQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/findings/${id}`, { schema: FindingView, signal }),
    }),
};

/** One step in a finding's life, from the revision that was seen. */
export function useFindingStep(id: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({
      body,
      revision,
      key,
    }: {
      body: FindingStepInput;
      revision: number;
      key: string;
    }) =>
      api.post(`/findings/${id}/steps`, {
        body,
        schema: FindingView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSuccess: async (finding) => {
      client.setQueryData(findingQueries.one(id).queryKey, finding);
      await Promise.all([
        client.invalidateQueries({ queryKey: [...findingQueries.all, "list"] }),
        client.invalidateQueries({ queryKey: ["waiting"] }),
      ]);
    },
  });
}
