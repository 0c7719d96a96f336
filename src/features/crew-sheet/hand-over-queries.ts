import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import {
  HandOverDraft,
  type HandOverInput,
  HandOverPage,
  HandOverView,
} from "../../../shared/schemas/hand-over";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { savedMeanwhile } from "../../lib/stale";
import { crewSheetQueries } from "./queries";

export const handOverQueries = {
  draft: (crewId: string) =>
    queryOptions({
      queryKey: ["hand-over", crewId, "draft"],
      queryFn: ({ signal }) =>
        api.get(`/crews/${crewId}/hand-over-draft`, { schema: HandOverDraft, signal }),
    }),
  list: (crewId: string) =>
    infiniteQueryOptions({
      queryKey: ["hand-over", crewId, "list"],
      queryFn: ({ pageParam, signal }) =>
        api.get(`/crews/${crewId}/hand-overs`, {
          query: { cursor: pageParam, limit: 20 },
          schema: HandOverPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
};

/** Gives what is shown; where the sheet has changed since, what it is now is shown in its stead and nothing is given. */
export function useGiveHandOver(crewId: string) {
  const client = useQueryClient();
  const key = useChangeKey();
  const { begin, end } = useOneAtATime();
  const give = useMutation({
    mutationFn: (body: HandOverInput) =>
      api.post(`/crews/${crewId}/hand-overs`, {
        body,
        schema: HandOverView,
        idempotencyKey: key.keyFor(body),
      }),
    onSuccess: () => {
      key.forget();
      void client.invalidateQueries({ queryKey: handOverQueries.list(crewId).queryKey });
    },
    onError: (error) => {
      const now = savedMeanwhile(error, HandOverDraft);
      if (now) client.setQueryData(handOverQueries.draft(crewId).queryKey, now);
    },
    onSettled: end,
  });
  return {
    ...give,
    start: (...args: Parameters<typeof give.mutate>) => void (begin() && give.mutate(...args)),
  };
}

/** `onReceived` is told once it stands among the earlier ones. */
export function useReceiveHandOver(crewId: string, id: string, onReceived: () => void) {
  const client = useQueryClient();
  const key = useChangeKey();
  const { begin, end } = useOneAtATime();
  const receive = useMutation({
    mutationFn: () =>
      api.post(`/hand-overs/${id}/receipt`, {
        body: {},
        schema: HandOverView,
        idempotencyKey: key.keyFor(id),
      }),
    onSuccess: () => void client.invalidateQueries({ queryKey: crewSheetQueries.all }),
    onSettled: async (received) => {
      end();
      await client.invalidateQueries({ queryKey: handOverQueries.list(crewId).queryKey });
      if (received) onReceived();
    },
  });
  return { ...receive, start: () => void (begin() && receive.mutate()) };
}
