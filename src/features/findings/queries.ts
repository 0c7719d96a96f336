import {
  infiniteQueryOptions,
  type QueryClient,
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
import {
  type FindingFileInput,
  FollowUpView,
  MeasureView,
} from "../../../shared/schemas/follow-up";
import { ApiError, api } from "../../lib/api";

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
  followUp: (id: string) =>
    queryOptions({
      queryKey: [...findingQueries.all, "follow-up", id],
      queryFn: ({ signal }) =>
        api.get(`/findings/${id}/follow-up`, { schema: FollowUpView, signal }),
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
      await refreshLists(client);
    },
    // Somebody was quicker: the lists still show the finding as it was.
    onError: (error) => {
      if (error instanceof ApiError && (error.status === 409 || error.status === 412))
        void refreshLists(client);
    },
  });
}

const refreshLists = (client: QueryClient) =>
  Promise.all([
    client.invalidateQueries({ queryKey: [...findingQueries.all, "list"] }),
    client.invalidateQueries({ queryKey: ["waiting"] }),
  ]);

/** What hangs on a finding was changed: it is asked for again. */
export function useFollowUpChanged(id: string) {
  const client = useQueryClient();
  return () => client.invalidateQueries({ queryKey: findingQueries.followUp(id).queryKey });
}

export function useStrikeMeasure(findingId: string) {
  const changed = useFollowUpChanged(findingId);
  return useMutation({
    mutationFn: ({ measure, reason, key }: { measure: MeasureView; reason: string; key: string }) =>
      api.post(`/findings/${findingId}/measures/${measure.id}/strike`, {
        body: { reason },
        schema: MeasureView,
        ifMatch: String(measure.revision),
        idempotencyKey: key,
      }),
    onSuccess: changed,
  });
}

const Files = FollowUpView.pick({ files: true });

export function useFindingFiles(findingId: string) {
  const changed = useFollowUpChanged(findingId);
  const attach = useMutation({
    mutationFn: ({ body, key }: { body: FindingFileInput; key: string }) =>
      api.post(`/findings/${findingId}/files`, { body, schema: Files, idempotencyKey: key }),
    onSuccess: changed,
  });
  const remove = useMutation({
    mutationFn: ({ fileId, reason, key }: { fileId: string; reason: string; key: string }) =>
      api.post(`/findings/${findingId}/files/${fileId}/removal`, {
        body: { reason },
        schema: Files,
        idempotencyKey: key,
      }),
    onSuccess: changed,
  });
  return { attach, remove };
}
