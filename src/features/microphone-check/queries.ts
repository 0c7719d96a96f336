import {
  infiniteQueryOptions,
  queryOptions,
  useMutation,
  useQueryClient,
} from "@tanstack/react-query";
import { useRef, useState } from "react";
import {
  type CheckInput,
  type CheckKeep,
  MicrophoneCheckPage,
  MicrophoneCheckView,
  type TypedCheckInput,
} from "../../../shared/schemas/microphone-check";
import { CalibrationTone } from "../../../shared/schemas/recording";
import { api } from "../../lib/api";
import { sendFile } from "../../lib/send-file";

/** While the work process is at it, its progress is asked for this often. */
const PROGRESS_MS = 1000;

export const checkQueries = {
  all: ["microphone-checks"] as const,
  list: (workerId: string) =>
    infiniteQueryOptions({
      queryKey: [...checkQueries.all, "list", workerId],
      queryFn: ({ pageParam, signal }) =>
        api.get(`/workers/${workerId}/microphone-checks`, {
          query: { cursor: pageParam, limit: 20 },
          schema: MicrophoneCheckPage,
          signal,
        }),
      initialPageParam: undefined as string | undefined,
      getNextPageParam: ({ next }) => next ?? undefined,
    }),
  one: (id: string) =>
    queryOptions({
      queryKey: [...checkQueries.all, "one", id],
      queryFn: ({ signal }) =>
        api.get(`/microphone-checks/${id}`, { schema: MicrophoneCheckView, signal }),
      refetchInterval: ({ state }) => (state.data?.state === "analysing" ? PROGRESS_MS : false),
    }),
};

function useSettled() {
  const client = useQueryClient();
  return (view: MicrophoneCheckView) => {
    client.setQueryData(checkQueries.one(view.id).queryKey, view);
    return client.invalidateQueries({ queryKey: [...checkQueries.all, "list"] });
  };
}

/** Sends the recordings in, telling how far it is; `cancel` gives it up on the way. */
export function useSendCheck(workerId: string) {
  const onSuccess = useSettled();
  const aborter = useRef<AbortController | null>(null);
  const [progressPct, setProgressPct] = useState(0);
  const send = useMutation({
    mutationFn: ({ check, files }: { check: CheckInput; files: readonly File[] }) => {
      const body = new FormData();
      body.set("check", JSON.stringify(check));
      for (const file of files) body.append("files", file);
      aborter.current = new AbortController();
      setProgressPct(0);
      return sendFile(`/workers/${workerId}/microphone-checks`, {
        body,
        schema: MicrophoneCheckView,
        signal: aborter.current.signal,
        onProgress: setProgressPct,
      });
    },
    onSuccess,
  });
  const cancel = () => {
    aborter.current?.abort();
    send.reset();
  };
  return { send, progressPct, cancel };
}

export function useTypeCheck(workerId: string) {
  const onSuccess = useSettled();
  return useMutation({
    mutationFn: (body: TypedCheckInput) =>
      api.post(`/workers/${workerId}/microphone-checks/typed`, {
        body,
        schema: MicrophoneCheckView,
      }),
    onSuccess,
  });
}

export interface ToneFacts {
  readonly siteId: string;
  readonly toneDb: number;
}

export function measureTone(file: File, { siteId, toneDb }: ToneFacts): Promise<CalibrationTone> {
  const body = new FormData();
  body.set("siteId", siteId);
  body.set("toneDb", String(toneDb));
  body.set("file", file);
  return sendFile("/recordings/tones", { body, schema: CalibrationTone });
}

function useOrder<Body>(id: string, order: string) {
  const onSuccess = useSettled();
  return useMutation({
    mutationFn: (body: Body) =>
      api.post(`/microphone-checks/${id}/${order}`, { body, schema: MicrophoneCheckView }),
    onSuccess,
  });
}

export const useCancelCheck = (id: string) => useOrder<Record<string, never>>(id, "cancel");
export const useSwapCheck = (id: string) => useOrder<Record<string, never>>(id, "swap");

/** A fit moves the worker's fits, findings and days. */
export function useKeepCheck(id: string) {
  const client = useQueryClient();
  const onSuccess = useSettled();
  return useMutation({
    mutationFn: (body: CheckKeep) =>
      api.post(`/microphone-checks/${id}/keep`, { body, schema: MicrophoneCheckView }),
    onSuccess: async (view) => {
      await onSuccess(view);
      await Promise.all(
        ["fits", "findings", "workers"].map((name) =>
          client.invalidateQueries({ queryKey: [name] }),
        ),
      );
    },
  });
}
