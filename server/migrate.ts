import { Sequelize } from "sequelize";
import { configOrExit } from "./config";
import { migrateDown, migrateUp } from "./lib/migrator";

const config = configOrExit("owner");
const db = new Sequelize(config.OWNER_DATABASE_URL, { logging: false, pool: { max: 3 } });
const direction = process.argv[2] ?? "up";

try {
  if (direction !== "up" && direction !== "down") throw new Error("say up (or nothing) or down");
  const done =
    direction === "up"
      ? await migrateUp(
          db,
          config.OWNER_DATABASE_URL,
          decodeURIComponent(new URL(config.DATABASE_URL).username),
        )
      : await migrateDown(db, (process.argv[3] as string | undefined) ?? 0);
  console.log(done.length === 0 ? "The schema is up to date." : `${direction}: ${done.join(", ")}`);
} catch (error) {
  console.error(
    `The migration failed and changed nothing: ${error instanceof Error ? error.message : error}`,
  );
  process.exitCode = 1;
} finally {
  await db.close();
}
