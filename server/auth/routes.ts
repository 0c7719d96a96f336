import { createHash } from "node:crypto";
import type { Request, Response } from "express";
import { z } from "zod";
import {
  SessionView,
  SignInQuery,
  SignOutView,
  WorkerCodeInput,
} from "../../shared/schemas/session";
import { admitByGroup, followGroups } from "../commands/follow-groups";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row, rows } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { AppError, issue, unprocessable } from "../lib/errors";
import { inForce, lastEnd } from "../lib/grants";
import { Actor } from "../lib/policy";
import { loadActor } from "./actor";
import { type Provider, type ProviderIdentity, STRATEGY } from "./provider";
import { UnfinishedTries } from "./rate-limit";
import { clearCookies, rotateSession } from "./session";

interface Candidate {
  id: string;
  organizationId: string;
  issuer: string | null;
  epoch: number;
}

const signInSettings = (identity: ProviderIdentity) => ({
  "app.sign_in_issuer": identity.issuer,
  "app.sign_in_subject": identity.subject,
  "app.sign_in_email": identity.email ?? "",
});

/** The user this identity was granted to: bound already, or waiting under this e-mail or subject. */
async function findGranted(identity: ProviderIdentity): Promise<Candidate | null> {
  return inTransaction({ settings: signInSettings(identity), readOnly: true }, async () =>
    row<Candidate>(
      `SELECT id, organization_id AS "organizationId", issuer, session_epoch AS epoch FROM users
       WHERE revoked_at IS NULL AND ((issuer = :issuer AND subject = :subject)
         OR (issuer IS NULL AND (expected_subject = :subject OR lower(email) = lower(:email))))
       ORDER BY issuer NULLS LAST LIMIT 1`,
      { issuer: identity.issuer, subject: identity.subject, email: identity.email ?? "" },
    ),
  );
}

/**
 * Who is known here, with the roles that their groups give at this moment; or who is let in by a group alone, where the
 * groups are those of one organization.
 */
async function findUser(identity: ProviderIdentity): Promise<Candidate | null> {
  const known = await findGranted(identity);
  if (known) {
    await inTransaction({ organizationId: known.organizationId }, () =>
      followGroups(known, identity.groups),
    );
    return known;
  }
  const organizations = await inTransaction(
    { settings: { "app.sign_in_groups": JSON.stringify(identity.groups) }, readOnly: true },
    async () =>
      rows<{ id: string }>(
        "SELECT DISTINCT organization_id AS id FROM group_mappings WHERE ended_at IS NULL LIMIT 2",
      ),
  );
  const [organization] = organizations;
  if (!organization || organizations.length > 1) return null;
  const organizationId = organization.id;
  return inTransaction({ organizationId }, async () => {
    const made = await admitByGroup(organizationId, identity);
    if (!made) return null;
    const user = { ...made, organizationId, issuer: identity.issuer };
    await followGroups(user, identity.groups);
    return user;
  });
}

async function enter(
  request: Request,
  response: Response,
  user: Candidate,
  identity: ProviderIdentity,
): Promise<void> {
  await inTransaction({ organizationId: user.organizationId }, async () => {
    await execute(
      "UPDATE users SET issuer = $2, subject = $3, last_sign_in_at = now() WHERE id = $1",
      [user.id, identity.issuer, identity.subject],
    );
    const actor = await loadActor(user.id, user.epoch);
    await recordAudit(actor, {
      action: user.issuer ? "sign-in" : "bind-sign-in",
      subjectKind: "user",
      subjectId: user.id,
      values: { issuer: identity.issuer },
    });
  });
  await rotateSession(request, response, {
    userId: user.id,
    organizationId: user.organizationId,
    epoch: user.epoch,
    idToken: identity.idToken ?? undefined,
  });
}

/** Begun and not finished, or failed, from one address in ten minutes. A crew at shift change stays far below. */
const unfinished = new UnfinishedTries("sign-in-unfinished", 60, 10);

/** Only a path of this application: no other site can be put into the link. */
export const localPath = (value: unknown): string =>
  typeof value === "string" && /^\/(?![/\\])[^\r\n]*$/.test(value) ? value : "/";

/**
 * The identity that the provider vouches for, or null where the answer is already on its way. By the strategy's name:
 * passport then makes a strategy of its own for each request, while one handed over as an object would be shared by all
 * who sign in at that moment, and answer one with the other's identity.
 */
function authenticate(
  { passport }: Provider,
  request: Request,
  response: Response,
): Promise<ProviderIdentity | null> {
  return new Promise((resolve, reject) => {
    passport.authenticate(
      STRATEGY,
      { session: false },
      (error: unknown, identity?: ProviderIdentity | false) => {
        if (error) reject(error);
        else resolve(identity || null);
      },
    )(request, response, (error: unknown) =>
      reject(error ?? new Error("the strategy did not answer")),
    );
    // A redirect to the provider ends the answer here, and so does whoever leaves.
    response.once("close", () => resolve(null));
  });
}

export function defineAuthRoutes(provider: Provider): void {
  endpoint.get(
    "/auth/sign-in",
    { summary: "Go to the provider to sign in", may: "public", query: SignInQuery },
    async ({ request, response, query }) => {
      await provider.connect().catch(() => {
        throw new AppError("provider-down", 503);
      });
      if (!request.session.isSigningIn) await unfinished.begin(request);
      request.session.isSigningIn = true;
      request.session.returnTo = localPath(query.returnTo);
      await authenticate(provider, request, response);
    },
  );

  endpoint.get(
    "/auth/callback",
    { summary: "Come back from the provider", may: "public" },
    async ({ request, response }) => {
      const { returnTo, isSigningIn } = request.session;
      await provider.connect().catch(() => {
        throw new AppError("provider-down", 503);
      });
      const identity = await authenticate(provider, request, response).catch(() => null);
      if (response.headersSent) return;
      if (!identity) {
        // One that failed stays counted, and the next from here counts anew.
        request.session.isSigningIn = false;
        if (!isSigningIn) await unfinished.begin(request);
        response.redirect("/sign-in?failed=1");
        return;
      }
      if (isSigningIn) await unfinished.endWell(request);
      const user = await findUser(identity);
      const held = user && (await heldBy(user));
      if (user && held?.isGranted) {
        await enter(request, response, user, identity);
        response.redirect(localPath(returnTo));
        return;
      }
      const { issuer, subject, email, name } = identity;
      await rotateSession(request, response, {
        pending: { issuer, subject, email, name },
        endedAt: held?.endedAt?.toISOString(),
        idToken: identity.idToken ?? undefined,
      });
      response.redirect("/no-access");
    },
  );

  endpoint.post(
    "/auth/worker-code",
    {
      summary: "Bind this sign-in to an employee number",
      may: "public",
      body: WorkerCodeInput,
      storesNothing: true,
      reply: z.object({ returnTo: z.string() }),
    },
    async ({ request, response, body }) => {
      const { pending, idToken } = request.session;
      if (!pending) throw new AppError("signed-out", 401);
      const user = await bindWorker(pending, body);
      await enter(request, response, user, { ...pending, idToken: idToken ?? null, groups: [] });
      return { returnTo: "/" };
    },
  );

  endpoint.post(
    "/auth/sign-out",
    {
      summary: "Sign out here and at the provider",
      may: "public",
      storesNothing: true,
      reply: SignOutView,
    },
    async ({ request, response }) => {
      const redirectTo = await provider.signOutUrl(request.session.idToken);
      await new Promise<void>((resolve) => request.session.destroy(() => resolve()));
      clearCookies(response);
      return { redirectTo };
    },
  );

  endpoint.get(
    "/session",
    { summary: "Who is signed in", may: "public", reply: SessionView },
    async ({ request }) => {
      const { userId, organizationId, epoch, pending, endedAt = null } = request.session;
      if (!userId || !organizationId)
        return { user: null, pendingName: pending?.name ?? null, endedAt };
      return inTransaction({ organizationId, readOnly: true }, async () => {
        const actor = await loadActor(userId, epoch ?? 0).catch((error: unknown) =>
          error instanceof AppError ? error.code : null,
        );
        if (!(actor instanceof Actor)) {
          const left =
            actor === "access-ended" || actor === "access-taken" ? await leftBehind(userId) : null;
          const end = left?.endedAt ?? left?.takenAt;
          return {
            user: null,
            pendingName: left?.name ?? null,
            endedAt: end?.toISOString() ?? null,
          };
        }
        const organization = await row<{ name: string }>(
          "SELECT name FROM organizations WHERE id = :organizationId",
          { organizationId },
        );
        const sites = await rows<{ id: string; name: string; timeZone: string; language: string }>(
          `SELECT id, name, time_zone AS "timeZone", language FROM sites ORDER BY name`,
        );
        const reachable = sites.filter(({ id }) =>
          [...actor.grants, ...actor.visits, ...actor.employerGrants].some(
            ({ siteId }) => siteId === null || siteId === id,
          ),
        );
        return {
          user: {
            id: actor.userId,
            name: actor.name,
            email: actor.email,
            language: actor.language,
            workerId: actor.workerId,
            roles: [
              ...new Set(actor.grants.map(({ role }) => role)),
              ...(actor.isVisitor ? (["visitor"] as const) : []),
              ...(actor.isOfEmployer ? (["employer"] as const) : []),
            ],
            organizationName: organization?.name ?? "",
            sites: reachable,
            visits: [...actor.visits],
          },
          pendingName: null,
          endedAt: null,
        };
      });
    },
  );
}

interface Held {
  name: string;
  isGranted: boolean;
  endedAt: Date | null;
  takenAt: Date | null;
}

/** Whether anything granted to a user counts, when the last of what was for a time ended, and when somebody took the last. */
const leftBehind = (userId: string): Promise<Held | null> =>
  row<Held>(
    `SELECT u.name, EXISTS (SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND ${inForce("g")}) AS "isGranted", ${lastEnd("u")} AS "endedAt",
       coalesce(u.revoked_at, (SELECT max(g.revoked_at) FROM role_grants g WHERE g.user_id = u.id)) AS "takenAt"
     FROM users u WHERE u.id = :userId`,
    { userId },
  );

const heldBy = ({ id, organizationId }: Candidate): Promise<Held | null> =>
  inTransaction({ organizationId, readOnly: true }, () => leftBehind(id));

export const hashCode = (code: string): string =>
  createHash("sha256")
    .update(code.toUpperCase().replace(/[^A-Z0-9]/g, ""))
    .digest("hex");

async function bindWorker(
  pending: { issuer: string; subject: string; name: string },
  input: z.infer<typeof WorkerCodeInput>,
): Promise<Candidate> {
  const codeHash = hashCode(input.code);
  const code = await inTransaction(
    { settings: { "app.sign_in_code": codeHash }, readOnly: true },
    async () =>
      row<{ organizationId: string; workerId: string; usedAt: Date | null; isExpired: boolean }>(
        `SELECT organization_id AS "organizationId", worker_id AS "workerId", used_at AS "usedAt", expires_at <= now() AS "isExpired"
       FROM sign_in_codes WHERE code_hash = :codeHash`,
        { codeHash },
      ),
  );
  const unknown = () => unprocessable([issue(["code"], "code-unknown")]);
  if (!code) throw unknown();
  if (code.usedAt) throw unprocessable([issue(["code"], "code-used")]);
  if (code.isExpired) throw unprocessable([issue(["code"], "code-expired")]);
  return inTransaction({ organizationId: code.organizationId }, async () => {
    const worker = await row<{ id: string; siteId: string; name: string; language: string }>(
      'SELECT id, site_id AS "siteId", name, language FROM workers WHERE id = :workerId AND lower(employee_number) = lower(:employeeNumber)',
      { workerId: code.workerId, employeeNumber: input.employeeNumber.trim() },
    );
    if (!worker) throw unknown();
    const used = await execute(
      "UPDATE sign_in_codes SET used_at = now() WHERE code_hash = $1 AND used_at IS NULL",
      [codeHash],
    );
    if (used === 0) throw unprocessable([issue(["code"], "code-used")]);
    const existing = await row<{ id: string; epoch: number }>(
      "SELECT id, session_epoch AS epoch FROM users WHERE worker_id = :workerId AND revoked_at IS NULL",
      { workerId: worker.id },
    );
    const user =
      existing ??
      (await row<{ id: string; epoch: number }>(
        `INSERT INTO users (organization_id, name, worker_id, language) VALUES (:organizationId, :name, :workerId, :language)
       RETURNING id, session_epoch AS epoch`,
        {
          organizationId: code.organizationId,
          name: worker.name,
          workerId: worker.id,
          language: worker.language,
        },
      ));
    if (!user) throw new Error("a user was not made");
    await execute("UPDATE users SET issuer = $2, subject = $3 WHERE id = $1", [
      user.id,
      pending.issuer,
      pending.subject,
    ]);
    await execute(
      `INSERT INTO role_grants (organization_id, user_id, role, site_id) SELECT $1, $2, 'worker', $3::uuid
       WHERE NOT EXISTS (SELECT 1 FROM role_grants WHERE user_id = $2 AND role = 'worker' AND revoked_at IS NULL
         AND (site_id IS NULL OR site_id = $3::uuid))`,
      [code.organizationId, user.id, worker.siteId],
    );
    await recordAudit(
      { organizationId: code.organizationId },
      {
        action: "bind-worker-sign-in",
        subjectKind: "user",
        subjectId: user.id,
        values: { workerId: worker.id },
      },
    );
    return {
      id: user.id,
      organizationId: code.organizationId,
      issuer: pending.issuer,
      epoch: user.epoch,
    };
  });
}
