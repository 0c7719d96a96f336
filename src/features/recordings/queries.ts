import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import { useRef, useState } from "react";
import {
  CalibrationTone,
  type RecordingFaults,
  type RecordingKeep,
  RecordingPage,
  RecordingView,
} from "../../../shared/schemas/recording";
import { api } from "../../lib/api";
import { sendFile } from "../../lib/send-file";

/** While the work process is at it, its progress is asked for this often. */
const PROGRESS_MS = 1000;

export const isAtWork = (state: RecordingView["state"] | undefined): boolean =>
  state === "uploaded" || state === "analysing";

export const recordingQueries = {
  all: ["recordings"] as const,
  list: (filter: { taskId?: string; isKept?: "yes" } = {}) =>
    infiniteQueryOptions({
      queryKey: [...recordingQueries.all, "list", filter],
      queryFn: ({ pageParam, signal }) =>
        api.get("/recordings", {
          query: { ...filter, cursor: pageParam, limit: 20 },
          schema: RecordingPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...recordingQueries.all, "one", id],
      queryFn: ({ signal }) => api.get(`/recordings/${id}`, { schema: RecordingView, signal }),
      refetchInterval: ({ state }) => (isAtWork(state.data?.state) ? PROGRESS_MS : false),
    }),
};

export interface NewRecording {
  readonly file: File;
  readonly taskId: string;
  readonly calibration:
    | { readonly kind: "sensitivity"; readonly pascalPerFullScale: number }
    | { readonly kind: "tone"; readonly toneId: string }
    | { readonly kind: "none" };
  readonly keepReason: string | null;
  readonly deleteOn: string | null;
}

/** Sends a recording in, telling how far it is; `cancel` gives it up on the way. */
export function useSendRecording() {
  const client = useQueryClient();
  const aborter = useRef<AbortController | null>(null);
  const [progressPct, setProgressPct] = useState(0);
  const send = useMutation({
    mutationFn: ({ file, taskId, calibration, keepReason, deleteOn }: NewRecording) => {
      const body = new FormData();
      body.set("taskId", taskId);
      body.set("calibration", JSON.stringify(calibration));
      body.set("keepReason", keepReason ?? "");
      body.set("deleteOn", deleteOn ?? "");
      // Last, so that all that is said of it has come before it.
      body.set("file", file);
      aborter.current = new AbortController();
      setProgressPct(0);
      return sendFile("/recordings", {
        body,
        schema: RecordingView,
        signal: aborter.current.signal,
        onProgress: setProgressPct,
      });
    },
    onSuccess: (view) => {
      client.setQueryData(recordingQueries.one(view.id).queryKey, view);
      return client.invalidateQueries({ queryKey: [...recordingQueries.all, "list"] });
    },
  });
  const cancel = () => {
    aborter.current?.abort();
    send.reset();
  };
  return { send, progressPct, cancel };
}

export interface ToneFacts {
  readonly taskId: string;
  readonly toneDb: number;
  readonly frequencyHz: number;
}

export function measureTone(
  file: File,
  { taskId, toneDb, frequencyHz }: ToneFacts,
): Promise<CalibrationTone> {
  const body = new FormData();
  body.set("taskId", taskId);
  body.set("toneDb", String(toneDb));
  body.set("frequencyHz", String(frequencyHz));
  body.set("file", file);
  return sendFile("/recordings/tones", { body, schema: CalibrationTone });
}

function useOrder<Body>(id: string, order: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (body: Body) =>
      api.post(`/recordings/${id}/${order}`, { body, schema: RecordingView }),
    onSuccess: (view) => {
      client.setQueryData(recordingQueries.one(id).queryKey, view);
      return client.invalidateQueries({ queryKey: [...recordingQueries.all, "list"] });
    },
  });
}

export const useCancelRecording = (id: string) => useOrder<Record<string, never>>(id, "cancel");
export const useAcceptFaults = (id: string) => useOrder<RecordingFaults>(id, "faults");
export const useKeepAudio = (id: string) => useOrder<RecordingKeep>(id, "keeping");
export const useDeleteAudio = (id: string) => useOrder<Record<string, never>>(id, "audio-deletion");
