import { execFile } from "node:child_process";
import { promisify } from "node:util";
import { expect, test } from "vitest";
import { recomputeDays } from "../../server/commands/recompute-days";
import { inTransaction } from "../../server/lib/db";
import { select, testApp } from "../factories";
import { projectFolder } from "../setup/processes";

test("scale data are what the application itself would have computed", async () => {
  testApp();
  const flags = ["--shifts=600", "--days-a-worker=20"];
  await promisify(execFile)(
    process.execPath,
    ["--import", "tsx", "server/seed-scale.ts", ...flags],
    {
      cwd: projectFolder,
    },
  );
  const days = await select<{ organization_id: string; workerId: string; date: string }>(
    `SELECT organization_id, worker_id AS "workerId", date::text AS date FROM days`,
  );
  expect(days).toHaveLength(600);
  const { organization_id: organizationId = "" } = days[0] ?? {};
  const findings = () =>
    select(
      "SELECT id, state, days_count, first_date::text, last_date::text FROM findings WHERE organization_id = $1 ORDER BY id",
      [organizationId],
    );
  const before = await findings();
  expect(before.length).toBeGreaterThan(0);
  const again = await inTransaction({ organizationId }, () => recomputeDays(organizationId, days));
  expect(again.days.filter(({ isChanged }) => isChanged)).toEqual([]);
  expect(again.opened).toEqual([]);
  expect(await findings()).toEqual(before);
});
