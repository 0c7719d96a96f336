import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import type { CrewList, CrewSheetRow, CrewSheetView } from "../../../shared/schemas/crew";
import type { FindingStepInput, FindingView } from "../../../shared/schemas/finding";
import { api } from "../../lib/api";
import { orLastSeen } from "../../lib/last-seen";
import { ownReply } from "../../lib/own-reply";

export const findingReply = ownReply<FindingView>("id", "state", "steps", "revision", "can");

export const crewSheetQueries = {
  all: ["crew-sheet"] as const,
  crews: queryOptions({
    queryKey: ["crew-sheet", "crews"],
    queryFn: ({ signal }) =>
      orLastSeen("crews", () =>
        api.get("/crews", { schema: ownReply<z.infer<typeof CrewList>>("rows"), signal }),
      ),
    networkMode: "always",
    select: ({ rows }) => rows.filter(({ isArchived }) => !isArchived),
  }),
  sheet: (crewId: string) =>
    queryOptions({
      queryKey: ["crew-sheet", "of", crewId],
      queryFn: ({ signal }) =>
        orLastSeen(`sheet ${crewId}`, () =>
          api.get(`/crews/${crewId}/sheet`, {
            schema: ownReply<CrewSheetView>("crew", "crews", "expected", "last"),
            signal,
          }),
        ),
      networkMode: "always",
    }),
  order: (findingId: string) =>
    queryOptions({
      queryKey: ["crew-sheet", "order", findingId],
      queryFn: ({ signal }) => api.get(`/findings/${findingId}`, { schema: findingReply, signal }),
    }),
};

export type SheetOrder = NonNullable<CrewSheetRow["order"]>;
export type OrderStep = Extract<
  FindingStepInput,
  { kind: "mark-done" | "cannot" | "undo" | "comment" }
>;

const withStep = (rows: readonly CrewSheetRow[], finding: FindingView): CrewSheetRow[] =>
  rows.map((row) =>
    row.order?.findingId === finding.id
      ? {
          ...row,
          order: {
            ...row.order,
            state: finding.state,
            cannot: finding.cannot,
            revision: finding.revision,
            canMarkDone: finding.can.markDone && !["done", "closed"].includes(finding.state),
          },
        }
      : row,
  );

/** One step on an order. It names the revision that was on the sheet; the row changes in its place and does not jump. */
export function useOrderStep(crewId: string, findingId: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({
      step,
      revision,
      idempotencyKey,
    }: {
      step: OrderStep;
      revision: number;
      idempotencyKey: string;
    }) =>
      api.post(`/findings/${findingId}/steps`, {
        body: step,
        ifMatch: String(revision),
        idempotencyKey,
        schema: findingReply,
      }),
    onSuccess: (finding) => {
      client.setQueryData(crewSheetQueries.sheet(crewId).queryKey, (sheet) =>
        sheet
          ? {
              ...sheet,
              expected: { ...sheet.expected, rows: withStep(sheet.expected.rows, finding) },
              last: { ...sheet.last, rows: withStep(sheet.last.rows, finding) },
            }
          : undefined,
      );
      client.setQueryData(crewSheetQueries.order(findingId).queryKey, finding);
    },
  });
}
