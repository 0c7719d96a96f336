import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import type { z } from "zod";
import {
  FitDistribution,
  type FitTestChange,
  type FitTestInput,
  FitTestPage,
  FitTestView,
  FittingDesk,
  FittingFound,
  type IssueEnd,
  type IssueInput,
  IssuePage,
  IssueSaved,
  IssueView,
  type RefusalInput,
  RefusalList,
  RefusalSaved,
} from "../../../shared/schemas/fit";
import { api } from "../../lib/api";

interface OfWhom {
  readonly siteId?: string;
  readonly workerId?: string;
}

export const fitQueries = {
  desk: (workerId: string) =>
    queryOptions({
      queryKey: ["fits", "desk", workerId],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}/fitting`, { schema: FittingDesk, signal }),
    }),
  tests: (filter: OfWhom & { readonly modelId?: string }) =>
    infiniteQueryOptions({
      queryKey: ["fits", "tests", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/fit-tests", {
          query: { ...filter, cursor: pageParam },
          schema: FitTestPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  issues: (filter: OfWhom & { readonly state?: "open" | "all" }) =>
    infiniteQueryOptions({
      queryKey: ["fits", "issues", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/issues", { query: { ...filter, cursor: pageParam }, schema: IssuePage, signal }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  refusals: (workerId: string) =>
    queryOptions({
      queryKey: ["fits", "refusals", workerId],
      queryFn: ({ signal }) =>
        api.get(`/workers/${workerId}/refusals`, { schema: RefusalList, signal }),
      select: ({ rows }) => rows,
    }),
  distribution: (siteId: string) =>
    queryOptions({
      queryKey: ["fits", "distribution", siteId],
      queryFn: ({ signal }) =>
        api.get(`/sites/${siteId}/fits`, { schema: FitDistribution, signal }),
      select: ({ rows }) => rows,
    }),
};

/** Who stands at the desk, asked once when the number is sent. */
export const lookUp = (employeeNumber: string): Promise<FittingFound> =>
  api.get("/fitting/lookup", { query: { employeeNumber }, schema: FittingFound });

/** Fits and issues move the worker's protectors, stock, days and findings. */
function useSettled() {
  const client = useQueryClient();
  return () =>
    Promise.all(
      ["fits", "workers", "findings", "waiting", "stock"].map((name) =>
        client.invalidateQueries({ queryKey: [name] }),
      ),
    );
}

interface Keyed<Body> {
  readonly body: Body;
  readonly key: string;
}

export function useRecordFitTest(workerId: string) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: Keyed<FitTestInput>) =>
      api.post(`/workers/${workerId}/fit-tests`, {
        body,
        schema: FitTestView,
        idempotencyKey: key,
      }),
    onSuccess: settled,
  });
}

export function useCorrectFitTest({ id, revision }: Pick<FitTestView, "id" | "revision">) {
  const settled = useSettled();
  return useMutation({
    mutationFn: (body: FitTestChange) =>
      api.put(`/fit-tests/${id}`, { body, schema: FitTestView, ifMatch: String(revision) }),
    onSettled: settled,
  });
}

export function useVoidFitTest({ id, revision }: Pick<FitTestView, "id" | "revision">) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: Keyed<{ reason: string }>) =>
      api.post(`/fit-tests/${id}/void`, {
        body,
        schema: FitTestView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSettled: settled,
  });
}

export function useIssue(workerId: string) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: Keyed<IssueInput>) =>
      api.post(`/workers/${workerId}/issues`, { body, schema: IssueSaved, idempotencyKey: key }),
    onSuccess: settled,
  });
}

type Issue = Pick<IssueView, "id" | "revision">;

export function useEndIssue({ id, revision }: Issue) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: Keyed<z.infer<typeof IssueEnd>>) =>
      api.post(`/issues/${id}/end`, {
        body,
        schema: IssueView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSettled: settled,
  });
}

export function useAcknowledgeIssue() {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ id, revision }: Issue) =>
      api.post(`/issues/${id}/acknowledge`, {
        body: {},
        schema: IssueView,
        ifMatch: String(revision),
      }),
    onSettled: settled,
  });
}

export function useRecordRefusal(workerId: string) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: Keyed<RefusalInput>) =>
      api.post(`/workers/${workerId}/refusals`, {
        body,
        schema: RefusalSaved,
        idempotencyKey: key,
      }),
    onSuccess: settled,
  });
}
