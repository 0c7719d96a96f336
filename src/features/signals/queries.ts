import { queryOptions } from "@tanstack/react-query";
import { WarningSignalDetail, WarningSignalList } from "../../../shared/schemas/warning-signal";
import { api } from "../../lib/api";

export const signalQueries = {
  all: ["warning-signals"] as const,
  list: (siteId?: string) =>
    queryOptions({
      queryKey: [...signalQueries.all, "list", siteId ?? null],
      queryFn: ({ signal }) =>
        api.get("/warning-signals", { query: { siteId }, schema: WarningSignalList, signal }),
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...signalQueries.all, id],
      queryFn: ({ signal }) =>
        api.get(`/warning-signals/${id}`, { schema: WarningSignalDetail, signal }),
    }),
};
