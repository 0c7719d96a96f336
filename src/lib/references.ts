import { queryOptions } from "@tanstack/react-query";
import { ProtectorList } from "../../shared/schemas/protector";
import { AreaList } from "../../shared/schemas/site";
import { TaskList } from "../../shared/schemas/task";
import { WorkerPage } from "../../shared/schemas/worker";
import type { Choice } from "../components/form";
import { api } from "./api";

/**
 * Lists of other features that a feature's form chooses from; a page takes that feature's own queries. Kept under the
 * same keys, so that a list is loaded once and a change of it is seen everywhere.
 */
export const references = {
  /** Of all sites that the reader knows. */
  everyTask: () =>
    queryOptions({
      queryKey: ["tasks", "list", null],
      queryFn: ({ signal }) => api.get("/tasks", { schema: TaskList, signal }),
    }),
  tasks: (siteId: string) =>
    queryOptions({
      queryKey: ["tasks", "list", siteId],
      queryFn: ({ signal }) => api.get("/tasks", { query: { siteId }, schema: TaskList, signal }),
      enabled: siteId !== "",
    }),
  areas: (siteId: string) =>
    queryOptions({
      queryKey: ["areas", "list", siteId],
      queryFn: ({ signal }) => api.get("/areas", { query: { siteId }, schema: AreaList, signal }),
      enabled: siteId !== "",
    }),
  protectors: () =>
    queryOptions({
      queryKey: ["protectors", "list"],
      queryFn: ({ signal }) => api.get("/protectors", { schema: ProtectorList, signal }),
    }),
};

/** Workers by name or number, for a field that finds one by typing. */
export async function searchWorkers(search: string, signal: AbortSignal): Promise<Choice[]> {
  const { rows } = await api.get("/workers", {
    query: { search, limit: 12 },
    schema: WorkerPage,
    signal,
  });
  return rows.map(({ id, name, employeeNumber, crewName }) => ({
    value: id,
    label: name,
    note: [employeeNumber, crewName].filter(Boolean).join(", "),
  }));
}
