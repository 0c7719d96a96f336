import {
  ApiError,
  apiAddress,
  apiHeaders,
  connectionEvents,
  newChangeKey,
  type ReplySchema,
  stateOf401,
  toProblem,
} from "./api";

export interface FileToSend<T> {
  readonly body: FormData;
  readonly schema: ReplySchema<T>;
  readonly idempotencyKey?: string;
  readonly signal?: AbortSignal;
  /** 0 to 100; fetch can't say it. */
  readonly onProgress?: (progressPct: number) => void;
}

/** Sends a form with a large file, telling how far it is. */
export function sendFile<T>(
  path: string,
  { body, schema, idempotencyKey = newChangeKey(), signal, onProgress }: FileToSend<T>,
): Promise<T> {
  return new Promise<T>((resolve, reject) => {
    const request = new XMLHttpRequest();
    request.open("POST", apiAddress(path));
    for (const [name, value] of apiHeaders(idempotencyKey)) request.setRequestHeader(name, value);
    request.upload.onprogress = ({ loaded, total }) => onProgress?.((100 * loaded) / total);
    request.onload = () => {
      let reply: unknown = null;
      try {
        reply = JSON.parse(request.responseText);
      } catch {
        // What is no JSON is a problem without a code.
      }
      if (request.status >= 400) {
        const problem = toProblem(request.status, request.statusText, reply);
        connectionEvents.tell(request.status === 401 ? stateOf401(problem.code) : "ok");
        reject(problem);
      } else {
        connectionEvents.tell("ok");
        try {
          resolve(schema.parse(reply));
        } catch (error) {
          reject(error);
        }
      }
    };
    request.onerror = () => {
      connectionEvents.tell("offline");
      reject(new ApiError(0, "no-connection", {}, [], null, "No connection"));
    };
    request.onabort = () => reject(signal?.reason ?? new DOMException("Aborted", "AbortError"));
    signal?.addEventListener("abort", () => request.abort(), { once: true });
    request.send(body);
  });
}
