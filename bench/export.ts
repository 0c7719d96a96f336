import { execFileSync } from "node:child_process";
import {
  createWriteStream,
  mkdtempSync,
  openAsBlob,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { Readable } from "node:stream";
import { pipeline } from "node:stream/promises";
import { deflateRawSync } from "node:zlib";
import { yearQuery } from "../server/exports/year-csv";
import { tableQuery, yearTables } from "../server/exports/year-tables";
import { Actor } from "../server/lib/policy";
import { METHODS } from "../shared/acoustics/methods";
import type { DayInput, RuleSetVersion } from "../shared/acoustics/types";
import { ruleSetVersion } from "../shared/rule-sets";
import { checkYearFile, isSound } from "../shared/year-file/check-year-file";
import { RESULTS_FOLDER, type ResultLine } from "../shared/year-file/manifest";
import { readLines } from "../shared/year-file/read-records";
import { readZip } from "../shared/year-file/read-zip";
import { measureBeside, title } from "./lib/measure";
import { baseUrl, openDatabase, organizations, signIn } from "./lib/scale";

/** Peak and present memory of the web process, MB. */
function memoryMb(): { peakMb: number; nowMb: number } {
  const status = readFileSync(`/proc/${process.env.WEB_PID}/status`, "utf8");
  const read = (name: string) =>
    Number(new RegExp(`${name}:\\s+(\\d+) kB`).exec(status)?.[1] ?? Number.NaN) / 1000;
  return { peakMb: read("VmHWM"), nowMb: read("VmRSS") };
}

/** From here on the peak is that of what follows. */
const forgetPeak = () => writeFileSync(`/proc/${process.env.WEB_PID}/clear_refs`, "5");

interface SiteYear {
  siteId: string;
  year: number;
  /** Days on record. */
  count: number;
  /** Of an auditor of its organization. */
  headers: Record<string, string>;
}

const db = await openDatabase();
/** The site and year with most days of an organization. */
async function largest(organizationId: string): Promise<SiteYear> {
  const { rows } = await db.query<Omit<SiteYear, "headers">>(
    `SELECT site_id AS "siteId", extract(year FROM date)::int AS year, count(*)::int AS count FROM days WHERE organization_id = $1 AND date > '2010-01-01' GROUP BY 1, 2 ORDER BY 3 DESC LIMIT 1`,
    [organizationId],
  );
  return { ...rows[0]!, headers: await signIn(db, organizationId, "auditor") };
}
const all = await organizations(db);
const { id: organizationId } = all.at(-1)!;
/** Few people for years beside many for one: a year of the first has a fraction of the second's days. */
const small = await largest(all[0]!.id);
const large = await largest(organizationId);
const { siteId, year, count, headers } = large;
await db.query("ANALYZE");
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

const folder = mkdtempSync(join(tmpdir(), "dinward-bench-export-"));
/** Takes a file to the disk, and says how long it took and how much memory the web process had at most meanwhile. */
async function take(kind: "zip" | "xlsx", of: SiteYear) {
  const file = join(folder, `${of.siteId}-${of.year}.${kind}`);
  forgetPeak();
  const began = performance.now();
  const answer = await fetch(
    `${baseUrl}/exports/year.${kind}?siteId=${of.siteId}&year=${of.year}`,
    { headers: of.headers },
  );
  if (!answer.ok) throw new Error(`${kind}: ${answer.status}`);
  await pipeline(Readable.fromWeb(answer.body as never), createWriteStream(file));
  const seconds = (performance.now() - began) / 1000;
  return { file, seconds, bytes: statSync(file).size, ...memoryMb() };
}
const countText = (value: number) => Math.round(value).toLocaleString("en");
try {
  const least = await take("zip", small);
  const zip = await take("zip", large);
  const entries = await readZip(await openAsBlob(zip.file));
  const sizeBytes = entries.reduce((sum, entry) => sum + entry.sizeBytes, 0);
  // What any such file costs: the same records out of the database, and the same bytes packed.
  let boundBegan = performance.now();
  const copies = yearTables(auditor, { siteId, year, workers: "number", salt: "0".repeat(32) }).map(
    (table) =>
      `\\copy (${tableQuery(table).replace(/\s+/g, " ")}) TO '/dev/null' WITH (FORMAT csv, HEADER true)`,
  );
  const settings = `SELECT set_config('app.organization', '${organizationId}', false)`;
  execFileSync(
    process.env.PSQL!,
    [
      "-X",
      "-q",
      "-d",
      process.env.DATABASE_URL!,
      ...[settings, ...copies].flatMap((one) => ["-c", one]),
    ],
    { stdio: ["ignore", "ignore", "inherit"] },
  );
  const copied = (performance.now() - boundBegan) / 1000;
  const lines: ResultLine[] = [];
  let packing = 0;
  for (const entry of entries) {
    const content = Buffer.from(await new Response(entry.stream()).arrayBuffer());
    boundBegan = performance.now();
    deflateRawSync(content);
    packing += (performance.now() - boundBegan) / 1000;
    if (entry.path.startsWith(RESULTS_FOLDER))
      for await (const line of readLines(Readable.from([content])))
        lines.push(JSON.parse(line) as ResultLine);
  }
  title(
    `A year with its workings (ZIP): ${countText(lines.length)} results, ${(sizeBytes / 1e6).toFixed(1)} MB, packed ${(zip.bytes / 1e6).toFixed(1)} MB`,
  );
  const mb = (bytes: number, seconds: number) => `${(bytes / 1e6 / seconds).toFixed(1)} MB/s`;
  console.log(
    `  over HTTP ${mb(sizeBytes, zip.seconds)}, ${countText(lines.length / zip.seconds)} results/s; tables by psql \\copy and the same bytes packed, ${mb(sizeBytes, copied + packing)}; × ${(zip.seconds / (copied + packing)).toFixed(2)}`,
  );
  console.log(
    `  memory of the web process: peak ${zip.peakMb.toFixed(0)} MB; with ${countText(small.count)} days in place of ${countText(count)}, ${least.peakMb.toFixed(0)} MB`,
  );

  const fewest = await take("xlsx", small);
  const workbook = await take("xlsx", large);
  title(`The same year as a workbook (XLSX): ${(workbook.bytes / 1e6).toFixed(1)} MB`);
  console.log(
    `  over HTTP ${mb(workbook.bytes, workbook.seconds)} packed, ${workbook.seconds.toFixed(1)} s; tables by psql \\copy ${copied.toFixed(1)} s; × ${(workbook.seconds / copied).toFixed(2)}`,
  );
  console.log(
    `  memory of the web process: peak ${workbook.peakMb.toFixed(0)} MB; with ${countText(small.count)} days in place of ${countText(count)}, ${fewest.peakMb.toFixed(0)} MB`,
  );

  const computed = lines.filter(({ origin }) => origin === "computed");
  const find = ({ key, version }: { key: string; version: number }) =>
    ruleSetVersion(key, version)!;
  const [checking, evaluating] = await measureBeside(
    3,
    async () => {
      const report = await checkYearFile(await openAsBlob(zip.file));
      if (!isSound(report) || report.rederived !== computed.length)
        throw new Error("the file does not verify");
    },
    async () => {
      for (const { methodVersion, input, governing, comparison } of computed)
        METHODS[methodVersion]!.evaluateDay(
          input as DayInput,
          find(governing),
          comparison.map(find) as RuleSetVersion[],
        );
    },
  );
  title("Its verification: hashes, and each result derived from its inputs");
  const perSecond = (ms: number) => `${countText(computed.length / (ms / 1000))} results/s`;
  console.log(
    `  ${perSecond(checking.p50)}; the same inputs evaluated and nothing else ${perSecond(evaluating.p50)}; × ${(checking.p50 / evaluating.p50).toFixed(2)}`,
  );
} finally {
  rmSync(folder, { recursive: true });
}
