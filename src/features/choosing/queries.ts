import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import { ProtectorChoiceView } from "../../../shared/schemas/choice";
import { ManyAssigned, type ManyAssignmentsInput } from "../../../shared/schemas/worker";
import { api } from "../../lib/api";

export const choiceQueries = {
  choice: (query: { taskId?: string; jobId?: string }) =>
    queryOptions({
      queryKey: ["workers", "choice", query],
      queryFn: ({ signal }) =>
        api.get("/protector-choice", { query, schema: ProtectorChoiceView, signal }),
      enabled: query.taskId !== undefined || query.jobId !== undefined,
    }),
};

/** The same protector for many, all of them or none. */
export function useAssignMany() {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ body, key }: { body: ManyAssignmentsInput; key: string }) =>
      api.post("/assignments/many", { body, schema: ManyAssigned, idempotencyKey: key }),
    onSuccess: () =>
      Promise.all([
        client.invalidateQueries({ queryKey: ["workers"] }),
        client.invalidateQueries({ queryKey: ["protectors"] }),
        client.invalidateQueries({ queryKey: ["waiting"] }),
      ]),
  });
}
