import { createHmac, randomBytes, randomUUID } from "node:crypto";
import type { Express } from "express";
import request, { type Response } from "supertest";
import { createApp } from "../../server/app";
import { readConfig } from "../../server/config";
import { connect } from "../../server/lib/db";
import { createLog } from "../../server/lib/log";
import { defineModels } from "../../server/models";
import { insert, select } from "./insert";
import type { User } from "./user";

let app: Express | undefined;

/** The application on this test file's own database. */
export function testApp(): Express {
  if (!app) {
    const config = readConfig("web");
    defineModels(connect(config.DATABASE_URL, { max: 4 }));
    app = createApp(config, createLog(config.LOG_LEVEL));
  }
  return app;
}

export type Method = "get" | "post" | "put" | "patch" | "delete";

export interface Call {
  method: Method;
  /** Under /api. */
  path: string;
  body?: object;
  /** The revision that the change starts from. */
  revision?: number;
  /** One of its own unless told. */
  key?: string;
}

export class Client {
  constructor(readonly headers: Record<string, string> = {}) {}

  async send({ method, path, body, revision, key = randomUUID() }: Call): Promise<Response> {
    const sent = request(testApp())[method](`/api${path}`).set(this.headers);
    if (revision !== undefined) sent.set("If-Match", `"${revision}"`);
    if (method === "post") sent.set("Idempotency-Key", key);
    return method === "get" ? sent : sent.send(body ?? {});
  }

  get = (path: string) => this.send({ method: "get", path });
  post = (path: string, body: object, key?: string) =>
    this.send({ method: "post", path, body, key });
  put = (path: string, body: object, revision: number) =>
    this.send({ method: "put", path, body, revision });
  patch = (path: string, body: object, revision: number) =>
    this.send({ method: "patch", path, body, revision });
}

export const nobody = new Client();

/** A session of this person, as signing in would have left it. */
export async function signInAs(user: Pick<User, "id">): Promise<Client> {
  const sid = randomBytes(24).toString("base64url");
  const csrf = randomBytes(24).toString("base64url");
  const [found] = await select<{ organization_id: string; session_epoch: number }>(
    "SELECT organization_id, session_epoch FROM users WHERE id = $1",
    [user.id],
  );
  if (!found) throw new Error("the user is not there");
  const maxAge = 3_600_000;
  const expires = new Date(Date.now() + maxAge);
  const sess = {
    cookie: {
      originalMaxAge: maxAge,
      expires,
      httpOnly: true,
      path: "/",
      sameSite: "lax",
      secure: false,
    },
    userId: user.id,
    organizationId: found.organization_id,
    epoch: found.session_epoch,
    csrf,
    startedAt: Date.now(),
  };
  await insert("sessions", { sid, sess: JSON.stringify(sess), expire: expires });
  const [secret = ""] = readConfig("web").SESSION_SECRETS;
  // As express-session signs its cookie.
  const signature = createHmac("sha256", secret).update(sid).digest("base64").replace(/=+$/, "");
  const cookie = `dinward.sid=${encodeURIComponent(`s:${sid}.${signature}`)}; dinward.csrf=${csrf}`;
  return new Client({ Cookie: cookie, "x-csrf-token": csrf });
}
