/** The work process's sealer alone, as server/work.ts runs it, until it is told to end. */
import { setTimeout as sleep } from "node:timers/promises";
import { sealTrail } from "../../server/lib/audit";
import { connect, inTransaction, sequelize } from "../../server/lib/db";

const organizationId = process.argv[2]!;
let isStopping = false;
process.once("SIGTERM", () => {
  isStopping = true;
});
connect(process.env.DATABASE_URL!, { max: 2 });
process.send!("ready");
while (!isStopping) {
  while ((await inTransaction({ organizationId }, () => sealTrail(organizationId))) === 5000);
  await sleep(1000);
}
await sequelize().close();
process.disconnect();
