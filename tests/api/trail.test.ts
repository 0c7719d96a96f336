import { createHash } from "node:crypto";
import pg from "pg";
import { describe, expect, test } from "vitest";
import type { z } from "zod";
import { sealTrail } from "../../server/lib/audit";
import { execute, inTransaction, rows } from "../../server/lib/db";
import { checkSeals } from "../../server/queries/trail-check";
import type { AuditEventPage } from "../../shared/schemas/audit-event";
import {
  buildArea,
  buildCrew,
  buildDay,
  buildFitTest,
  buildOrganization,
  buildShift,
  buildSite,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
  testApp,
} from "../factories";
import { historyText, importHistory } from "../factories/history";

testApp();

async function asApplication(text: string, organizationId = ""): Promise<string> {
  const client = new pg.Client({ connectionString: process.env.DATABASE_URL });
  await client.connect();
  try {
    await client.query("SELECT set_config('app.organization', $1, false)", [organizationId]);
    await client.query(text);
    return "done";
  } catch (error) {
    return (error as { code?: string }).code ?? "unknown";
  } finally {
    await client.end();
  }
}

describe("what the database itself refuses", () => {
  test("the application's role can't change or empty a record that is append-only", async () => {
    const { id } = await buildOrganization();
    for (const table of [
      "audit_events",
      "shift_revisions",
      "day_results",
      "task_levels",
      "readings",
      "audit_seals",
    ]) {
      // 42501: insufficient privilege.
      expect(
        await asApplication(`UPDATE ${table} SET organization_id = organization_id`, id),
        table,
      ).toBe("42501");
      expect(await asApplication(`DELETE FROM ${table}`, id), table).toBe("42501");
      expect(await asApplication(`TRUNCATE ${table} CASCADE`, id), table).toBe("42501");
    }
  });

  test("even the owner is stopped by the triggers", async () => {
    await buildSite();
    await expect(select("UPDATE site_settings SET wear_from_db = 80")).rejects.toMatchObject({
      code: "23001",
    });
    await expect(select("TRUNCATE audit_events CASCADE")).rejects.toMatchObject({ code: "23001" });
  });

  test("without an organization, and in another one, there are no rows and none can be written", async () => {
    const site = await buildSite();
    const other = await buildOrganization();
    const count = (organizationId?: string) =>
      inTransaction(
        { organizationId, readOnly: true },
        async () =>
          (await rows<{ count: number }>("SELECT count(*)::int AS count FROM sites"))[0]?.count,
      );
    expect(await count()).toBe(0);
    expect(await count(other.id)).toBe(0);
    expect(await count(site.organizationId)).toBe(1);
    // 42501: the row-level policy refuses the new row.
    expect(
      await asApplication(
        `INSERT INTO areas (organization_id, site_id, name) VALUES ('${site.organizationId}', '${site.id}', 'x')`,
        other.id,
      ),
    ).toBe("42501");
  });

  test("the application's role owns no table and can't get round the policies", async () => {
    const [role] = await select<{ rolsuper: boolean; rolbypassrls: boolean; owned: string }>(
      "SELECT rolsuper, rolbypassrls, (SELECT count(*) FROM pg_class c WHERE c.relowner = r.oid) AS owned FROM pg_roles r WHERE rolname = 'dinward_app'",
    );
    expect(role).toEqual({ rolsuper: false, rolbypassrls: false, owned: "0" });
  });
});

describe("the trail", () => {
  test("chains committed events, digests their values with a salt, and goes on where it stopped", async () => {
    const { id: organizationId } = await buildOrganization();
    const site = await buildSite({ organizationId });
    const officer = await buildUser({ organizationId, roles: ["officer"] });
    const client = await signInAs(officer);
    for (const name of ["Test cell 1", "Test cell 2"])
      expect((await client.post("/areas", { siteId: site.id, name })).status).toBe(201);
    const seal = () => inTransaction({ organizationId }, () => sealTrail(organizationId));
    const sealedEvents = async () =>
      (
        await select(
          "SELECT 1 FROM audit_seals WHERE organization_id = $1 AND event_id IS NOT NULL",
          [organizationId],
        )
      ).length;
    expect(await seal()).toBeGreaterThan(2);
    expect(await sealedEvents()).toBe(2);
    await buildArea({ site });
    expect((await client.post("/areas", { siteId: site.id, name: "Test cell 3" })).status).toBe(
      201,
    );
    // Two entries on rows of areas, and an event.
    expect(await seal()).toBe(3);
    expect(await sealedEvents()).toBe(3);
    expect(await seal()).toBe(0);

    // The chain by hand: SHA-256 over the seal before and the lines of what it covers.
    const sealed = await select<{ covers: string; hash: Buffer }>(
      `SELECT s.hash, CASE WHEN e.id IS NOT NULL THEN concat_ws(chr(10), e.id, to_char(e.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US'), e.actor_id,
           e.action, e.subject_kind, e.subject_id, encode(e.values_digest, 'hex'))
         ELSE concat_ws(chr(10), 'rows', n.id, to_char(n.at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US'), n.role_name, n.table_name, n.operation,
           encode(sha256(convert_to(concat_ws(chr(10), array_to_string(p.columns, chr(10)), array_to_string(p.types, chr(10)), array_to_string(n.keys, chr(10)),
             (SELECT string_agg(encode(d, 'hex'), chr(10)) FROM unnest(n.digests) d)), 'UTF8')), 'hex')) END AS covers
       FROM audit_seals s LEFT JOIN audit_events e ON e.id = s.event_id
       LEFT JOIN trail_entries n ON n.id = s.entry_id LEFT JOIN trail_shapes p ON p.id = n.shape_id WHERE s.organization_id = $1 ORDER BY s.number`,
      [organizationId],
    );
    let hash: Buffer = Buffer.alloc(32);
    for (const { covers, hash: stored } of sealed) {
      hash = createHash("sha256").update(hash).update(covers).digest();
      expect(stored.equals(hash)).toBe(true);
    }
    const checked = await inTransaction({ organizationId, readOnly: true }, () =>
      checkSeals(organizationId, 0),
    );
    expect(checked).toEqual({ checked: sealed.length, next: null, erased: 0, faults: [] });
  });

  test("an event of a transaction that is still open is left for the next time", async () => {
    const { id: organizationId } = await buildOrganization();
    const seal = () => inTransaction({ organizationId }, () => sealTrail(organizationId));
    const insert = () =>
      execute(
        "INSERT INTO audit_events (organization_id, action, subject_kind, values_digest) VALUES ($1, 'test', 'test', '\\x00')",
        [organizationId],
      );
    await inTransaction({ organizationId }, async () => {
      await insert();
      const other = await new Promise<number>((resolve, reject) => {
        // Outside this transaction's own context.
        setImmediate(() => void sealElsewhere(organizationId).then(resolve, reject));
      });
      expect(other).toBe(0);
    });
    // The event, and the organization's own row.
    expect(await seal()).toBe(2);
  });
});

describe("who reads the trail", () => {
  test("sees names for ids as far as they may see the thing, and the zone of the event's site", async () => {
    const { id: organizationId } = await buildOrganization();
    const site = await buildSite({ organizationId, timeZone: "America/Chicago" });
    const other = await buildSite({ organizationId, timeZone: "Europe/London" });
    const [own, lent] = [await buildWorker({ site }), await buildWorker({ site: other })];
    const crew = await buildCrew({ site, name: "Press night" });
    const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    for (const { id: workerId } of [own, lent]) {
      const member = { workerId, fromDate: "2026-05-04", isLoan: true };
      expect((await officer.post(`/crews/${crew.id}/memberships`, member)).status).toBe(201);
    }

    const read = async (siteId?: string) => {
      const auditor = await buildUser({ organizationId, roles: ["auditor"], siteId });
      const { body } = await (await signInAs(auditor)).get("/audit-events?subjectKind=crew");
      return body as z.infer<typeof AuditEventPage>;
    };
    const named = ({ names }: z.infer<typeof AuditEventPage>) =>
      names.map(({ kind, id, name }) => [kind, id, name]).sort();
    const ofCrew = ["crew", crew.id, "Press night"];
    const everywhere = await read();
    expect(everywhere.rows.map(({ timeZone }) => timeZone)).toEqual([
      "America/Chicago",
      "America/Chicago",
    ]);
    expect(named(everywhere)).toEqual(
      [ofCrew, ["worker", own.id, own.name], ["worker", lent.id, lent.name]].sort(),
    );
    // The lent worker belongs to a site that this auditor does not read.
    const here = await read(site.id);
    expect(here.rows).toHaveLength(2);
    expect(named(here)).toEqual([ofCrew, ["worker", own.id, own.name]].sort());
    expect(JSON.stringify(here)).not.toContain(lent.name);
    expect((await read(other.id)).rows).toEqual([]);
  });

  test("of a fit test and of a time history it is said whose and of which day", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const worker = await buildWorker({ site });
    const testedOn = daysFromToday(-2);
    const fit = await buildFitTest({ worker, testedOn });
    const reason = "the wrong device";
    const path = `/fit-tests/${fit.id}/void`;
    const struck = await officer.send({ method: "post", path, body: { reason }, revision: 1 });
    expect(struck.status).toBe(201);
    const day = daysFromToday(-3);
    await buildDay(worker, day);
    await buildShift(worker, { date: day, lengthMin: 60, tasks: [] });
    const { historyId } = await importHistory(officer, {
      site,
      worker,
      content: historyText({ levelDb: () => 80 }),
      covers: "projected",
    });
    const auditor = await signInAs(await buildUser({ organizationId, roles: ["auditor"] }));
    const { body } = await auditor.get("/audit-events");
    const { names } = body as z.infer<typeof AuditEventPage>;
    const named = (id: string) => names.find((one) => one.id === id);
    expect(named(fit.id)).toMatchObject({ kind: "fit-test", name: worker.name, date: testedOn });
    expect(named(historyId)).toMatchObject({ kind: "time-history", name: worker.name, date: day });
  });

  test("as administrator gets the names of linked workers, and nothing of the programme", async () => {
    const { id: organizationId } = await buildOrganization();
    const site = await buildSite({ organizationId });
    const worker = await buildWorker({ site });
    const client = await signInAs(await buildUser({ organizationId, roles: ["administrator"] }));
    const user = {
      name: "Linked",
      email: "linked@dinward.example",
      workerId: worker.id,
      grants: [{ role: "worker", siteId: site.id }],
    };
    expect((await client.post("/users", user)).status).toBe(201);
    const { body } = await client.get("/audit-events");
    const { names, rows: events } = body as z.infer<typeof AuditEventPage>;
    expect(events.map(({ action, timeZone }) => [action, timeZone])).toEqual([
      ["create-user", null],
    ]);
    expect(names.map(({ kind, name }) => [kind, name]).sort()).toEqual(
      [
        ["site", site.name],
        ["user", "Linked"],
        ["worker", worker.name],
      ].sort(),
    );
  });
});

async function sealElsewhere(organizationId: string): Promise<number> {
  const client = new pg.Client({ connectionString: process.env.DATABASE_URL });
  await client.connect();
  try {
    await client.query("SELECT set_config('app.organization', $1, false)", [organizationId]);
    const found = await client.query(
      "SELECT count(*)::int AS count FROM audit_events WHERE transaction_id < pg_snapshot_xmin(pg_current_snapshot())",
    );
    return found.rows[0].count;
  } finally {
    await client.end();
  }
}
