import { parseArgs } from "node:util";
import { Sequelize } from "sequelize";
import { withDatedRecords } from "../seeders/lay-out/clock";
import { layOutDemo } from "../seeders/lay-out/demo";
import { configOrExit } from "./config";
import { connect } from "./lib/db";
import { defineModels } from "./models";

/** Fills an empty database with the demo, dated back from now: --months=18 unless told. */
const { values } = parseArgs({ options: { months: { type: "string", default: "18" } } });
const months = Number(values.months);
const { DATABASE_URL, DATA_DIR, OWNER_DATABASE_URL } = configOrExit("owner");
const { PUBLIC_URL } = configOrExit("work");
const owner = new Sequelize(OWNER_DATABASE_URL, { logging: false, pool: { max: 2 } });
const application = connect(DATABASE_URL, { max: 4, application: "dinward-seed" });

try {
  if (!(months >= 2 && months <= 60)) throw new Error("--months is a number from 2 to 60");
  defineModels(application);
  const analyze = async () => void (await owner.query("ANALYZE"));
  const summary = await withDatedRecords(owner, () =>
    layOutDemo({ months, now: new Date(), dataFolder: DATA_DIR, publicUrl: PUBLIC_URL, analyze }),
  );
  await analyze();
  console.log(summary);
} catch (error) {
  console.error(
    `Filling the demo failed: ${error instanceof Error ? (error.stack ?? error.message) : error}`,
  );
  process.exitCode = 1;
} finally {
  await application.close();
  await owner.close();
}
