import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import {
  CombinationList,
  ProtectorDetail,
  type ProtectorFileInput,
  ProtectorFileList,
  ProtectorList,
} from "../../../shared/schemas/protector";
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
  files: (id: string) =>
    queryOptions({
      queryKey: [...protectorQueries.all, id, "files"],
      queryFn: ({ signal }) =>
        api.get(`/protectors/${id}/files`, { schema: ProtectorFileList, signal }),
    }),
  combinations: (modelId: string) =>
    queryOptions({
      queryKey: [...protectorQueries.all, modelId, "combinations"],
      queryFn: ({ signal }) =>
        api.get("/protector-combinations", {
          query: { modelId },
          schema: CombinationList,
          signal,
        }),
    }),
};

/** Attaches a data sheet that was sent, or takes one off. */
export function useProtectorFiles(id: string) {
  const client = useQueryClient();
  const take = (list: z.infer<typeof ProtectorFileList>) =>
    client.setQueryData(protectorQueries.files(id).queryKey, list);
  const attach = useMutation({
    mutationFn: ({ body, key }: { body: ProtectorFileInput; key: string }) =>
      api.post(`/protectors/${id}/files`, {
        body,
        schema: ProtectorFileList,
        idempotencyKey: key,
      }),
    onSuccess: take,
  });
  const remove = useMutation({
    mutationFn: ({ fileId, reason, key }: { fileId: string; reason: string; key: string }) =>
      api.post(`/protectors/${id}/files/${fileId}/removal`, {
        body: { reason },
        schema: ProtectorFileList,
        idempotencyKey: key,
      }),
    onSuccess: take,
  });
  return { attach, remove };
}
