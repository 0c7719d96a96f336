/** Any schema with a `parse`: zod, zod/mini or a plain function's object, so that this file brings none of them. */
export interface ReplySchema<T> {
  parse(value: unknown): T;
}

export interface Issue {
  /** Where in the body: "tasks.2.durationMin"; empty for the whole. */
  readonly path: string;
  readonly code: string;
  readonly params: Readonly<Record<string, string | number>>;
}

/** What the server said no with (application/problem+json), or that it could not be reached (`status` 0). */
export class ApiError extends Error {
  override readonly name = "ApiError";
  constructor(
    readonly status: number,
    readonly code: string,
    readonly params: Readonly<Record<string, string | number>>,
    readonly issues: readonly Issue[],
    /** The problem as it came: a 412 carries both versions. */
    readonly body: unknown,
    title: string,
  ) {
    super(title);
  }
}

/** Not refused, but not received, or by a server that can't do anything: the same may be sent again. */
export const isUnreached = (error: unknown): boolean =>
  error instanceof ApiError && (error.status === 0 || error.status >= 502);

/**
 * `unavailable`: the server answers, but can't do anything, as without its database. `access-over`: signed in, but nothing
 * is granted any more.
 */
export type ConnectionState = "ok" | "offline" | "unavailable" | "session-expired" | "access-over";

/** What an answer of 401 says about whoever is signed in. */
export const stateOf401 = (code: string): ConnectionState =>
  code === "access-ended" || code === "access-taken" ? "access-over" : "session-expired";

function createConnectionEvents() {
  let state: ConnectionState = "ok";
  const listeners = new Set<(state: ConnectionState) => void>();
  return {
    subscribe(listener: (state: ConnectionState) => void): () => void {
      listeners.add(listener);
      listener(state);
      return () => void listeners.delete(listener);
    },
    tell(next: ConnectionState): void {
      if (next === state) return;
      state = next;
      for (const listener of listeners) listener(next);
    },
    now: (): ConnectionState => state,
  };
}

/** A page that shows a banner listens here; nothing navigates away, so what is typed survives. */
export const connectionEvents = createConnectionEvents();

type QueryValue = string | number | boolean | null | undefined;

export interface RequestOptions<T> {
  readonly schema: ReplySchema<T>;
  readonly query?: Readonly<Record<string, QueryValue | readonly string[]>>;
  readonly signal?: AbortSignal;
  /** Asks whether anybody is signed in: a 401 is then the answer and no lost session. */
  readonly asksWhoIsThere?: boolean;
}

export interface ChangeOptions<T> extends RequestOptions<T> {
  /** JSON, or a form with a file. */
  readonly body?: unknown;
  /** Revision that the change starts from, as its ETag: another in between is a 412. */
  readonly ifMatch?: string;
  /** One a change, kept by whoever may send the change again (`newChangeKey`). */
  readonly idempotencyKey?: string;
}

/** For replies without a body. */
export const noReply: ReplySchema<null> = { parse: () => null };

/** The key under which a change counts once, however often it is sent. */
export function newChangeKey(): string {
  return crypto.randomUUID();
}

const BASE = "/api";
const CSRF_COOKIE = "dinward.csrf";

function csrfToken(): string | null {
  const entry = document.cookie.split("; ").find((part) => part.startsWith(`${CSRF_COOKIE}=`));
  return entry ? decodeURIComponent(entry.slice(CSRF_COOKIE.length + 1)) : null;
}

function address(path: string, query: RequestOptions<unknown>["query"]): string {
  const search = new URLSearchParams();
  for (const [name, value] of Object.entries(query ?? {})) {
    if (value === null || value === undefined) continue;
    if (Array.isArray(value)) for (const item of value) search.append(name, item);
    else search.set(name, String(value));
  }
  const text = search.toString();
  return `${BASE}${path}${text ? `?${text}` : ""}`;
}

const isRecord = (value: unknown): value is Record<string, unknown> =>
  typeof value === "object" && value !== null && !Array.isArray(value);

function readParams(value: unknown): Record<string, string | number> {
  if (!isRecord(value)) return {};
  return Object.fromEntries(
    Object.entries(value).filter(
      (entry): entry is [string, string | number] =>
        typeof entry[1] === "string" || typeof entry[1] === "number",
    ),
  );
}

function readIssues(value: unknown): Issue[] {
  if (!Array.isArray(value)) return [];
  return value.filter(isRecord).map((issue) => ({
    path: Array.isArray(issue.path) ? issue.path.join(".") : String(issue.path ?? ""),
    code: String(issue.code ?? "invalid"),
    params: readParams(issue.params),
  }));
}

export function toProblem(status: number, statusText: string, body: unknown): ApiError {
  const problem = isRecord(body) ? body : {};
  return new ApiError(
    status,
    typeof problem.code === "string" ? problem.code : `http-${status}`,
    readParams(problem.params),
    readIssues(problem.issues),
    body,
    [problem.detail, problem.title].find((text) => typeof text === "string") ?? statusText,
  );
}

export const apiAddress = (path: string): string => `${BASE}${path}`;

/** What every change carries. */
export function apiHeaders(idempotencyKey: string): Headers {
  const headers = new Headers({
    accept: "application/json, application/problem+json",
    "idempotency-key": idempotencyKey,
  });
  const token = csrfToken();
  if (token !== null) headers.set("x-csrf-token", token);
  return headers;
}

async function request<T>(method: string, path: string, options: ChangeOptions<T>): Promise<T> {
  const headers =
    method === "GET"
      ? new Headers({ accept: "application/json, application/problem+json" })
      : apiHeaders(options.idempotencyKey ?? newChangeKey());
  let body: BodyInit | undefined;
  if (options.body instanceof FormData) body = options.body;
  else if (options.body !== undefined) {
    headers.set("content-type", "application/json");
    body = JSON.stringify(options.body);
  }
  if (options.ifMatch !== undefined) headers.set("if-match", options.ifMatch);

  let response: Response;
  try {
    response = await fetch(address(path, options.query), {
      method,
      headers,
      body,
      signal: options.signal,
      credentials: "same-origin",
    });
  } catch (error) {
    if (options.signal?.aborted) throw error;
    connectionEvents.tell("offline");
    throw new ApiError(0, "no-connection", {}, [], null, "No connection");
  }
  if (!response.ok) {
    const body: unknown = await response.json().catch(() => null);
    const problem = toProblem(response.status, response.statusText, body);
    const isSessionLost = response.status === 401 && options.asksWhoIsThere !== true;
    connectionEvents.tell(
      isSessionLost ? stateOf401(problem.code) : response.status >= 502 ? "unavailable" : "ok",
    );
    throw problem;
  }
  connectionEvents.tell("ok");
  const reply: unknown = response.status === 204 ? null : await response.json();
  return options.schema.parse(reply);
}

export const api = {
  get: <T>(path: string, options: RequestOptions<T>) => request("GET", path, options),
  post: <T>(path: string, options: ChangeOptions<T>) => request("POST", path, options),
  put: <T>(path: string, options: ChangeOptions<T>) => request("PUT", path, options),
  patch: <T>(path: string, options: ChangeOptions<T>) => request("PATCH", path, options),
  delete: <T>(path: string, options: ChangeOptions<T>) => request("DELETE", path, options),
};
