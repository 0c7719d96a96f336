import { randomUUID } from "node:crypto";
import { existsSync } from "node:fs";
import path from "node:path";
import express, { type ErrorRequestHandler, type Express, type Request } from "express";
import expressStaticGzip, { type ExpressStaticGzipOptions } from "express-static-gzip";
import helmet from "helmet";
import { unlessBearer } from "./auth/bearer";
import { Provider } from "./auth/provider";
import { limitTries } from "./auth/rate-limit";
import { defineAuthRoutes, localPath } from "./auth/routes";
import { refuseForgery, sessions } from "./auth/session";
import type { Config } from "./config";
import { sequelize } from "./lib/db";
import { mountRoutes, routes } from "./lib/endpoint";
import { AppError, fromDatabase, isDatabaseDown } from "./lib/errors";
import { openFileStore } from "./lib/file-store";
import { describeError, type Log } from "./lib/log";
import { pendingMigrations } from "./lib/migrator";
import { buildOpenApi } from "./lib/open-api";
import { answerProblem } from "./lib/problem-answer";
import { withRequestId } from "./lib/request-context";
import { defineRoutes } from "./routes";
import { MAIL_HOOK_PATH } from "./routes/mail-hook";

export interface AppState {
  /** Set while the process lets its last requests end. */
  isDraining: boolean;
}

export function createApp(
  config: Config<"web">,
  log: Log,
  state: AppState = { isDraining: false },
): Express {
  const app = express();
  const provider = new Provider(config);
  openFileStore(config.DATA_DIR);
  app.disable("x-powered-by");
  app.set("trust proxy", config.TRUST_PROXY);

  app.use((request, response, next) => {
    const requestId = /^[\w-]{8,64}$/.test(request.get("x-request-id") ?? "")
      ? (request.get("x-request-id") as string)
      : randomUUID();
    response.setHeader("x-request-id", requestId);
    response.locals.requestId = requestId;
    const began = process.hrtime.bigint();
    response.on("finish", () => {
      const durationMs = Number(process.hrtime.bigint() - began) / 1e6;
      log.info(
        {
          requestId,
          method: request.method,
          route: response.locals.route,
          status: response.statusCode,
          durationMs,
        },
        "request",
      );
    });
    withRequestId(requestId, next);
  });

  app.get("/healthz", (_request, response) => void response.json({ status: "ok" }));
  app.get("/readyz", async (_request, response) => {
    try {
      if (state.isDraining) throw new AppError("draining", 503);
      await sequelize().query("SELECT 1", { transaction: null });
      const pending = await pendingMigrations(sequelize());
      response
        .status(pending.length === 0 ? 200 : 503)
        .json({ status: pending.length === 0 ? "ready" : "not-migrated" });
    } catch {
      response.status(503).json({ status: state.isDraining ? "draining" : "database-down" });
    }
  });

  app.use(
    helmet({
      contentSecurityPolicy: {
        useDefaults: false,
        directives: {
          defaultSrc: ["'none'"],
          scriptSrc: ["'self'"],
          styleSrc: ["'self'"],
          // React sets positions of drawings as style attributes; no style element or sheet from elsewhere.
          styleSrcAttr: ["'unsafe-inline'"],
          fontSrc: ["'self'"],
          imgSrc: ["'self'", "data:"],
          connectSrc: ["'self'"],
          manifestSrc: ["'self'"],
          workerSrc: ["'self'"],
          baseUri: ["'none'"],
          frameAncestors: ["'none'"],
          // Redirects after a form post count too, so the provider has its place here.
          formAction: ["'self'", provider.origin],
        },
      },
      crossOriginEmbedderPolicy: false,
      strictTransportSecurity: config.PUBLIC_URL.startsWith("https:")
        ? { maxAge: 31_536_000 }
        : false,
      referrerPolicy: { policy: "same-origin" },
    }),
  );

  const api = express.Router();
  api.use((_request, response, next) => {
    response.setHeader("cache-control", "no-store");
    next();
  });
  // Two requests a sign-in: far more than any crew, and what does not end well has a bound of its own (auth/routes.ts).
  api.use(["/auth/sign-in", "/auth/callback"], limitTries("sign-in", 1200, 10));
  api.use("/auth/worker-code", limitTries("worker-code", 10, 15));
  // Behind one address a whole works may read its letters; a secret of 24 bytes is not guessed at this rate.
  api.use("/calendar", limitTries("calendar", 120, 10));
  api.use("/acknowledgements", limitTries("acknowledgement", 120, 10));
  // A provider reports each mail of a works at once, from one address.
  api.use(MAIL_HOOK_PATH, limitTries("mail-hook", 3000, 10));
  api.use(...sessions(config).map(unlessBearer));
  api.use(unlessBearer(refuseForgery));
  // Signed over the bytes as they come.
  api.use(MAIL_HOOK_PATH, express.raw({ type: () => true, limit: "1mb" }));
  api.use(express.json({ limit: "4mb" }));

  if (routes.length === 0) {
    defineAuthRoutes(provider);
    defineRoutes(config);
  }
  mountRoutes(api);
  const openApi = () => buildOpenApi(routes, config.PUBLIC_URL);
  api.get("/openapi.json", (_request, response) => void response.json(openApi()));
  api.use((_request, _response, next) => next(new AppError("not-found", 404)));
  app.use("/api", api);

  serveClient(app);
  app.use(problems(log));
  return app;
}

function serveClient(app: Express): void {
  const client = path.resolve(
    import.meta.dirname,
    import.meta.dirname.endsWith("server") &&
      existsSync(path.resolve(import.meta.dirname, "../client"))
      ? "../client"
      : "../dist/client",
  );
  // Compressed once, by the build; who takes neither kind gets the file as it is.
  const files = (folder: string, serveStatic: ExpressStaticGzipOptions["serveStatic"]) =>
    expressStaticGzip(folder, {
      enableBrotli: true,
      orderPreference: ["br", "gz"],
      index: false,
      serveStatic,
    });
  app.use("/assets", files(path.join(client, "assets"), { immutable: true, maxAge: "365d" }));
  app.use(files(client, { index: false, maxAge: 0 }));
  app.get("/{*rest}", (_request, response, next) => {
    response.setHeader("cache-control", "no-cache");
    response.sendFile(
      path.join(client, "index.html"),
      (error) => error && next(new AppError("not-found", 404)),
    );
  });
}

/** Every failure leaves as problem+json; what the client can't mend is logged without its message. */
const problems =
  (log: Log): ErrorRequestHandler =>
  (thrown, request, response, next) => {
    const requestId = response.locals.requestId as string;
    if (response.headersSent) return next(thrown);
    const error = toAppError(fromDatabase(thrown));
    if (error.status >= 500)
      log.error(
        { requestId, route: response.locals.route, code: error.code, ...describeError(thrown) },
        "request failed",
      );
    if (isSignInPage(request)) response.redirect(signInAddress(error, request));
    else answerProblem(error, request, response).catch(next);
  };

/** A browser on its way to or from the provider: a person reads the answer, in a page and not as JSON. */
const isSignInPage = (request: Request): boolean =>
  /^\/api\/auth\/(sign-in|callback)$/.test(request.baseUrl + request.path) &&
  request.accepts("application/problem+json", "text/html") === "text/html";

function signInAddress({ code, params }: AppError, request: Request): string {
  const search = new URLSearchParams({ problem: code });
  if (params.minutes !== undefined) search.set("minutes", String(params.minutes));
  const returnTo = localPath(request.query.returnTo ?? request.session?.returnTo);
  if (returnTo !== "/") search.set("returnTo", returnTo);
  return `/sign-in?${search}`;
}

function toAppError(error: unknown): AppError {
  if (error instanceof AppError) return error;
  if (isDatabaseDown(error)) return new AppError("database-down", 503);
  const status = (error as { status?: number; statusCode?: number }).status;
  if (status === 413) return new AppError("too-large", 413);
  if (status && status >= 400 && status < 500) return new AppError("invalid", status);
  return new AppError("internal", 500);
}
