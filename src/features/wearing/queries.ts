import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import {
  OwnReports,
  WearingCrews,
  WearingRoundPage,
  WearingRoundView,
  WearingTally,
} from "../../../shared/schemas/wearing";
import type { WorkerView } from "../../../shared/schemas/worker";
import { api } from "../../lib/api";
import { orLastSeen } from "../../lib/last-seen";
import { ownReply } from "../../lib/own-reply";
import type { PendingRound } from "./tally";

export const wearingQueries = {
  crews: (date: string) =>
    queryOptions({
      queryKey: ["wearing", "crews", date],
      queryFn: ({ signal }) =>
        orLastSeen(`wearing-crews ${date}`, () =>
          api.get("/wearing-crews", { query: { date }, schema: WearingCrews, signal }),
        ),
      networkMode: "always",
      select: ({ rows }) => rows,
    }),
  tally: (crewId: string, date: string) =>
    queryOptions({
      queryKey: ["wearing", "tally", crewId, date],
      queryFn: ({ signal }) =>
        orLastSeen(`wearing-tally ${crewId} ${date}`, () =>
          api.get(`/crews/${crewId}/wearing-tally`, {
            query: { date },
            schema: WearingTally,
            signal,
          }),
        ),
      networkMode: "always",
    }),
  /** The site of a worker's own, under which an own report goes. */
  ownSite: (workerId: string) =>
    queryOptions({
      queryKey: ["wearing", "own-site", workerId],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}`, {
          schema: ownReply<Pick<WorkerView, "siteId">>("siteId"),
          signal,
        }),
      select: ({ siteId }) => siteId,
    }),
  /** What a worker said of their own wearing from a day on. */
  ownReports: (workerId: string, from: string) =>
    queryOptions({
      queryKey: ["wearing", "own-reports", workerId, from],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}/own-reports`, {
          query: { from },
          schema: OwnReports,
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  rounds: (filter: { siteId?: string | undefined }) =>
    infiniteQueryOptions({
      queryKey: ["wearing", "rounds", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/wearing-rounds", {
          query: { ...filter, cursor: pageParam },
          schema: WearingRoundPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
};

/** Looks are the wearing time of days that say none: those move with them. */
function useSettled() {
  const client = useQueryClient();
  return () => {
    for (const name of ["wearing", "results", "days", "workers", "findings", "waiting", "me"])
      void client.invalidateQueries({ queryKey: [name] });
  };
}

export function useSendRound() {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: PendingRound) =>
      api.post("/wearing-rounds", { body, schema: WearingRoundView, idempotencyKey: key }),
    onSuccess: settled,
  });
}

export function useStrikeRound({ id, revision }: Pick<WearingRoundView, "id" | "revision">) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: { body: { reason: string }; key: string }) =>
      api.post(`/wearing-rounds/${id}/strike`, {
        body,
        schema: WearingRoundView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSettled: settled,
  });
}
