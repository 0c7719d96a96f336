import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import type { ZodType, z } from "zod";
import {
  type ErasureInput,
  ErasureList,
  ErasureView,
  FormerWorkerPage,
  type HoldInput,
  HoldList,
  HoldView,
  TermView,
} from "../../../shared/schemas/retention";
import { api, newChangeKey } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";

/** While an order is being done, how far it is is asked so often, ms. */
const ASKED_EVERY_MS = 2000;

const all = ["retention"] as const;

export const retentionQueries = {
  all,
  term: queryOptions({
    queryKey: [...all, "term"],
    queryFn: ({ signal }) => api.get("/retention", { schema: TermView, signal }),
  }),
  people: (show: "due" | "kept", siteId: string | null) =>
    infiniteQueryOptions({
      queryKey: [...all, "people", show, siteId],
      queryFn: ({ signal, pageParam }) =>
        api.get("/retention/people", {
          query: { show, siteId, cursor: pageParam },
          schema: FormerWorkerPage,
          signal,
        }),
      initialPageParam: null as string | null,
      getNextPageParam: ({ next }: z.infer<typeof FormerWorkerPage>) => next,
    }),
  holds: queryOptions({
    queryKey: [...all, "holds"],
    queryFn: ({ signal }) => api.get("/legal-holds", { schema: HoldList, signal }),
    select: ({ rows }) => rows,
  }),
  erasures: queryOptions({
    queryKey: [...all, "erasures"],
    queryFn: ({ signal }) => api.get("/erasures", { schema: ErasureList, signal }),
    select: ({ rows }) => rows,
    refetchInterval: ({ state }) =>
      state.data?.rows.some((one) => one.state === "approved") ? ASKED_EVERY_MS : false,
  }),
};

/** One change at a time; the lists are asked anew after it. */
export function useRetentionChange<Input, View>(
  send: (input: Input) => Promise<View>,
  onDone: (view: View) => void,
) {
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const change = useMutation({
    mutationFn: send,
    onSuccess: onDone,
    onSettled: () => {
      end();
      return client.invalidateQueries({ queryKey: all });
    },
  });
  return {
    ...change,
    start: (input: Input, options?: { onError: (error: unknown) => void }) => {
      if (begin()) change.mutate(input, options);
    },
  };
}

export function usePropose(onDone: (view: ErasureView) => void) {
  const changeKey = useChangeKey();
  return useRetentionChange(
    (body: ErasureInput) =>
      api.post("/erasures", { body, schema: ErasureView, idempotencyKey: changeKey.keyFor(body) }),
    (view) => {
      changeKey.forget();
      onDone(view);
    },
  );
}

/** Approval or withdrawal of what one person proposed and another decides. */
export function useDecision<View>(
  path: string,
  schema: ZodType<View>,
  revision: number,
  onDone: () => void,
) {
  return useRetentionChange(
    (what: "approval" | "withdrawal") =>
      api.post(`${path}/${what}`, {
        body: {},
        ifMatch: String(revision),
        schema,
        idempotencyKey: newChangeKey(),
      }),
    onDone,
  );
}

export function usePlaceHold(onDone: () => void) {
  const changeKey = useChangeKey();
  return useRetentionChange(
    (body: HoldInput) =>
      api.post("/legal-holds", {
        body,
        schema: HoldView,
        idempotencyKey: changeKey.keyFor(body),
      }),
    () => {
      changeKey.forget();
      onDone();
    },
  );
}

export function useLiftHold(id: string, onDone: () => void) {
  return useRetentionChange(
    (body: { reason: string }) =>
      api.post(`/legal-holds/${id}/lift`, {
        body,
        schema: HoldView,
        idempotencyKey: newChangeKey(),
      }),
    onDone,
  );
}
