import pg from "pg";
import { afterAll, beforeAll, describe, expect, inject, test } from "vitest";
import { sealTrail } from "../../server/lib/audit";
import { inTransaction } from "../../server/lib/db";
import { checkRows, checkSeals, trailState } from "../../server/queries/trail-check";
import { buildOrganization, buildSite, buildUser, select, signInAs, testApp } from "../factories";
import { describeEndpoint } from "./five-cases";

testApp();

let superuser: pg.Client;
beforeAll(async () => {
  const url = new URL(inject("database").superUrl);
  url.pathname = new URL(process.env.OWNER_DATABASE_URL ?? "").pathname;
  superuser = new pg.Client({ connectionString: url.href });
  await superuser.connect();
});
afterAll(() => superuser.end());

/** As somebody does who knows how to keep triggers and foreign keys quiet. */
async function behindTheTrail(text: string, values: unknown[] = []): Promise<pg.QueryResult> {
  await superuser.query("SET session_replication_role = replica");
  try {
    return await superuser.query(text, values);
  } finally {
    await superuser.query("SET session_replication_role = origin");
  }
}

const read = <T>(organizationId: string, work: () => Promise<T>) =>
  inTransaction({ organizationId, readOnly: true }, work);
const seal = (organizationId: string) =>
  inTransaction({ organizationId }, () => sealTrail(organizationId));
const checkTable = (organizationId: string, table: string) =>
  read(organizationId, () => checkRows(organizationId, table));

/** Areas named by an officer through the API, sealed. */
async function writeAreas(names: readonly string[]) {
  const site = await buildSite();
  const { organizationId } = site;
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  for (const name of names)
    expect((await officer.post("/areas", { siteId: site.id, name })).status).toBe(201);
  await seal(organizationId);
  return { site, organizationId, officer };
}

describe("the chain", () => {
  const check = (organizationId: string) =>
    read(organizationId, () => checkSeals(organizationId, 0));
  const eventOf = async (organizationId: string, place: number) =>
    (
      await select<{ id: string; number: number }>(
        "SELECT e.id, s.number::int AS number FROM audit_events e JOIN audit_seals s ON s.event_id = e.id WHERE e.organization_id = $1 ORDER BY e.id OFFSET $2 LIMIT 1",
        [organizationId, place],
      )
    )[0]!;

  test("names an event that was changed, and only that one", async () => {
    const { organizationId } = await writeAreas(["One", "Two", "Three"]);
    const { id, number } = await eventOf(organizationId, 1);
    await behindTheTrail("UPDATE audit_events SET at = at + interval '1 minute' WHERE id = $1", [
      id,
    ]);
    expect((await check(organizationId)).faults).toEqual([
      {
        kind: "seal-broken",
        number,
        count: 1,
        event: expect.objectContaining({ id, action: "create-area" }),
        table: null,
      },
    ]);
  });

  test("names an event that was removed, a missing seal, changed values and removed ones", async () => {
    const { organizationId } = await writeAreas(["One", "Two", "Three", "Four", "Five"]);
    const [gone, unsealed, changed, removed] = await Promise.all(
      [0, 1, 2, 3].map((place) => eventOf(organizationId, place)),
    );
    await behindTheTrail("DELETE FROM audit_events WHERE id = $1", [gone!.id]);
    await behindTheTrail("DELETE FROM audit_seals WHERE event_id = $1", [unsealed!.id]);
    await behindTheTrail(
      `UPDATE audit_values SET recorded = recorded || '{"name": "Else"}' WHERE event_id = $1`,
      [changed!.id],
    );
    await behindTheTrail("DELETE FROM audit_values WHERE event_id = $1", [removed!.id]);
    const { faults, erased: count } = await check(organizationId);
    expect(faults.map(({ kind, number }) => [kind, number])).toEqual([
      ["event-missing", gone!.number],
      ["seal-missing", unsealed!.number],
      ["values-changed", changed!.number],
      ["values-removed", removed!.number],
    ]);
    // No erasure took them (tests/api/retention.test.ts).
    expect(count).toBe(0);
  });

  test("names entries on rows that were changed or removed, and goes on in stretches", async () => {
    const { organizationId } = await writeAreas(["One", "Two"]);
    const entries = await select<{ id: string; number: number }>(
      "SELECT n.id, s.number::int AS number FROM trail_entries n JOIN audit_seals s ON s.entry_id = n.id WHERE n.organization_id = $1 AND n.table_name = 'areas' ORDER BY n.id",
      [organizationId],
    );
    await behindTheTrail("UPDATE trail_entries SET digests = ARRAY['\\x00'::bytea] WHERE id = $1", [
      entries[0]!.id,
    ]);
    await behindTheTrail("DELETE FROM trail_entries WHERE id = $1", [entries[1]!.id]);
    const found = [];
    for (let after: number | null = 0; after !== null; ) {
      const from: number = after;
      const part = await read(organizationId, () => checkSeals(organizationId, from, 2));
      found.push(...part.faults);
      after = part.next;
    }
    expect(found.map(({ kind, number, table }) => [kind, number, table])).toEqual([
      ["seal-broken", entries[0]!.number, "areas"],
      ["entry-missing", entries[1]!.number, null],
    ]);
  });

  test("says what has no seal yet, and where the chain ends", async () => {
    const { organizationId, officer, site } = await writeAreas(["One"]);
    const state = () => read(organizationId, () => trailState(organizationId));
    const sealed = await state();
    expect(sealed.tail).toEqual({ events: 0, entries: 0, since: null });
    const [last] = await select<{ number: number; hash: string }>(
      "SELECT number::int AS number, encode(hash, 'hex') AS hash FROM audit_seals WHERE organization_id = $1 ORDER BY number DESC LIMIT 1",
      [organizationId],
    );
    expect(sealed.head).toMatchObject(last!);
    expect((await officer.post("/areas", { siteId: site.id, name: "Two" })).status).toBe(201);
    const { tail } = await state();
    expect(tail).toEqual({ events: 1, entries: 1, since: expect.any(String) });
  });
});

describe("rows against the trail", () => {
  test("what the application writes is as the trail says", async () => {
    const { organizationId, officer, site } = await writeAreas(["One", "Two"]);
    const [area] = await select<{ id: string }>(
      "SELECT id FROM areas WHERE organization_id = $1 ORDER BY name LIMIT 1",
      [organizationId],
    );
    const changed = await officer.send({
      method: "put",
      path: `/areas/${area!.id}`,
      body: { siteId: site.id, name: "Changed", zone: "single", isArchived: false },
      revision: 1,
    });
    expect(changed.status).toBe(200);
    const { tables, unwatched } = await read(organizationId, () => trailState(organizationId));
    expect(unwatched).toEqual([]);
    for (const table of tables)
      expect((await checkTable(organizationId, table)).faults, table).toEqual([]);
  });

  test("another database role's change without an event is named, though the triggers ran", async () => {
    const { organizationId } = await writeAreas(["One"]);
    await superuser.query(
      "UPDATE areas SET zone = 'double' WHERE organization_id = $1 AND name = 'One'",
      [organizationId],
    );
    const { foreign } = await read(organizationId, () => trailState(organizationId));
    expect(foreign).toContainEqual(
      expect.objectContaining({ table: "areas", operation: "update", rows: 1 }),
    );
    expect((await checkTable(organizationId, "areas")).faults).toEqual([]);
  });

  test("a table whose triggers are off is named", async () => {
    const { id } = await buildOrganization();
    await superuser.query("ALTER TABLE areas DISABLE TRIGGER trail_update");
    try {
      const { unwatched } = await read(id, () => trailState(id));
      expect(unwatched).toEqual(["areas"]);
    } finally {
      await superuser.query("ALTER TABLE areas ENABLE TRIGGER trail_update");
    }
  });

  test("after a change of a table's columns untouched rows verify on, and a row that was tampered with before stays named", async () => {
    const { organizationId } = await writeAreas(["One", "Two"]);
    await behindTheTrail(
      "UPDATE areas SET zone = 'double' WHERE organization_id = $1 AND name = 'One'",
      [organizationId],
    );
    await superuser.query("ALTER TABLE areas ADD COLUMN floor text DEFAULT 'ground'");
    await superuser.query("CALL watch_rows()");
    try {
      const { faults } = await checkTable(organizationId, "areas");
      expect(faults.map(({ kind }) => kind)).toEqual(["row-changed"]);
      await behindTheTrail(
        "UPDATE areas SET floor = 'first' WHERE organization_id = $1 AND name = 'Two'",
        [organizationId],
      );
      expect((await checkTable(organizationId, "areas")).faultCount).toBe(2);
    } finally {
      await superuser.query("ALTER TABLE areas DROP COLUMN floor");
      await superuser.query("CALL watch_rows()");
    }
  });
});

/** A value of each type that columns have; another one for another `n`. */
function sqlValue(type: string, n: number): string {
  if (type.endsWith("[]")) return `ARRAY[${sqlValue(type.slice(0, -2), n)}]::${type}`;
  if (type === "uuid") return `'00000000-0000-4000-8000-${String(n).padStart(12, "0")}'::uuid`;
  if (type === "boolean") return String(n % 2 === 0);
  if (type === "date") return `date '2020-01-01' + ${n}`;
  if (type === "daterange") return `daterange('2020-01-01', date '2020-01-02' + ${n})`;
  if (type === "tstzrange" || type === "tsrange")
    return `${type}('2020-01-01', ${type === "tsrange" ? "timestamp" : "timestamptz"} '2020-01-02' + ${n} * interval '1 day')`;
  if (type.startsWith("timestamp")) return `timestamptz '2020-01-01' + ${n} * interval '1 day'`;
  if (type.startsWith("time")) return `time '00:00' + ${n % 1400} * interval '1 minute'`;
  if (type === "interval") return `${n} * interval '1 minute'`;
  if (type === "json" || type === "jsonb") return `'{"n": ${n}}'::${type}`;
  if (type === "bytea") return `convert_to('${n}', 'UTF8')`;
  return `'${n}'::${type}`;
}

describe("every domain table, edited, emptied and filled by a superuser with the triggers off", () => {
  interface Table {
    name: string;
    ownerColumn: string;
    keys: string[];
    columns: { name: string; type: string }[];
  }
  let tables: Table[];

  beforeAll(async () => {
    // Made-up rows need no sense: what would ask for it goes, in this file's own database.
    const found = await superuser.query<Table>(
      `SELECT w.table_name AS name, w.owner_column AS "ownerColumn", w.key_columns AS keys,
         (SELECT json_agg(json_build_object('name', a.attname, 'type', format_type(a.atttypid, NULL)) ORDER BY a.attnum)
            FROM pg_attribute a WHERE a.attrelid = w.target AND a.attnum > 0 AND NOT a.attisdropped AND a.attgenerated = '' AND a.attidentity = '') AS columns
       FROM watched_tables w ORDER BY 1`,
    );
    tables = found.rows;
    await superuser.query(`DO $$ DECLARE x record; BEGIN
      FOR x IN SELECT format('ALTER TABLE %s DROP CONSTRAINT %I CASCADE', c.conrelid::regclass, c.conname) AS command
        FROM pg_constraint c JOIN watched_tables w ON w.target = c.conrelid WHERE c.contype IN ('c', 'f', 'x') LOOP EXECUTE x.command; END LOOP;
      FOR x IN SELECT format('DROP TRIGGER %I ON %s', t.tgname, t.tgrelid::regclass) AS command
        FROM pg_trigger t JOIN watched_tables w ON w.target = t.tgrelid WHERE NOT t.tgisinternal AND NOT starts_with(t.tgname, 'trail_') LOOP EXECUTE x.command; END LOOP;
    END $$`);
  });

  const insertText = (table: Table, organizationId: string, n: number) =>
    `INSERT INTO ${table.name} (${table.columns.map(({ name }) => `"${name}"`).join(", ")})
     VALUES (${table.columns
       .map(({ name, type }, place) =>
         name === table.ownerColumn ? `'${organizationId}'::uuid` : sqlValue(type, 100 * n + place),
       )
       .join(
         ", ",
       )}) RETURNING concat_ws(' ', ${table.keys.map((key) => `"${key}"::text`).join(", ")}) AS key`;

  test("is named, table and row", async () => {
    expect(tables.length).toBeGreaterThan(50);
    for (const table of tables) {
      const organization = await buildOrganization();
      const isOrganizations = table.ownerColumn === "id";
      const write = async (n: number, query: (text: string) => Promise<pg.QueryResult>) =>
        (await query(insertText(table, organization.id, n))).rows[0].key as string;
      const plain = (text: string) => superuser.query(text);
      const [edited, removed] = isOrganizations
        ? [organization.id, null]
        : [await write(1, plain), await write(2, plain)];
      expect((await checkTable(organization.id, table.name)).faults, table.name).toEqual([]);

      const expected: { kind: string; key: string }[] = [];
      const keyOf = `concat_ws(' ', ${table.keys.map((key) => `"${key}"::text`).join(", ")})`;
      const free = table.columns.find(
        ({ name }) => !table.keys.includes(name) && name !== table.ownerColumn,
      );
      if (free) {
        await behindTheTrail(
          `UPDATE ${table.name} SET "${free.name}" = ${sqlValue(free.type, 7)} WHERE ${keyOf} = $1`,
          [edited],
        );
        expected.push({ kind: "row-changed", key: edited });
      }
      if (removed !== null) {
        await behindTheTrail(`DELETE FROM ${table.name} WHERE ${keyOf} = $1`, [removed]);
        const inserted = await write(3, (text) => behindTheTrail(text));
        expected.push(
          { kind: "row-removed", key: removed },
          { kind: "row-inserted", key: inserted },
        );
      }
      const { faults, faultCount } = await checkTable(organization.id, table.name);
      const byKey = (a: { key: string }, b: { key: string }) => a.key.localeCompare(b.key);
      expect([...faults].sort(byKey), table.name).toEqual(expected.sort(byKey));
      expect(faultCount).toBe(expected.length);
      await behindTheTrail(`DELETE FROM ${table.name} WHERE "${table.ownerColumn}" = $1`, [
        organization.id,
      ]);
    }
  }, 120_000);
});

describeEndpoint({
  route: "GET /trail-check",
  as: "auditor",
  not: "administrator",
  bad: null,
  event: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/trail-check" }),
});
describeEndpoint({
  route: "GET /trail-check/seals",
  as: "auditor",
  not: "officer",
  bad: { path: "?after=-1" },
  badField: "after",
  event: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/trail-check/seals" }),
});
describeEndpoint({
  route: "GET /trail-check/rows/:table",
  as: "auditor",
  not: "supervisor",
  bad: { path: "X" },
  event: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/trail-check/rows/areas" }),
});
