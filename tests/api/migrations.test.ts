import { Sequelize } from "sequelize";
import { expect, test } from "vitest";
import { migrations } from "../../migrations";
import { migrateDown, migrateUp, pendingMigrations } from "../../server/lib/migrator";
import { buildAssignment, buildDay, buildUser, buildWorker, testApp } from "../factories";
import { copyDatabase, dropDatabase } from "../setup/copy-database";

testApp();

test("up, with data in it all the way down, and up again", async () => {
  // Rows in this file's database, then a way down and up through every migration.
  const worker = await buildWorker();
  await buildAssignment({ worker });
  await buildDay(worker, "2026-01-05");
  await buildUser({
    organizationId: worker.organizationId,
    workerId: worker.id,
    roles: ["worker"],
  });
  const url = process.env.OWNER_DATABASE_URL ?? "";
  const db = new Sequelize(url, { logging: false, pool: { max: 3 } });
  try {
    const count = async (table: string) =>
      (await db.query(`SELECT count(*)::int AS count FROM ${table}`))[0][0];
    expect(await count("day_results")).toEqual({ count: 1 });
    expect(await pendingMigrations(db)).toEqual([]);
    expect((await migrateDown(db, 0)).length).toBe(migrations.length);
    const [left] = await db.query("SELECT tablename FROM pg_tables WHERE schemaname = 'public'");
    expect(left).toEqual([{ tablename: "schema_migrations" }]);
    expect(await migrateUp(db, url, "dinward_app")).toEqual(migrations.map(({ name }) => name));
    expect(await migrateUp(db, url, "dinward_app")).toEqual([]);
    expect(await count("workers")).toEqual({ count: 0 });
  } finally {
    await db.close();
  }
});

test("two processes that start at once migrate one after the other", async () => {
  const { name, ownerUrl } = await copyDatabase("two_migrators");
  const connect = () => new Sequelize(ownerUrl, { logging: false, pool: { max: 3 } });
  const [first, second] = [connect(), connect()];
  try {
    await migrateDown(first, 0);
    const done = await Promise.all(
      [first, second].map((db) => migrateUp(db, ownerUrl, "dinward_app")),
    );
    expect(done.map(({ length }) => length).toSorted((a, b) => a - b)).toEqual([
      0,
      migrations.length,
    ]);
  } finally {
    await Promise.all([first.close(), second.close()]);
    await dropDatabase(name);
  }
});
