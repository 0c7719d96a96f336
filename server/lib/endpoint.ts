import { createHash } from "node:crypto";
import type { NextFunction, Request, Response, Router } from "express";
import type { z } from "zod";
import type { ReadKind } from "../../shared/schemas/access";
import { loadActor } from "../auth/actor";
import { bearerOf, findToken, loadTokenActor } from "../auth/bearer";
import { recordRead } from "../commands/record-read";
import { opens } from "../policies/token-scopes";
import { canonicalJson } from "./audit";
import { execute, inTransaction, row } from "./db";
import { AppError, forbidden, fromDatabase, notFound, unprocessable, withSent } from "./errors";
import { dropStaged, type StagedFile } from "./file-store";
import type { Actor } from "./policy";
import { readUpload, type UploadSpec } from "./upload";

type Method = "get" | "post" | "put" | "patch" | "delete";

/** Any schema, or none. */
type Schema = z.ZodType | undefined;
type Output<S extends Schema> = S extends z.ZodType ? z.output<S> : undefined;

export interface RouteSpec<
  P extends Schema = Schema,
  Q extends Schema = Schema,
  B extends Schema = Schema,
  R extends Schema = Schema,
> {
  summary: string;
  params?: P;
  query?: Q;
  body?: B;
  reply?: R;
  status?: 200 | 201 | 202 | 204;
  /** Who may call it at all, decided by a policy; which rows they meet is the policy's `sees`. */
  may: "public" | "signed-in" | ((actor: Actor) => boolean);
  /** The revision that the caller saw has to be named in If-Match. */
  needsRevision?: boolean;
  /** A POST that stores nothing and so needs no Idempotency-Key. */
  storesNothing?: boolean;
  /** The answer is shown once and never stored: a repeated key is refused instead of answered again. */
  isReplySecret?: boolean;
  /**
   * A form with one file or several, read only once the caller may call; the body's schema gets its fields and the files'
   * facts. Small ones are read into memory, the others into the file store's staging, from where the handler keeps them.
   */
  upload?: UploadSpec;
  /** The answer shows one worker's record: whoever reads it is kept in the log, in the same transaction. */
  reads?: {
    kind: ReadKind;
    worker: (
      call: { params: Output<P>; query: Output<Q> },
      reply: R extends z.ZodType ? z.input<R> : undefined,
    ) => string | null | undefined;
  };
  /** The answer shows several workers' records, and the handler itself keeps who read them. */
  keepsReads?: boolean;
  /** The handler writes the answer itself, outside any transaction of the request. */
  streams?: boolean;
}

export interface Call<P extends Schema, Q extends Schema, B extends Schema> {
  actor: Actor;
  params: Output<P>;
  query: Output<Q>;
  body: Output<B>;
  /** The revision named in If-Match; 0 where the route does not ask for one. */
  ifMatch: number;
  /** A file that came in and is dropped unless the handler keeps it; null where the route takes none. */
  staged: StagedFile | null;
  /** Where the route takes several: all of them, in the form's order. */
  stagedFiles: readonly StagedFile[];
  request: Request;
  response: Response;
}

export interface Route {
  method: Method;
  path: string;
  spec: RouteSpec;
  handler: (call: never) => unknown;
}

/** Every route of the API, for mounting, for OpenAPI and for the test of the role matrix. */
export const routes: Route[] = [];

function define(method: Method) {
  return <
    P extends Schema = undefined,
    Q extends Schema = undefined,
    B extends Schema = undefined,
    R extends Schema = undefined,
  >(
    path: string,
    spec: RouteSpec<P, Q, B, R>,
    handler: (
      call: Call<P, Q, B>,
    ) => R extends z.ZodType ? Promise<z.input<R>> | z.input<R> : Promise<void> | void,
  ): void => {
    routes.push({ method, path, spec: spec as RouteSpec, handler: handler as Route["handler"] });
  };
}

/**
 * Declares an endpoint: who may call it, what comes in, what goes out. The handler runs in the request's transaction,
 * in the caller's organization.
 */
export const endpoint = {
  get: define("get"),
  post: define("post"),
  put: define("put"),
  patch: define("patch"),
  delete: define("delete"),
};

/** Where a text has what the database can't keep: a NUL, or half of a character. */
function unreadable(value: unknown, path: (string | number)[] = []): (string | number)[] | null {
  if (typeof value === "string")
    return value.includes("\0") || /\p{Surrogate}/u.test(value) ? path : null;
  if (value === null || typeof value !== "object") return null;
  for (const [name, member] of Object.entries(value)) {
    const found = unreadable(member, [...path, Array.isArray(value) ? Number(name) : name]);
    if (found) return found;
  }
  return null;
}

function parse(schema: Schema, value: unknown): unknown {
  if (!schema) return undefined;
  const path = unreadable(value);
  if (path) throw unprocessable([{ path, code: "text-unreadable", params: {} }]);
  const parsed = schema.safeParse(value ?? {});
  if (parsed.success) return parsed.data;
  throw unprocessable(parsed.error.issues.map(toIssue));
}

/** What an address names by an id that is no id, or a date that is no date, is not there: no field of a form is wrong. */
function parsePath(schema: Schema, params: unknown): unknown {
  try {
    return parse(schema, params);
  } catch (error) {
    if (error instanceof AppError && error.code === "invalid") throw notFound();
    throw error;
  }
}

function toIssue(found: z.core.$ZodIssue) {
  const params: Record<string, string | number> = {};
  for (const name of ["minimum", "maximum", "expected", "format", "origin"] as const) {
    const value = (found as unknown as Record<string, unknown>)[name];
    if (typeof value === "string" || typeof value === "number") params[name] = value;
    else if (typeof value === "bigint") params[name] = Number(value);
  }
  if ("inclusive" in found && found.inclusive === false) params.inclusive = "false";
  const custom =
    found.code === "custom" ? (found.params as { code?: string } | undefined) : undefined;
  const { code, ...more } = { code: found.code as string, ...custom };
  return {
    path: found.path as (string | number)[],
    code,
    params: { ...params, ...more } as Record<string, string | number>,
  };
}

function readIfMatch(request: Request): number {
  const header = request.get("if-match");
  const match = header ? /^(?:W\/)?"?(\d{1,9})"?$/.exec(header.trim()) : null;
  if (!match) throw new AppError("revision-missing", 428);
  return Number(match[1]);
}

const readMethods = new Set<Method>(["get"]);

async function answerOnce(
  route: Route,
  actor: Actor,
  request: Request,
  work: () => Promise<{ status: number; reply: unknown }>,
) {
  const key = request.get("idempotency-key");
  if (!key || key.length < 8 || key.length > 200) throw new AppError("key-missing", 428);
  const routeName = `${route.method} ${route.path}`;
  const hash = createHash("sha256")
    .update(request.originalUrl)
    .update("\n")
    .update(canonicalJson(request.body ?? null))
    .digest("hex");
  const claimed = await execute(
    `INSERT INTO idempotency_keys (organization_id, user_id, route, key, request_hash) VALUES ($1, $2, $3, $4, $5) ON CONFLICT DO NOTHING`,
    [actor.organizationId, actor.userId, routeName, key, hash],
  );
  if (claimed === 0) {
    const earlier = await row<{ requestHash: string; status: number | null; reply: unknown }>(
      `SELECT request_hash AS "requestHash", status, reply FROM idempotency_keys
       WHERE organization_id = :organizationId AND user_id = :userId AND route = :routeName AND key = :key`,
      { organizationId: actor.organizationId, userId: actor.userId, routeName, key },
    );
    if (!earlier || earlier.requestHash !== hash) throw new AppError("key-reused", 422);
    if (route.spec.isReplySecret) throw new AppError("exists-already", 409);
    return { status: earlier.status ?? 200, reply: earlier.reply };
  }
  const answer = await work();
  await execute(
    `UPDATE idempotency_keys SET status = $5, reply = $6::jsonb WHERE organization_id = $1 AND user_id = $2 AND route = $3 AND key = $4`,
    [
      actor.organizationId,
      actor.userId,
      routeName,
      key,
      answer.status,
      JSON.stringify((route.spec.isReplySecret ? null : answer.reply) ?? null),
    ],
  );
  return answer;
}

function authorizeRoute(spec: RouteSpec, actor: Actor): void {
  if (typeof spec.may === "function" && !spec.may(actor)) throw forbidden();
}

async function handle(route: Route, request: Request, response: Response): Promise<void> {
  const uploaded: { staged: StagedFile[] } = { staged: [] };
  try {
    await answer(route, request, response, uploaded);
  } finally {
    await Promise.all(uploaded.staged.map(dropStaged));
  }
}

/** Who stands behind a session, or behind a token whose scope opens the route. */
async function whoCalls(token: string | null, { method, path }: Route, request: Request) {
  if (token !== null) {
    const holder = await findToken(token, request);
    if (!opens(holder.scopes, `${method.toUpperCase()} ${path}`))
      throw new AppError("token-scope", 403);
    return {
      organizationId: holder.organizationId,
      loadCaller: () => loadTokenActor(holder, request),
    };
  }
  const { userId, organizationId, epoch = 0 } = request.session ?? {};
  if (!userId || !organizationId) throw new AppError("signed-out", 401);
  return { organizationId, loadCaller: () => loadActor(userId, epoch) };
}

async function answer(
  route: Route,
  request: Request,
  response: Response,
  uploaded: { staged: StagedFile[] },
): Promise<void> {
  const { spec } = route;
  const run = async (actor: Actor | null) => {
    const call = {
      actor,
      params: parsePath(spec.params, request.params),
      query: parse(spec.query, request.query),
      body: parse(spec.body, request.body),
      ifMatch: spec.needsRevision ? readIfMatch(request) : 0,
      staged: uploaded.staged[0] ?? null,
      stagedFiles: uploaded.staged,
      request,
      response,
    };
    const reply = await route.handler(call as never);
    const workerId = spec.reads?.worker(call as never, reply as never);
    if (actor && spec.reads && workerId) await recordRead(actor, workerId, spec.reads.kind);
    return reply;
  };

  const token = bearerOf(request);
  if (spec.may === "public") {
    if (token !== null) throw new AppError("token-scope", 403);
    send(response, spec.status ?? 200, await run(null));
    return;
  }
  const { organizationId, loadCaller } = await whoCalls(token, route, request);
  const load = async () => {
    const actor = await loadCaller();
    response.locals.language = actor.language;
    return actor;
  };

  if (spec.streams) {
    const actor = await inTransaction({ organizationId, readOnly: true }, load);
    authorizeRoute(spec, actor);
    await run(actor);
    return;
  }
  if (spec.upload) {
    await inTransaction({ organizationId, readOnly: true }, async () =>
      authorizeRoute(spec, await load()),
    );
    uploaded.staged = await readUpload(request, response, spec.upload);
  }
  const answered = await inTransaction(
    { organizationId, readOnly: readMethods.has(route.method) && !spec.reads && !spec.keepsReads },
    async () => {
      const actor = await load();
      authorizeRoute(spec, actor);
      const status = spec.status ?? (route.method === "post" && !spec.storesNothing ? 201 : 200);
      const work = async () => {
        const reply = await run(actor);
        return {
          status,
          reply: spec.reply && reply !== undefined ? spec.reply.parse(reply) : reply,
        };
      };
      return route.method === "post" && !spec.storesNothing
        ? answerOnce(route, actor, request, work)
        : work();
    },
  );
  send(response, answered.status, answered.reply);
}

function send(response: Response, status: number, reply: unknown): void {
  if (response.headersSent) return;
  if (reply === undefined) response.status(status === 200 ? 204 : status).end();
  else response.status(status).json(reply);
}

export function mountRoutes(router: Router): void {
  for (const route of routes) {
    router[route.method](route.path, (request: Request, response: Response, next: NextFunction) => {
      response.locals.route = `${route.method.toUpperCase()} /api${route.path}`;
      handle(route, request, response).catch((error) =>
        next(withSent(fromDatabase(error), request.body)),
      );
    });
  }
}
