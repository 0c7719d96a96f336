import { queryOptions } from "@tanstack/react-query";
import { ProtectorDetail, ProtectorList } from "../../../shared/schemas/protector";
import { api } from "../../lib/api";

export const protectorQueries = {
  all: ["protectors"] as const,
  list: () =>
    queryOptions({
      queryKey: [...protectorQueries.all, "list"],
      queryFn: ({ signal }) => api.get("/protectors", { schema: ProtectorList, signal }),
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...protectorQueries.all, id],
      queryFn: ({ signal }) => api.get(`/protectors/${id}`, { schema: ProtectorDetail, signal }),
    }),
};
