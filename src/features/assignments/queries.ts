import { useMutation, useQueryClient } from "@tanstack/react-query";
import { type AssignmentInput, AssignmentView } from "../../../shared/schemas/worker";
import { api } from "../../lib/api";

function useSettled() {
  const client = useQueryClient();
  return () =>
    Promise.all([
      client.invalidateQueries({ queryKey: ["workers"] }),
      client.invalidateQueries({ queryKey: ["waiting"] }),
    ]);
}

/** A protector for a use from a date; an open assignment of the same use ends the day before. */
export function useAssign(workerId: string) {
  const settled = useSettled();
  return useMutation({
    mutationFn: ({ body, key }: { body: AssignmentInput; key: string }) =>
      api.post(`/workers/${workerId}/assignments`, {
        body,
        schema: AssignmentView,
        idempotencyKey: key,
      }),
    onSuccess: settled,
  });
}

export function useEndAssignment({ id, revision }: Pick<AssignmentView, "id" | "revision">) {
  const settled = useSettled();
  return useMutation({
    mutationFn: (toDate: string) =>
      api.patch(`/assignments/${id}`, {
        body: { toDate },
        schema: AssignmentView,
        ifMatch: String(revision),
      }),
    onSettled: settled,
  });
}
