import {
  infiniteQueryOptions,
  keepPreviousData,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import type { z } from "zod";
import type {
  EmployerShareList,
  EmployerShareView,
  SharedResultPage,
} from "../../../shared/schemas/employer-share";
import { api, newChangeKey } from "../../lib/api";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { ownReply } from "../../lib/own-reply";

export const shareQueries = {
  all: ["employer-shares"] as const,
  at: (siteId: string) =>
    queryOptions({
      queryKey: ["employer-shares", siteId],
      queryFn: ({ signal }) =>
        api.get(`/sites/${siteId}/employer-shares`, {
          schema: ownReply<z.infer<typeof EmployerShareList>>("rows", "employers"),
          signal,
        }),
    }),
  results: (days: { from: string | undefined; to: string | undefined }) =>
    infiniteQueryOptions({
      queryKey: ["shared-results", days],
      queryFn: ({ pageParam, signal }) =>
        api.get("/shared-results", {
          query: { ...days, cursor: pageParam },
          schema: ownReply<SharedResultPage>("rows", "next", "shares"),
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
      placeholderData: keepPreviousData,
    }),
};

export function useEndShare(id: string, onEnded: () => void) {
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const change = useMutation({
    mutationFn: () =>
      api.post(`/employer-shares/${id}/end`, {
        body: {},
        schema: ownReply<EmployerShareView>("id", "endsAt"),
        idempotencyKey: newChangeKey(),
      }),
    onSuccess: onEnded,
    onSettled: () => {
      end();
      return client.invalidateQueries({ queryKey: shareQueries.all });
    },
  });
  return { ...change, start: () => void (begin() && change.mutate()) };
}
