import { queryOptions } from "@tanstack/react-query";
import { TaskDetail, TaskList } from "../../../shared/schemas/task";
import { api } from "../../lib/api";

export const taskQueries = {
  all: ["tasks"] as const,
  list: (siteId?: string) =>
    queryOptions({
      queryKey: [...taskQueries.all, "list", siteId ?? null],
      queryFn: ({ signal }) => api.get("/tasks", { query: { siteId }, schema: TaskList, signal }),
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...taskQueries.all, id],
      queryFn: ({ signal }) => api.get(`/tasks/${id}`, { schema: TaskDetail, signal }),
    }),
};
