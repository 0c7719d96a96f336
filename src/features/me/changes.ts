import { useMutation, useQueryClient } from "@tanstack/react-query";
import type { IssueView } from "../../../shared/schemas/fit";
import { api } from "../../lib/api";
import { ownReply } from "../../lib/own-reply";
import { ownQueries } from "./queries";

export function useReportProblem(workerId: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ text, idempotencyKey }: { text: string; idempotencyKey: string }) =>
      api.post(`/workers/${workerId}/problems`, {
        body: { text },
        idempotencyKey,
        schema: ownReply<{ id: string }>("id"),
      }),
    onSuccess: () => client.invalidateQueries({ queryKey: ownQueries.all }),
  });
}

/** That a device was received, said by its wearer. */
export function useAcknowledgeOwn(workerId: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ id, revision }: Pick<IssueView, "id" | "revision">) =>
      api.post(`/issues/${id}/acknowledge`, {
        body: {},
        schema: ownReply<{ id: string }>("id"),
        ifMatch: String(revision),
      }),
    onSettled: () => client.invalidateQueries({ queryKey: ["me", workerId] }),
  });
}
