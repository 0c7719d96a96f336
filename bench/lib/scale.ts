import { createHmac, randomBytes } from "node:crypto";
import pg from "pg";

/** The database as its superuser, who sees every organization. */
export async function openDatabase(url = process.env.SUPER_DATABASE_URL): Promise<pg.Client> {
  const client = new pg.Client({ connectionString: url, application_name: "dinward bench" });
  await client.connect();
  return client;
}

export interface Organization {
  id: string;
  years: number;
}

/** The organizations with scale data in the order of their making: the one with the longest history first. */
export async function organizations(db: pg.Client): Promise<Organization[]> {
  const { rows } = await db.query<Organization>(
    `SELECT d.organization_id AS id, ((max(d.date) - min(d.date)) / 365.25)::float8 AS years
     FROM days d JOIN organizations o ON o.id = d.organization_id GROUP BY d.organization_id, o.created_at ORDER BY o.created_at`,
  );
  return rows;
}

export const baseUrl = `http://127.0.0.1:${process.env.PORT}/api`;

/** Headers of somebody signed in with a role, as signing in would have left them. */
export async function signIn(
  db: pg.Client,
  organizationId: string,
  role: string,
): Promise<Record<string, string>> {
  const { rows } = await db.query<{ id: string; epoch: number }>(
    "SELECT u.id, u.session_epoch AS epoch FROM users u JOIN role_grants g ON g.user_id = u.id WHERE u.organization_id = $1 AND g.role = $2",
    [organizationId, role],
  );
  const user = rows[0]!;
  const [sid, csrf] = [
    randomBytes(24).toString("base64url"),
    randomBytes(24).toString("base64url"),
  ];
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
    organizationId,
    epoch: user.epoch,
    csrf,
    startedAt: Date.now(),
  };
  await db.query("INSERT INTO sessions (sid, sess, expire) VALUES ($1, $2, $3)", [
    sid,
    JSON.stringify(sess),
    expires,
  ]);
  const signature = createHmac("sha256", process.env.SESSION_SECRETS!)
    .update(sid)
    .digest("base64")
    .replace(/=+$/, "");
  return {
    cookie: `dinward.sid=${encodeURIComponent(`s:${sid}.${signature}`)}; dinward.csrf=${csrf}`,
    "x-csrf-token": csrf,
  };
}

export async function fetchJson(
  path: string,
  headers: Record<string, string>,
  body?: object,
): Promise<unknown> {
  const more: RequestInit = body
    ? {
        method: "POST",
        body: JSON.stringify(body),
        headers: {
          ...headers,
          "content-type": "application/json",
          "idempotency-key": randomBytes(16).toString("hex"),
        },
      }
    : { headers };
  const answer = await fetch(`${baseUrl}${path}`, more);
  if (!answer.ok) throw new Error(`${path}: ${answer.status} ${await answer.text()}`);
  return answer.json();
}

/** Statements as the application would have to send them: its role, its organization, one transaction. */
export async function inOrganization(
  app: pg.Client,
  organizationId: string,
  statements: readonly [text: string, values: unknown[]][],
): Promise<void> {
  await app.query("BEGIN READ ONLY");
  await app.query("SELECT set_config('app.organization', $1, true)", [organizationId]);
  for (const [text, values] of statements) await app.query(text, values);
  await app.query("COMMIT");
}
