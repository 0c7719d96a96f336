import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import type { MappingList, MappingView } from "../../../shared/schemas/group-mapping";
import type { SiteList } from "../../../shared/schemas/site";
import type { UserList, UserView } from "../../../shared/schemas/user";
import type { VisitorList, VisitorView } from "../../../shared/schemas/visitor";
import type { SignInCodeView, WorkerName, WorkerNameList } from "../../../shared/schemas/worker";
import type { Choice } from "../../components/form";
import { api, newChangeKey } from "../../lib/api";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { ownReply } from "../../lib/own-reply";

/** Where one may give roles; `isAll`: also at all sites at once. */
export interface AdministeredSites {
  readonly sites: readonly { readonly id: string; readonly name: string }[];
  readonly isAll: boolean;
}

export const peopleQueries = {
  all: ["people"] as const,
  list: queryOptions({
    queryKey: ["people", "list"],
    queryFn: ({ signal }) =>
      api.get("/users", { schema: ownReply<z.infer<typeof UserList>>("rows"), signal }),
    select: ({ rows }) => rows,
  }),
  visitors: queryOptions({
    queryKey: ["people", "visitors"],
    queryFn: ({ signal }) =>
      api.get("/visitors", { schema: ownReply<z.infer<typeof VisitorList>>("rows"), signal }),
    select: ({ rows }) => rows,
  }),
  groups: queryOptions({
    queryKey: ["people", "groups"],
    queryFn: ({ signal }) =>
      api.get("/group-mappings", { schema: ownReply<z.infer<typeof MappingList>>("rows"), signal }),
    select: ({ rows }) => rows,
  }),
  sites: queryOptions({
    queryKey: ["people", "sites"],
    queryFn: ({ signal }) =>
      api.get("/sites", { schema: ownReply<z.infer<typeof SiteList>>("rows", "can"), signal }),
    select: ({ rows, can }): AdministeredSites => ({
      sites: rows.filter((site) => site.can.change).map(({ id, name }) => ({ id, name })),
      isAll: can.create,
    }),
  }),
};

/** Workers by name or number; of each what stands beneath the name. */
async function findWorkers(
  search: string,
  signal: AbortSignal,
  filter: { siteId?: string; who?: "present" | "all" },
  noteOf: (worker: WorkerName) => string,
): Promise<readonly Choice[]> {
  if (search.trim() === "") return [];
  const { rows } = await api.get("/worker-names", {
    query: { search: search.trim(), ...filter },
    schema: ownReply<z.infer<typeof WorkerNameList>>("rows"),
    signal,
  });
  return rows.map((worker) => ({ value: worker.id, label: worker.name, note: noteOf(worker) }));
}

/** To link a sign-in to. */
export const searchWorkers = (search: string, signal: AbortSignal) =>
  findWorkers(search, signal, {}, ({ employeeNumber }) => employeeNumber);

/** Those of a site who are there and those who left, to hold their records. */
export const searchPresentAndFormer =
  (siteId: string, leftWord: (date: string) => string) => (search: string, signal: AbortSignal) =>
    findWorkers(search, signal, { siteId, who: "all" }, ({ employeeNumber, leftOn }) =>
      leftOn === null ? employeeNumber : `${employeeNumber}, ${leftWord(leftOn)}`,
    );

export function useEndAccess(id: string, onEnded: () => void) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (revision: number) =>
      api.post(`/users/${id}/revoke`, {
        body: {},
        ifMatch: String(revision),
        schema: ownReply<UserView>("id", "revision"),
      }),
    // Here and not where it is called: the list read anew takes the button away, and its callbacks with it.
    onSuccess: onEnded,
    onSettled: () => client.invalidateQueries({ queryKey: peopleQueries.all }),
  });
}

export function useEndVisit(id: string, onEnded: () => void) {
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const change = useMutation({
    mutationFn: () =>
      api.post(`/visitors/${id}/end`, {
        body: {},
        schema: ownReply<VisitorView>("id", "endsAt"),
        idempotencyKey: newChangeKey(),
      }),
    onSuccess: onEnded,
    onSettled: () => {
      end();
      return client.invalidateQueries({ queryKey: peopleQueries.all });
    },
  });
  return { ...change, start: () => void (begin() && change.mutate()) };
}

export function useEndMapping(id: string, onEnded: () => void) {
  const client = useQueryClient();
  const { begin, end } = useOneAtATime();
  const change = useMutation({
    mutationFn: () =>
      api.post(`/group-mappings/${id}/end`, {
        body: {},
        schema: ownReply<MappingView>("id", "isEnded"),
        idempotencyKey: newChangeKey(),
      }),
    onSuccess: onEnded,
    onSettled: () => {
      end();
      return client.invalidateQueries({ queryKey: peopleQueries.all });
    },
  });
  return { ...change, start: () => void (begin() && change.mutate()) };
}

export function useIssueCode(workerId: string) {
  return useMutation({
    mutationFn: () =>
      api.post(`/workers/${workerId}/sign-in-codes`, {
        body: {},
        schema: ownReply<z.infer<typeof SignInCodeView>>("code", "expiresAt"),
      }),
  });
}
