import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import { SiteList } from "../../../shared/schemas/site";
import { UserList, UserView } from "../../../shared/schemas/user";
import { SignInCodeView, WorkerNameList } from "../../../shared/schemas/worker";
import type { Choice } from "../../components/form";
import { api } from "../../lib/api";

export const peopleQueries = {
  all: ["people"] as const,
  list: queryOptions({
    queryKey: ["people", "list"],
    queryFn: ({ signal }) => api.get("/users", { schema: UserList, signal }),
    select: ({ rows }) => rows,
  }),
  sites: queryOptions({
    queryKey: ["people", "sites"],
    queryFn: ({ signal }) => api.get("/sites", { schema: SiteList, signal }),
    select: ({ rows }) => rows.map(({ id, name }) => ({ id, name })),
  }),
};

/** Workers by name or number, to link a sign-in to. */
export async function searchWorkers(
  search: string,
  signal: AbortSignal,
): Promise<readonly Choice[]> {
  if (search.trim() === "") return [];
  const { rows } = await api.get("/worker-names", {
    query: { search: search.trim() },
    schema: WorkerNameList,
    signal,
  });
  return rows.map(({ id, name, employeeNumber }) => ({
    value: id,
    label: name,
    note: employeeNumber,
  }));
}

export function useEndAccess(id: string, onEnded: () => void) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (revision: number) =>
      api.post(`/users/${id}/revoke`, { body: {}, ifMatch: String(revision), schema: UserView }),
    // Here and not where it is called: the list read anew takes the button away, and its callbacks with it.
    onSuccess: onEnded,
    onSettled: () => client.invalidateQueries({ queryKey: peopleQueries.all }),
  });
}

export function useIssueCode(workerId: string) {
  return useMutation({
    mutationFn: () =>
      api.post(`/workers/${workerId}/sign-in-codes`, { body: {}, schema: SignInCodeView }),
  });
}
