import { execFileSync } from "node:child_process";
import { readFileSync } from "node:fs";
import { yearQuery } from "../server/exports/year-csv";
import { Actor } from "../server/lib/policy";
import { measureBeside, title } from "./lib/measure";
import { baseUrl, openDatabase, organizations, signIn } from "./lib/scale";

/** Peak and present memory of the web process, MB. */
function memoryMb(): { peakMb: number; nowMb: number } {
  const status = readFileSync(`/proc/${process.env.WEB_PID}/status`, "utf8");
  const read = (name: string) =>
    Number(new RegExp(`${name}:\\s+(\\d+) kB`).exec(status)?.[1] ?? Number.NaN) / 1000;
  return { peakMb: read("VmHWM"), nowMb: read("VmRSS") };
}

const db = await openDatabase();
const { id: organizationId } = (await organizations(db)).at(-1)!;
const { rows } = await db.query<{ siteId: string; year: number; count: number }>(
  `SELECT site_id AS "siteId", extract(year FROM date)::int AS year, count(*)::int AS count FROM days WHERE organization_id = $1 AND date > '2010-01-01' GROUP BY 1, 2 ORDER BY 3 DESC LIMIT 1`,
  [organizationId],
);
const { siteId, year, count } = rows[0]!;
const headers = await signIn(db, organizationId, "auditor");
await db.query("ANALYZE days");
await db.end();

const nobody = "00000000-0000-4000-8000-000000000000";
const auditor = new Actor(nobody, organizationId, "", null, "en", null, [
  { role: "auditor", siteId: null },
]);
const query = yearQuery(auditor, { siteId, year, workers: "number" }).replace(/\s+/g, " ");
const before = memoryMb();
let bytes = 0;
const [ours, bound] = await measureBeside(
  5,
  async () => {
    const answer = await fetch(`${baseUrl}/exports/year.csv?siteId=${siteId}&year=${year}`, {
      headers,
    });
    bytes = 0;
    let last = Buffer.alloc(0);
    for await (const chunk of answer.body as unknown as AsyncIterable<Uint8Array>) {
      bytes += chunk.length;
      last = Buffer.from(chunk);
    }
    if (!new RegExp(`rows,${count},*\r\n$`).test(last.toString()))
      throw new Error("the file is not whole");
  },
  async () => {
    const arguments_ = [
      "-X",
      "-q",
      "-d",
      process.env.DATABASE_URL!,
      "-c",
      `SELECT set_config('app.organization', '${organizationId}', false)`,
      "-c",
      `\\copy (${query}) TO '/dev/null' WITH (FORMAT csv, HEADER true)`,
    ];
    execFileSync(process.env.PSQL!, arguments_, { stdio: ["ignore", "ignore", "inherit"] });
  },
);
const after = memoryMb();
title(`A year's file: ${count} rows, ${(bytes / 1e6).toFixed(1)} MB`);
const rate = (ms: number) => `${Math.round(count / (ms / 1000)).toLocaleString("en")} rows/s`;
console.log(
  `  over HTTP ${rate(ours.p50)}; psql \\copy of the same rows ${rate(bound.p50)}; × ${(ours.p50 / bound.p50).toFixed(2)}  (goal 2)`,
);
console.log(
  `  memory of the web process: peak ${after.peakMb.toFixed(0)} MB, before the first file ${before.peakMb.toFixed(0)} MB`,
);
