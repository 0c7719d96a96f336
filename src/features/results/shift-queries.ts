import { queryOptions, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { ShiftView } from "../../../shared/schemas/shift";
import { api } from "../../lib/api";

export type Shift = z.infer<typeof ShiftView>;

export const shiftQuery = (id: string) =>
  queryOptions({
    queryKey: ["results", "shift", id],
    queryFn: ({ signal }) => api.get(`/shifts/${id}`, { schema: ShiftView, signal }),
  });

/** A corrected shift moves its day's result, and what hangs from it. */
export function useShiftSaved() {
  const client = useQueryClient();
  return (shift: Shift) => {
    client.setQueryData(shiftQuery(shift.shiftId).queryKey, shift);
    void client.invalidateQueries({ queryKey: ["results", "day"] });
    for (const name of ["workers", "findings", "waiting"])
      void client.invalidateQueries({ queryKey: [name] });
  };
}
