import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import type { z } from "zod";
import { type LetterFilter, LetterPage, LetterView } from "../../../shared/schemas/letter";
import { api } from "../../lib/api";

export interface LetterListFilter {
  readonly show: z.output<typeof LetterFilter>["show"];
  readonly siteId?: string;
}

export const letterQueries = {
  all: ["letters"] as const,
  list: (filter: LetterListFilter) =>
    infiniteQueryOptions({
      queryKey: [...letterQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/letters", {
          query: { ...filter, cursor: pageParam },
          schema: LetterPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...letterQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/letters/${id}`, { schema: LetterView, signal }),
    }),
};

/** A letter that was signed on paper. `onSaved` also where the form goes with it. */
export function useAcknowledgeOnPaper(id: string, onSaved: () => void) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ body, key }: { body: { signedOn: string }; key: string }) =>
      api.post(`/letters/${id}/acknowledgement`, {
        body,
        schema: LetterView,
        idempotencyKey: key,
      }),
    onSuccess: async (letter) => {
      onSaved();
      client.setQueryData(letterQueries.one(id).queryKey, letter);
      await Promise.all([
        client.invalidateQueries({ queryKey: [...letterQueries.all, "list"] }),
        client.invalidateQueries({ queryKey: ["waiting"] }),
      ]);
    },
  });
}
