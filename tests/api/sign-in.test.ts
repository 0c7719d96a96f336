import { createServer, type Server } from "node:http";
import { afterAll, beforeAll, describe, expect, inject, test } from "vitest";
import { readConfig } from "../../server/config";
import {
  buildOrganization,
  buildSite,
  buildUser,
  buildWorker,
  insert,
  select,
  signInAs,
  testApp,
} from "../factories";
import { addPeople, type Person } from "../setup/services";
import { Visitor } from "../setup/visitor";

const { publicUrl, peopleFolder } = inject("services");
let server: Server;
beforeAll(async () => {
  server = createServer(testApp());
  await new Promise<void>((resolve) =>
    server.listen(Number(readConfig("web").PORT), "127.0.0.1", resolve),
  );
});
afterAll(() => server.close());

let known = 0;
/** Somebody the provider knows, under an e-mail of their own. */
function person(more: Partial<Person> = {}): Person {
  known += 1;
  const sub = `someone-${Date.now()}-${known}`;
  const one: Person = {
    sub,
    email: `${sub}@dinward.example`,
    emailVerified: true,
    name: `Someone ${known}`,
    roles: [],
    language: "en",
    ...more,
  };
  addPeople(peopleFolder, [one], sub);
  return one;
}

const signInAddress = (returnTo = "/findings") =>
  `${publicUrl}/api/auth/sign-in?returnTo=${encodeURIComponent(returnTo)}`;
const session = async (visitor: Visitor) =>
  (await visitor.request(`${publicUrl}/api/session`)).json();
const post = (
  visitor: Visitor,
  path: string,
  body: object,
  csrf = visitor.cookie("127.0.0.1", "dinward.csrf"),
) =>
  visitor.request(`${publicUrl}/api${path}`, {
    method: "POST",
    body: JSON.stringify(body),
    headers: { "Content-Type": "application/json", "x-csrf-token": csrf ?? "" },
  });

describe("sign-in", () => {
  test("ten people who come back from the provider at one moment are each themselves", async () => {
    const people = await Promise.all(
      Array.from({ length: 10 }, async () => {
        const { email, sub } = person();
        const user = await buildUser({ email, roles: ["officer"] });
        return { sub, user, visitor: new Visitor() };
      }),
    );
    // Each up to the way back, so that all the ways back are walked together.
    const backs = await Promise.all(
      people.map(async ({ visitor, sub }) => ({
        visitor,
        address: await visitor.upTo("/api/auth/callback", signInAddress(), sub),
      })),
    );
    await Promise.all(backs.map(({ visitor, address }) => visitor.open(address)));
    const sessions = await Promise.all(people.map(({ visitor }) => session(visitor)));
    expect(sessions.map((one) => one.user?.id)).toEqual(people.map(({ user }) => user.id));
  });

  test("asks with state, nonce and PKCE; a granted e-mail gets in, is bound to its subject, and comes back where it wanted to", async () => {
    const { email, sub } = person();
    const user = await buildUser({ email: email.toUpperCase(), roles: ["officer"] });
    const visitor = new Visitor();
    const asked = await visitor.request(signInAddress());
    const to = new URL(asked.headers.get("location") ?? "");
    for (const name of ["state", "nonce", "code_challenge"])
      expect(to.searchParams.get(name)?.length).toBeGreaterThan(20);
    expect(to.searchParams.get("code_challenge_method")).toBe("S256");
    const before = visitor.cookie("127.0.0.1", "dinward.sid");
    const { url } = await visitor.signIn(signInAddress(), sub);
    expect(url.pathname).toBe("/findings");
    expect(visitor.cookie("127.0.0.1", "dinward.sid")).not.toBe(before);
    expect((await session(visitor)).user).toMatchObject({ id: user.id, roles: ["officer"] });
    const [bound] = await select<{ subject: string }>("SELECT subject FROM users WHERE id = $1", [
      user.id,
    ]);
    expect(bound?.subject).toBe(sub);
  });

  test("the session's cookie can't be read by scripts and is not sent along from elsewhere", async () => {
    const asked = await new Visitor().request(signInAddress());
    const [cookie = ""] = asked.headers.getSetCookie();
    expect(cookie).toMatch(/^dinward\.sid=/);
    expect(cookie).toMatch(/HttpOnly/i);
    expect(cookie).toMatch(/SameSite=Lax/i);
  });

  test("nobody granted, an e-mail not verified, a revoked user: all end on the page that says so", async () => {
    const nobody = person();
    const unverified = person({ emailVerified: false });
    await buildUser({ email: unverified.email, roles: ["officer"] });
    const revoked = person();
    const gone = await buildUser({ email: revoked.email, roles: ["officer"] });
    await select("UPDATE users SET revoked_at = now() WHERE id = $1", [gone.id]);
    for (const { sub, name } of [nobody, unverified, revoked]) {
      const visitor = new Visitor();
      const { url } = await visitor.signIn(signInAddress(), sub);
      expect(url.pathname).toBe("/no-access");
      expect(await session(visitor)).toEqual({ user: null, pendingName: name, endedAt: null });
    }
  });

  test("a visitor whose time is over is told when it ended, and comes in again once it is granted anew", async () => {
    const { email, sub, name } = person();
    const site = await buildSite();
    const user = await buildUser({ organizationId: site.organizationId, email });
    const at = (minutes: number) => new Date(Date.now() + minutes * 60_000);
    const endsAt = at(-5);
    await insert("role_grants", {
      organizationId: site.organizationId,
      userId: user.id,
      role: "auditor",
      siteId: site.id,
      year: 2025,
      grantedAt: at(-60),
      endsAt,
    });
    const visitor = new Visitor();
    expect((await visitor.signIn(signInAddress(), sub)).url.pathname).toBe("/no-access");
    expect(await session(visitor)).toEqual({
      user: null,
      pendingName: name,
      endedAt: endsAt.toISOString(),
    });
    await select("UPDATE role_grants SET ends_at = now() + interval '1 hour' WHERE user_id = $1", [
      user.id,
    ]);
    const again = new Visitor();
    expect((await again.signIn(signInAddress(), sub)).url.pathname).toBe("/findings");
    expect((await session(again)).user).toMatchObject({
      roles: ["visitor"],
      visits: [{ siteId: site.id, year: 2025 }],
    });
  });

  test("a group that the provider states lets somebody in, and no longer in it, not", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const author = await buildUser({ organizationId, roles: ["administrator"] });
    const groupName = `Readers ${Date.now()}`;
    const map = (inOrganization: string, authorId: string) =>
      insert("group_mappings", {
        organizationId: inOrganization,
        groupName,
        role: "auditor",
        authorId,
      });
    await map(organizationId, author.id);
    const member = person({ groups: ["Canteen", groupName] });
    const visitor = new Visitor();
    expect((await visitor.signIn(signInAddress(), member.sub)).url.pathname).toBe("/findings");
    expect((await session(visitor)).user).toMatchObject({
      name: member.name,
      email: member.email,
      roles: ["auditor"],
      sites: [{ id: site.id }],
    });
    addPeople(peopleFolder, [{ ...member, groups: ["Canteen"] }], member.sub);
    const later = new Visitor();
    expect((await later.signIn(signInAddress(), member.sub)).url.pathname).toBe("/no-access");
    // What a group gave ends in the open session too.
    expect((await session(visitor)).user).toBeNull();
    // Two organizations that know the group: nobody says which of them it is.
    const foreign = await buildUser({ roles: ["administrator"] });
    await map(foreign.organizationId, foreign.id);
    const unclear = person({ groups: [groupName] });
    const third = new Visitor();
    expect((await third.signIn(signInAddress(), unclear.sub)).url.pathname).toBe("/no-access");
  });

  test("an e-mail that has been bound to one subject opens to no other", async () => {
    const first = person();
    await buildUser({ email: first.email, roles: ["auditor"] });
    await new Visitor().signIn(signInAddress(), first.sub);
    const impostor = person({ email: first.email });
    const visitor = new Visitor();
    const { url } = await visitor.signIn(signInAddress(), impostor.sub);
    expect(url.pathname).toBe("/no-access");
  });

  test("a refusal at the provider comes back as such, and no other site gets into the way back", async () => {
    const { email, sub } = person();
    await buildUser({ email, roles: ["officer"] });
    const { url } = await new Visitor().signIn(signInAddress("//evil.example/"), sub);
    expect(url.host).toBe(new URL(publicUrl).host);
    expect(url.pathname).toBe("/");
    const answer = await new Visitor().request(
      `${publicUrl}/api/auth/callback?error=access_denied&state=x`,
    );
    expect(answer.headers.get("location")).toBe("/sign-in?failed=1");
  });

  test("revoking a user ends the session at the next request; so do a new epoch and the absolute time-out", async () => {
    const { organizationId } = await buildSite();
    const user = await buildUser({ organizationId, roles: ["officer"] });
    const client = await signInAs(user);
    expect((await client.get("/findings")).status).toBe(200);
    await select("UPDATE users SET session_epoch = session_epoch + 1 WHERE id = $1", [user.id]);
    expect((await client.get("/findings")).status).toBe(401);
    const again = await signInAs(user);
    await select(
      "UPDATE sessions SET sess = jsonb_set(sess::jsonb, '{startedAt}', '1')::json WHERE sess->>'userId' = $1",
      [user.id],
    );
    expect((await again.get("/findings")).status).toBe(401);
    const third = await signInAs(user);
    await select("UPDATE users SET revoked_at = now() WHERE id = $1", [user.id]);
    expect((await third.get("/findings")).status).toBe(401);
  });

  test("a change without the session's token, or from another site, is refused", async () => {
    const { email, sub } = person();
    const { id: organizationId } = await buildOrganization();
    await buildUser({ organizationId, email, roles: ["officer"] });
    const visitor = new Visitor();
    await visitor.signIn(signInAddress(), sub);
    const forged = await post(visitor, "/auth/sign-out", {}, "wrong");
    expect(forged.status).toBe(403);
    expect((await forged.json()).detail).toMatch(/dinward\.csrf.*x-csrf-token/);
    const foreign = await visitor.request(`${publicUrl}/api/auth/sign-out`, {
      method: "POST",
      headers: {
        "x-csrf-token": visitor.cookie("127.0.0.1", "dinward.csrf") ?? "",
        "sec-fetch-site": "cross-site",
      },
    });
    expect(foreign.status).toBe(403);
    expect((await session(visitor)).user).not.toBeNull();
  });

  test("signing out ends it here and at the provider", async () => {
    const { email, sub } = person();
    await buildUser({ email, roles: ["officer"] });
    const visitor = new Visitor();
    await visitor.signIn(signInAddress(), sub);
    const answer = await post(visitor, "/auth/sign-out", {});
    const { redirectTo } = await answer.json();
    expect(redirectTo).toContain("id_token_hint=");
    expect((await session(visitor)).user).toBeNull();
    const { url } = await visitor.open(redirectTo);
    expect(
      ["/signed-out", "/session/end/success"].some((end) => url.pathname.endsWith(end)) ||
        url.pathname.includes("session/end"),
    ).toBe(true);
  });

  test("a worker without e-mail binds the sign-in by a printed code, once", async () => {
    const site = await buildSite();
    await buildSite({ organizationId: site.organizationId });
    const worker = await buildWorker({ site });
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const { body } = await officer.post(`/workers/${worker.id}/sign-in-codes`, {});
    expect(body.code).toMatch(/\w{3,}/);
    const { sub } = person({ email: "", emailVerified: false });
    const visitor = new Visitor();
    await visitor.signIn(signInAddress(), sub);
    const wrong = await post(visitor, "/auth/worker-code", {
      employeeNumber: "0",
      code: body.code,
    });
    expect(wrong.status).toBe(422);
    expect((await wrong.json()).issues[0]).toMatchObject({ path: ["code"], code: "code-unknown" });
    const right = await post(visitor, "/auth/worker-code", {
      employeeNumber: worker.employeeNumber,
      code: body.code.toLowerCase(),
    });
    expect(right.status).toBe(200);
    expect((await session(visitor)).user).toMatchObject({
      workerId: worker.id,
      roles: ["worker"],
      sites: [{ id: site.id }],
    });
    const grants = await select<{ role: string; site_id: string }>(
      "SELECT g.role, g.site_id FROM role_grants g JOIN users u ON u.id = g.user_id WHERE u.worker_id = $1",
      [worker.id],
    );
    expect(grants).toEqual([{ role: "worker", site_id: site.id }]);
    const other = new Visitor();
    await other.signIn(signInAddress(), person().sub);
    const used = await post(other, "/auth/worker-code", {
      employeeNumber: worker.employeeNumber,
      code: body.code,
    });
    expect((await used.json()).issues[0].code).toBe("code-used");
  });

  test("too many tries of codes are stopped, with the minutes to wait", async () => {
    const visitor = new Visitor();
    await visitor.signIn(signInAddress(), person().sub);
    let last: Response | undefined;
    for (let tries = 0; tries < 12; tries += 1)
      last = await post(visitor, "/auth/worker-code", { employeeNumber: "1", code: "AAAA-BBBB" });
    expect(last?.status).toBe(429);
    expect(Number(last?.headers.get("retry-after"))).toBeGreaterThan(800);
    expect(await last?.json()).toMatchObject({
      code: "too-many-tries",
      params: { minutes: 15 },
      title: "Too many tries",
      detail: "Too many tries. Wait 15 minutes, then try again.",
    });
    await select("DELETE FROM rate_limits");
  });

  test("a whole crew signs in from one address; what does not end well is stopped, and said in a page", async () => {
    await select("DELETE FROM rate_limits");
    const { email, sub } = person();
    await buildUser({ email, roles: ["officer"] });
    const counted = async () =>
      (
        await select<{ hits: number }>(
          "SELECT hits FROM rate_limits WHERE key LIKE 'sign-in-unfinished:%'",
        )
      )[0]?.hits;
    for (let crew = 0; crew < 3; crew += 1) {
      const { url } = await new Visitor().signIn(signInAddress(), sub);
      expect(url.pathname).toBe("/findings");
    }
    expect(await counted()).toBe(0);

    // Going back and beginning again in the same browser is one try.
    const hesitant = new Visitor();
    for (let times = 0; times < 3; times += 1) await hesitant.request(signInAddress());
    expect(await counted()).toBe(1);
    await hesitant.signIn(signInAddress(), sub);
    expect(await counted()).toBe(0);

    // Answers that no sign-in asked for count one each.
    for (let tries = 0; tries < 2; tries += 1)
      await new Visitor().request(`${publicUrl}/api/auth/callback?error=access_denied&state=x`);
    expect(await counted()).toBe(2);

    await select("UPDATE rate_limits SET hits = 60 WHERE key LIKE 'sign-in-unfinished:%'");
    const program = await new Visitor().request(signInAddress());
    expect(program.status).toBe(429);
    expect(program.headers.get("content-type")).toContain("application/problem+json");
    expect(Number(program.headers.get("retry-after"))).toBeGreaterThan(0);
    const page = await new Visitor().request(signInAddress(), {
      headers: { accept: "text/html,application/xhtml+xml,*/*;q=0.8" },
    });
    expect(page.status).toBe(302);
    expect(page.headers.get("location")).toMatch(
      /^\/sign-in\?problem=too-many-tries&minutes=\d+&returnTo=%2Ffindings$/,
    );
    await select("DELETE FROM rate_limits");
  });

  test("problems are told in the reader's language: the request's, else the person's own", async () => {
    const site = await buildSite();
    const user = await buildUser({
      organizationId: site.organizationId,
      roles: ["officer"],
      language: "de",
    });
    const client = await signInAs(user);
    const missing = "/workers/00000000-0000-4000-8000-000000000000";
    const own = await client.get(missing);
    expect(own.headers["content-language"]).toBe("de");
    expect(own.body).toMatchObject({
      code: "not-found",
      detail: "Es gibt das nicht, oder es ist nicht für Sie bestimmt.",
    });
    const inEnglish = await fetch(`${publicUrl}/api/workers/x`, {
      headers: { "accept-language": "fr, en;q=0.8, de;q=0.5" },
    });
    expect(await inEnglish.json()).toMatchObject({
      title: "Not signed in",
      detail: "You have been signed out. Sign in again; what you typed is kept.",
    });
  });

  test("security headers: a strict content policy, no framing, no sniffing", async () => {
    const answer = await fetch(`${publicUrl}/api/session`);
    const policy = answer.headers.get("content-security-policy") ?? "";
    expect(policy).toContain("default-src 'none'");
    expect(policy).toContain("script-src 'self'");
    expect(policy).toContain("frame-ancestors 'none'");
    expect(policy).not.toContain("unsafe-eval");
    expect(answer.headers.get("x-content-type-options")).toBe("nosniff");
    expect(answer.headers.get("cache-control")).toBe("no-store");
    expect(answer.headers.get("x-request-id")).toMatch(/^[\w-]{8,}/);
  });
});
