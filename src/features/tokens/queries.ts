import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import type { TokenInput, TokenList, TokenView } from "../../../shared/schemas/api-token";
import { TokenMade } from "../../../shared/schemas/api-token";
import { api, newChangeKey } from "../../lib/api";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { ownReply } from "../../lib/own-reply";

export const tokenQueries = {
  all: ["tokens"] as const,
  ofUser: (userId: string) =>
    queryOptions({
      queryKey: ["tokens", userId],
      queryFn: ({ signal }) =>
        api.get("/tokens", {
          query: { userId },
          schema: ownReply<z.infer<typeof TokenList>>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
};

/** The key is of this one try: the answer to it is shown once, and no second try can ask for it. */
export function useMakeToken() {
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const make = useMutation({
    mutationFn: (body: TokenInput) =>
      api.post("/tokens", { body, schema: TokenMade, idempotencyKey: newChangeKey() }),
    onSuccess: () => void client.invalidateQueries({ queryKey: tokenQueries.all }),
    onSettled: end,
  });
  return { ...make, begin };
}

export function useEndToken(id: string) {
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const change = useMutation({
    mutationFn: () =>
      api.post(`/tokens/${id}/end`, {
        body: {},
        schema: ownReply<TokenView>("id", "state"),
        idempotencyKey: newChangeKey(),
      }),
    onSettled: () => {
      end();
      return client.invalidateQueries({ queryKey: tokenQueries.all });
    },
  });
  return { ...change, start: () => void (begin() && change.mutate()) };
}
