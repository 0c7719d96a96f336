import { queryOptions, useMutation, useQueryClient } from "@tanstack/react-query";
import {
  CalibrationHistory,
  type CalibrationInput,
  OutingBoard,
  type OutingReturn,
  type OutingStart,
  type SampleInput,
} from "../../../shared/schemas/outing";
import { RunView } from "../../../shared/schemas/run";
import { SurveyDetail } from "../../../shared/schemas/survey";
import { api } from "../../lib/api";

const SurveyTasks = SurveyDetail.pick({
  id: true,
  siteId: true,
  name: true,
  strategy: true,
  targets: true,
  nominalDay: true,
});

export const outingQueries = {
  all: ["outings"] as const,
  board: (siteId: string, date: string | null) =>
    queryOptions({
      queryKey: [...outingQueries.all, siteId, date],
      queryFn: ({ signal }) =>
        api.get(`/sites/${siteId}/outings`, { query: { date }, schema: OutingBoard, signal }),
      // Others send instruments out at the same desk.
      refetchInterval: 30_000,
    }),
  /** What a survey wants sampled. */
  surveyTasks: (surveyId: string) =>
    queryOptions({
      queryKey: ["surveys", "tasks", surveyId],
      queryFn: ({ signal }) => api.get(`/surveys/${surveyId}`, { schema: SurveyTasks, signal }),
    }),
  calibrations: (instrumentId: string) =>
    queryOptions({
      queryKey: ["instruments", "calibrations", instrumentId],
      queryFn: ({ signal }) =>
        api.get(`/instruments/${instrumentId}/calibrations`, {
          schema: CalibrationHistory,
          signal,
        }),
    }),
};

/** What a run that changed moves: the board, its day and what hangs from it. */
function useRunMoved() {
  const client = useQueryClient();
  return () => {
    for (const name of ["outings", "runs", "results", "workers", "findings", "waiting", "surveys"])
      void client.invalidateQueries({ queryKey: [name] });
  };
}

export function useStartOuting() {
  const moved = useRunMoved();
  return useMutation({
    mutationFn: ({ body, key }: { body: OutingStart; key: string }) =>
      api.post("/outings", { body, schema: RunView, idempotencyKey: key }),
    onSuccess: moved,
  });
}

export function useEndOuting() {
  const moved = useRunMoved();
  return useMutation({
    mutationFn: ({
      runId,
      revision,
      body,
      key,
    }: {
      runId: string;
      revision: number;
      body: OutingReturn;
      key: string;
    }) =>
      api.post(`/runs/${runId}/back`, {
        body,
        schema: RunView,
        ifMatch: String(revision),
        idempotencyKey: key,
      }),
    onSuccess: moved,
  });
}

export function useUndoOuting() {
  const moved = useRunMoved();
  return useMutation({
    mutationFn: ({
      runId,
      revision,
      reason,
    }: {
      runId: string;
      revision: number;
      reason: string;
    }) =>
      api.post(`/runs/${runId}/undo-out`, {
        body: { reason },
        schema: RunView,
        ifMatch: String(revision),
      }),
    onSuccess: moved,
  });
}

export function useRecordSample() {
  const moved = useRunMoved();
  return useMutation({
    mutationFn: ({ body, key }: { body: SampleInput; key: string }) =>
      api.post("/samples", { body, schema: RunView, idempotencyKey: key }),
    onSuccess: moved,
  });
}

export function useRecordCalibration(instrumentId: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ body, key }: { body: CalibrationInput; key: string }) =>
      api.post(`/instruments/${instrumentId}/calibrations`, {
        body,
        schema: CalibrationHistory,
        idempotencyKey: key,
      }),
    onSuccess: () => {
      for (const name of ["instruments", "references", "findings", "waiting", "outings"])
        void client.invalidateQueries({ queryKey: [name] });
    },
  });
}
