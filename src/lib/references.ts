import { queryOptions } from "@tanstack/react-query";
import { CrewList } from "../../shared/schemas/crew";
import { ProtectorList } from "../../shared/schemas/protector";
import { InstrumentList } from "../../shared/schemas/run";
import { AreaList, SiteList } from "../../shared/schemas/site";
import { JobList, TaskList } from "../../shared/schemas/task";
import { WorkerPage } from "../../shared/schemas/worker";
import type { Choice } from "../components/form";
import { api } from "./api";

/** Lists that forms of several features choose from. Their own pages keep them under keys of their own. */
const MINUTES = 60_000;
const key = (name: string, siteId?: string) => ["references", name, siteId ?? "all"] as const;

export const references = {
  sites: () =>
    queryOptions({
      queryKey: key("sites"),
      queryFn: ({ signal }) => api.get("/sites", { schema: SiteList, signal }),
      staleTime: MINUTES,
    }),
  crews: () =>
    queryOptions({
      queryKey: key("crews"),
      queryFn: ({ signal }) => api.get("/crews", { schema: CrewList, signal }),
      staleTime: MINUTES,
    }),
  jobs: (siteId: string) =>
    queryOptions({
      queryKey: key("jobs", siteId),
      queryFn: ({ signal }) => api.get("/jobs", { query: { siteId }, schema: JobList, signal }),
      staleTime: MINUTES,
      enabled: siteId !== "",
    }),
  tasks: (siteId: string) =>
    queryOptions({
      queryKey: key("tasks", siteId),
      queryFn: ({ signal }) => api.get("/tasks", { query: { siteId }, schema: TaskList, signal }),
      staleTime: MINUTES,
      enabled: siteId !== "",
    }),
  areas: (siteId: string) =>
    queryOptions({
      queryKey: key("areas", siteId),
      queryFn: ({ signal }) => api.get("/areas", { query: { siteId }, schema: AreaList, signal }),
      staleTime: MINUTES,
      enabled: siteId !== "",
    }),
  protectors: () =>
    queryOptions({
      queryKey: key("protectors"),
      queryFn: ({ signal }) => api.get("/protectors", { schema: ProtectorList, signal }),
      staleTime: MINUTES,
    }),
  instruments: () =>
    queryOptions({
      queryKey: key("instruments"),
      queryFn: ({ signal }) => api.get("/instruments", { schema: InstrumentList, signal }),
      staleTime: MINUTES,
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
