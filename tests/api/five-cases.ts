import { describe, expect, test } from "vitest";
import type { Role } from "../../server/lib/policy";
import { buildSite, buildUser, type Call, nobody, type Site, select, signInAs } from "../factories";

export interface Endpoint {
  /** As in "POST /areas". */
  route: string;
  as: Role;
  not: Role;
  /** Lays out at a site what the call needs, and gives the call. */
  call(site: Site): Promise<Call>;
  /** What makes the call one that can't be parsed or believed; null where nothing comes in. */
  bad: Partial<Call> | null;
  /** Field that the refusal names, such as "name". */
  badField?: string;
  status?: number;
  /** The event that success leaves; null for a read. */
  event: string | null;
  /** A call without ids can't name another organization's: its answer may only not show them. */
  namesNothing?: boolean;
}

const roleAt = async (site: Site, role: Role) =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: [role] }));

/** Who is refused, and how; and what success leaves behind. */
export function describeEndpoint(endpoint: Endpoint): void {
  const { route, as, not, call, bad, event } = endpoint;

  describe(route, () => {
    test("401 without a session", async () => {
      const site = await buildSite();
      const answer = await nobody.send(await call(site));
      expect(answer.status).toBe(401);
      expect(answer.body.code).toBe("signed-out");
    });

    if (endpoint.namesNothing) {
      test("shows nothing of another organization", async () => {
        const [ours, theirs] = [await buildSite(), await buildSite()];
        await call(theirs);
        const client = await roleAt(ours, as);
        const answer = await client.send(await call(ours));
        expect(answer.status).toBeLessThan(300);
        expect(JSON.stringify(answer.body)).not.toContain(theirs.organizationId);
        expect(JSON.stringify(answer.body)).not.toContain(theirs.id);
      });
    } else {
      test("404 for another organization's ids", async () => {
        const [ours, theirs] = [await buildSite(), await buildSite()];
        const client = await roleAt(ours, as);
        const answer = await client.send(await call(theirs));
        expect(answer.status).toBe(404);
        expect(answer.body.code).toBe("not-found");
      });
    }

    test(`403 as ${not}`, async () => {
      const site = await buildSite();
      const client = await roleAt(site, not);
      const answer = await client.send(await call(site));
      expect(answer.status).toBe(403);
      expect(answer.body.code).toBe("forbidden");
    });

    if (bad) {
      test("bad input is refused and changes nothing", async () => {
        const site = await buildSite();
        const good = await call(site);
        const client = await roleAt(site, as);
        const body = bad.body ? { ...good.body, ...bad.body } : good.body;
        const path = bad.path ? `${good.path}${bad.path}` : good.path;
        const answer = await client.send({ ...good, body, path });
        // An id that is none is an address where nothing is; no field of it is wrong.
        const isAddress = bad.path !== undefined && !path.includes("?");
        expect(answer.status).toBe(isAddress ? 404 : 422);
        expect(answer.headers["content-type"]).toContain("application/problem+json");
        const fields = answer.body.issues.map((found: { path: string[] }) => found.path.join("."));
        if (endpoint.badField) expect(fields).toContain(endpoint.badField);
        const events = await select("SELECT 1 FROM audit_events WHERE organization_id = $1", [
          site.organizationId,
        ]);
        expect(events).toHaveLength(0);
      });
    }

    test(event ? `does it and leaves ${event}` : "answers", async () => {
      const site = await buildSite();
      const user = await buildUser({ organizationId: site.organizationId, roles: [as] });
      const client = await signInAs(user);
      const sent = await call(site);
      const answer = await client.send(sent);
      expect(answer.body.issues ?? []).toEqual([]);
      expect(answer.status).toBe(endpoint.status ?? (sent.method === "post" ? 201 : 200));
      const events = await select<{ action: string; actor_id: string }>(
        "SELECT action, actor_id FROM audit_events WHERE organization_id = $1 ORDER BY id",
        [site.organizationId],
      );
      expect(events.map(({ action }) => action)).toEqual(
        event ? expect.arrayContaining([event]) : [],
      );
      expect(new Set(events.map((found) => found.actor_id))).toEqual(
        new Set(event ? [user.id] : []),
      );
    });
  });
}
