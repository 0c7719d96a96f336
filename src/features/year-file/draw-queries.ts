import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import {
  type DrawInput,
  DrawPage,
  type DrawRow,
  DrawView,
  type MarkInput,
} from "../../../shared/schemas/draw";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import type { YearOfSite } from "./queries";

export const drawQueries = {
  all: ["draws"] as const,
  list: ({ siteId, year }: YearOfSite) =>
    infiniteQueryOptions({
      queryKey: [...drawQueries.all, "list", siteId, year],
      queryFn: ({ pageParam, signal }) =>
        api.get("/draws", {
          query: { siteId, year, cursor: pageParam, limit: 20 },
          schema: DrawPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...drawQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/draws/${id}`, { schema: DrawView, signal }),
    }),
};

/** One change of draws, let through once at a time; what comes back stands on the page at once. */
function useDrawChange<Body>(send: (body: Body, key: string) => Promise<DrawView>) {
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const change = useMutation({
    mutationFn: (body: Body) => send(body, changeKey.keyFor(body)),
    onSuccess: (view) => {
      changeKey.forget();
      client.setQueryData(drawQueries.one(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: [...drawQueries.all, "list"] });
    },
    onSettled: end,
  });
  return { ...change, begin };
}

export const useDrawRecords = () =>
  useDrawChange((body: DrawInput, idempotencyKey) =>
    api.post("/draws", { body, schema: DrawView, idempotencyKey }),
  );

export const useMarkDrawn = (id: string) =>
  useDrawChange((body: MarkInput, idempotencyKey) =>
    api.post(`/draws/${id}/marks`, { body, schema: DrawView, idempotencyKey }),
  );

export const useSignDraw = ({ id }: Pick<DrawRow, "id">) =>
  useDrawChange(({ revision }: { revision: number }, idempotencyKey) =>
    api.post(`/draws/${id}/signature`, {
      body: {},
      schema: DrawView,
      ifMatch: String(revision),
      idempotencyKey,
    }),
  );
