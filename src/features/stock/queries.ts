import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import type { z } from "zod";
import { IssueView } from "../../../shared/schemas/fit";
import {
  type ReplacementDue,
  type ReplacementInput,
  ReplacementPage,
  StockList,
  type StockMoveInput,
  StockMovePage,
  StockMoveView,
} from "../../../shared/schemas/stock";
import { api } from "../../lib/api";

export type StockMove = z.infer<typeof StockMoveView>;
export type Replacement = z.infer<typeof ReplacementDue>;

interface AtSite {
  readonly siteId: string | undefined;
}

export const stockQueries = {
  /** Also what fits and issues move: see their queries. */
  all: ["stock"] as const,
  there: (filter: AtSite) =>
    queryOptions({
      queryKey: [...stockQueries.all, "there", filter],
      queryFn: ({ signal }) =>
        api.get("/stock", { query: { ...filter }, schema: StockList, signal }),
      select: ({ rows }) => rows,
    }),
  moves: (filter: AtSite) =>
    infiniteQueryOptions({
      queryKey: [...stockQueries.all, "moves", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/stock/moves", {
          query: { ...filter, cursor: pageParam },
          schema: StockMovePage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  replacements: (filter: AtSite) =>
    infiniteQueryOptions({
      queryKey: [...stockQueries.all, "replacements", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/stock/replacements", {
          query: { ...filter, cursor: pageParam },
          schema: ReplacementPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
};

/** What is on the shelf stands on the fitting desk too. */
function useSettled() {
  const client = useQueryClient();
  return () =>
    Promise.all(
      [stockQueries.all, ["fits"]].map((queryKey) => client.invalidateQueries({ queryKey })),
    );
}

export function useEnterStock() {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: { body: StockMoveInput; key: string }) =>
      api.post("/stock/moves", { body, schema: StockMoveView, idempotencyKey: key }),
    onSuccess: settled,
  });
}

export function useChangeParts() {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({
      issueId,
      body,
      key,
    }: {
      issueId: string;
      body: z.infer<typeof ReplacementInput>;
      key: string;
    }) =>
      api.post(`/issues/${issueId}/replacements`, {
        body,
        schema: IssueView,
        idempotencyKey: key,
      }),
    onSuccess: settled,
  });
}
