import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import { AttendanceView } from "../../../shared/schemas/attendance";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { savedMeanwhile } from "../../lib/stale";
import { crewSheetQueries } from "./queries";

export const attendanceQuery = (crewId: string) =>
  queryOptions({
    queryKey: ["attendance", crewId],
    queryFn: ({ signal }) =>
      api.get(`/crews/${crewId}/attendance`, { schema: AttendanceView, signal }),
  });

export interface AttendanceChange {
  /** Behind the crew's own address. */
  readonly path: string;
  readonly method: "post" | "patch";
  readonly body: object;
  /** The revision that was seen; null where something new is added. */
  readonly revision: number | null;
}

/** One change of absences or loans; where somebody was quicker the lists show what stands, and what was typed stays. */
export function useChangeAttendance(crewId: string, onChanged?: () => void) {
  const client = useQueryClient();
  const key = useChangeKey();
  const { begin, end } = useOneAtATime();
  const show = (view: AttendanceView) =>
    client.setQueryData(attendanceQuery(crewId).queryKey, view);
  const change = useMutation({
    mutationFn: ({ path, method, body, revision }: AttendanceChange) =>
      api[method](`/crews/${crewId}/${path}`, {
        body,
        schema: AttendanceView,
        ...(revision !== null && { ifMatch: String(revision) }),
        ...(method === "post" && { idempotencyKey: key.keyFor({ path, body, revision }) }),
      }),
    onSuccess: (view) => {
      key.forget();
      show(view);
      void client.invalidateQueries({ queryKey: crewSheetQueries.all });
      onChanged?.();
    },
    onError: (error) => {
      const stands = savedMeanwhile(error, AttendanceView);
      if (stands) show(stands);
    },
    onSettled: end,
  });
  return {
    ...change,
    start: (...args: Parameters<typeof change.mutate>) => void (begin() && change.mutate(...args)),
  };
}
