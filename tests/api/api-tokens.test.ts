import { describe, expect, test } from "vitest";
import { routes } from "../../server/lib/endpoint";
import type { Role } from "../../server/lib/policy";
import { TOKEN_ROUTES } from "../../server/policies/token-scopes";
import { TOKEN_SCOPES, type TokenScope } from "../../shared/schemas/api-token";
import {
  buildDay,
  buildSite,
  buildUser,
  buildWorker,
  type Call,
  Client,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";

const input = (...scopes: TokenScope[]) => ({ name: "Payroll", scopes, days: 30 });
const withToken = (token: string, headers: Record<string, string> = {}) =>
  new Client({ Authorization: `Bearer ${token}`, ...headers });

async function tokenOf(site: Site, role: Role, ...scopes: TokenScope[]) {
  const user = await buildUser({ organizationId: site.organizationId, roles: [role] });
  const client = await signInAs(user);
  const made = await client.post("/tokens", input(...scopes));
  expect(made.status).toBe(201);
  const token: string = made.body.token;
  return { user, client, token, id: made.body.view.id as string, bearer: withToken(token) };
}

const nameOf = ({ method, path }: (typeof routes)[number]) => `${method.toUpperCase()} ${path}`;
testApp();

describe("scope × route", () => {
  test("every route of a scope is one that there is", () => {
    const named = Object.values(TOKEN_ROUTES).flat();
    expect(named.filter((name) => !routes.map(nameOf).includes(name))).toEqual([]);
  });

  test.each(TOKEN_SCOPES)(
    "%s opens its routes and no other, though the person may",
    async (scope) => {
      const site = await buildSite();
      const user = await buildUser({
        organizationId: site.organizationId,
        roles: ["officer", "auditor", "administrator", "supervisor"],
      });
      const { token } = (await (await signInAs(user)).post("/tokens", input(scope))).body;
      const client = withToken(token);
      const open: string[] = [];
      for (const { method, path } of routes) {
        const nobodys = path
          .replace(/:date/g, "2026-01-01")
          .replace(/:\w+/g, () => crypto.randomUUID());
        const answer = await client.send({
          method: method as Call["method"],
          path: nobodys,
          revision: 1,
        });
        expect(answer.status).toBeLessThan(500);
        if (answer.status === 403) expect(answer.body.code).toBe("token-scope");
        else open.push(`${method.toUpperCase()} ${path}`);
      }
      expect(open.toSorted()).toEqual([...TOKEN_ROUTES[scope]].toSorted());
    },
  );
});

describe("a token", () => {
  test("acts as its person: the same policies, row by row", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    await buildDay(worker, "2026-03-04", { origin: "imported" });
    const officer = await tokenOf(site, "officer", "read-results");
    expect((await officer.bearer.get(`/workers/${worker.id}/days`)).body.rows).toHaveLength(1);
    const supervisor = await tokenOf(site, "supervisor", "read-results");
    expect((await supervisor.bearer.get(`/workers/${worker.id}/days`)).status).toBe(404);
    const administrator = await tokenOf(site, "administrator", "read-results");
    const refused = await administrator.bearer.get("/workers");
    expect([refused.status, refused.body.code]).toEqual([403, "forbidden"]);
    const foreign = await buildWorker({ site: await buildSite() });
    expect((await officer.bearer.get(`/workers/${foreign.id}`)).status).toBe(404);
  });

  test("is shown once, and only its hash is kept", async () => {
    const site = await buildSite();
    const { client, token, id, user } = await tokenOf(site, "officer", "read-programme");
    const listed = await client.get("/tokens");
    expect(listed.body.rows).toMatchObject([{ id, userId: user.id, state: "works" }]);
    const everything = await select<{ t: string }>(
      "SELECT to_jsonb(t)::text AS t FROM api_tokens t UNION ALL SELECT reply::text FROM idempotency_keys UNION ALL SELECT recorded::text FROM audit_values",
    );
    expect(everything.map(({ t }) => t).join()).not.toContain(token);
    const key = crypto.randomUUID();
    expect((await client.post("/tokens", input("read-programme"), key)).status).toBe(201);
    expect((await client.post("/tokens", input("read-programme"), key)).status).toBe(409);
  });

  test("needs no cookie and no other secret, and heeds none", async () => {
    const site = await buildSite();
    const { token } = await tokenOf(site, "officer", "read-programme");
    const auditor = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["auditor"] }),
    );
    const both = withToken(token, { Cookie: auditor.headers.Cookie ?? "" });
    expect((await both.get("/areas")).status).toBe(200);
    expect((await both.get("/audit-events")).body.code).toBe("token-scope");
    expect((await both.get("/areas")).headers["set-cookie"]).toBeUndefined();
    // A change without the header against forged requests: nothing to forge here.
    const entered = await tokenOf(site, "officer", "enter-readings");
    const answer = await entered.bearer.post("/runs", {});
    expect([answer.status, answer.body.code]).toEqual([422, "invalid"]);
  });

  test("says when it was last used, and not at every use", async () => {
    const site = await buildSite();
    const { client, bearer, id } = await tokenOf(site, "officer", "read-programme");
    const used = async () => (await client.get("/tokens")).body.rows[0].lastUsedAt;
    expect(await used()).toBeNull();
    await bearer.get("/areas");
    const first = await used();
    expect(first).not.toBeNull();
    await bearer.get("/areas");
    expect(await used()).toBe(first);
    await select(
      "UPDATE api_tokens SET last_used_at = now() - interval '11 minutes' WHERE id = $1",
      [id],
    );
    await bearer.get("/areas");
    expect(Date.parse(await used())).toBeGreaterThan(Date.now() - 60_000);
  });

  const over = async (bearer: Client) => {
    const answer = await bearer.get("/areas");
    expect(answer.headers["www-authenticate"]).toContain("Bearer");
    return [answer.status, answer.body.code];
  };

  test.each([
    [
      "ended by its person",
      "token-over",
      async (one: Awaited<ReturnType<typeof tokenOf>>) =>
        void (await one.client.post(`/tokens/${one.id}/end`, {})),
    ],
    [
      "past its day",
      "token-over",
      async (one: Awaited<ReturnType<typeof tokenOf>>) =>
        void (await select(
          "UPDATE api_tokens SET created_at = now() - interval '2 days', expires_at = now() - interval '1 day' WHERE id = $1",
          [one.id],
        )),
    ],
    [
      "of a revoked person",
      "token-person-gone",
      async (one: Awaited<ReturnType<typeof tokenOf>>) =>
        void (await select("UPDATE users SET revoked_at = now() WHERE id = $1", [one.user.id])),
    ],
    [
      "of a person without a role",
      "token-person-gone",
      async (one: Awaited<ReturnType<typeof tokenOf>>) =>
        void (await select("UPDATE role_grants SET revoked_at = now() WHERE user_id = $1", [
          one.user.id,
        ])),
    ],
    [
      "of a worker who has left",
      "token-person-gone",
      async (one: Awaited<ReturnType<typeof tokenOf>>) => {
        const worker = await buildWorker({
          site: await siteOf(one.user.organizationId),
          leftOn: "2026-01-31",
        });
        await select("UPDATE users SET worker_id = $2 WHERE id = $1", [one.user.id, worker.id]);
      },
    ],
  ])("%s opens nothing", async (_, code, end) => {
    const site = await buildSite();
    const one = await tokenOf(site, "officer", "read-programme");
    expect((await one.bearer.get("/areas")).status).toBe(200);
    await end(one);
    expect(await over(one.bearer)).toEqual([401, code]);
  });

  test("that nobody has is refused, and guessing is stopped", async () => {
    const site = await buildSite();
    const { token } = await tokenOf(site, "officer", "read-programme");
    const other = `${token.slice(0, -4)}AAAA`;
    expect(await over(withToken(other))).toEqual([401, "token-unknown"]);
    expect(await over(withToken("nonsense"))).toEqual([401, "token-unknown"]);
    await select("UPDATE rate_limits SET hits = 60 WHERE key LIKE 'token-guess:%'");
    expect((await withToken(other).get("/areas")).status).toBe(429);
    await select("DELETE FROM rate_limits WHERE key LIKE 'token-guess:%'");
    await select("UPDATE rate_limits SET hits = 1200 WHERE key LIKE 'token:%'");
    expect((await withToken(token).get("/areas")).status).toBe(200);
    const { bearer } = await tokenOf(site, "officer", "read-programme");
    await bearer.get("/areas");
    await select("UPDATE rate_limits SET hits = 1200 WHERE key LIKE 'token:%'");
    const stopped = await bearer.get("/areas");
    expect([stopped.status, stopped.body.code]).toEqual([429, "too-many-tries"]);
  });
});

const siteOf = async (organizationId: string): Promise<Site> => buildSite({ organizationId });

describe("tokens are made and ended", () => {
  test("by whoever is signed in, with their events", async () => {
    const site = await buildSite();
    expect((await nobody.post("/tokens", input("read-results"))).status).toBe(401);
    const { client, id, user } = await tokenOf(site, "worker", "read-results");
    const wrong = await client.post("/tokens", { name: "", scopes: ["all"], days: 0 });
    expect(wrong.body.issues.map(({ path }: { path: string[] }) => path[0]).toSorted()).toEqual([
      "days",
      "name",
      "scopes",
    ]);
    expect((await client.post(`/tokens/${id}/end`, {})).body.state).toBe("ended");
    expect((await client.post(`/tokens/${id}/end`, {})).body.code).toBe("nothing-to-do");
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE subject_id = $1 ORDER BY id",
      [user.id],
    );
    expect(events.map(({ action }) => action)).toEqual(["make-token", "end-token"]);
  });

  test("an administrator ends anybody's in the organization; nobody else another's", async () => {
    const site = await buildSite();
    const { id } = await tokenOf(site, "officer", "read-results");
    const as = async (role: Role, organizationId = site.organizationId) =>
      signInAs(await buildUser({ organizationId, roles: [role] }));
    expect((await (await as("officer")).post(`/tokens/${id}/end`, {})).status).toBe(404);
    const foreign = await as("administrator", (await buildSite()).organizationId);
    expect((await foreign.post(`/tokens/${id}/end`, {})).status).toBe(404);
    expect((await foreign.get("/tokens")).body.rows).toEqual([]);
    expect((await (await as("administrator")).post(`/tokens/${id}/end`, {})).status).toBe(200);
  });

  test("no more than twenty work at a time", async () => {
    const site = await buildSite();
    const { client, user } = await tokenOf(site, "officer", "read-results");
    await select(
      `INSERT INTO api_tokens (organization_id, user_id, name, scopes, secret_hash, expires_at)
       SELECT $1, $2, 'More', ARRAY['read-results'], sha256(gen_random_uuid()::text::bytea), now() + interval '1 day' FROM generate_series(1, 19) n`,
      [site.organizationId, user.id],
    );
    const answer = await client.post("/tokens", input("read-results"));
    expect(answer.body.issues[0]).toMatchObject({ path: ["name"], code: "tokens-enough" });
  });
});
