import { createHash } from "node:crypto";
import type { Writable } from "node:stream";
import type pg from "pg";
import { to as copyTo } from "pg-copy-streams";
import { RESULT_COLUMNS } from "../../shared/day/result-facts";
import {
  MANIFEST,
  type ManifestFile,
  RESULTS_FOLDER,
  type ResultLine,
  type YearManifest,
} from "../../shared/year-file/manifest";
import { row, rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy } from "../policies";
import { type DayRefs, hydrateDays } from "../queries/day-inputs";
import { trailHead } from "../queries/trail-check";
import { checkPage } from "./check-page";
import { RecordEnds } from "./record-ends";
import { readYear } from "./year-snapshot";
import { csvMetadata, tableQuery, workerSql, type YearRecords, yearTables } from "./year-tables";
import { ZipStream } from "./zip-stream";

/** Results built from their references at once. */
const BATCH = 200;

interface StoredResult {
  id: string;
  workerId: string;
  worker: string;
  date: string;
  isCurrent: boolean;
  origin: "computed" | "imported";
  methodVersion: number;
  inputsSha256: string;
  refs: DayRefs;
  outcome: Record<string, unknown>;
}

/** What is stored of a result, by the names of `resultFacts`. */
const outcomeSql = `jsonb_build_object(${Object.entries(RESULT_COLUMNS)
  .map(([column, [member]]) => `'${member}', r.${column}`)
  .join(", ")})`;

/** A month's results, those in force and earlier ones, with the inputs that they were computed from. */
async function* resultLines(
  actor: Actor,
  asked: YearRecords,
  month: string,
  count: { rows: number },
): AsyncGenerator<Buffer> {
  let after = { date: "", id: "" };
  for (;;) {
    const batch = await rows<StoredResult>(
      `SELECT r.id, r.worker_id AS "workerId", ${workerSql("w", asked)} AS worker, r.date::text AS date, coalesce(d.current_result_id = r.id, FALSE) AS "isCurrent",
         r.origin, r.method_version AS "methodVersion", encode(r.inputs_hash, 'hex') AS "inputsSha256", r.refs, ${outcomeSql} AS outcome
       FROM day_results r JOIN workers w ON w.id = r.worker_id LEFT JOIN days d ON d.worker_id = r.worker_id AND d.date = r.date
       WHERE r.site_id = $1 AND r.date >= $2::date AND r.date < $2::date + interval '1 month' AND ${visible(dayPolicy, actor, "r")}
         AND ($3 = '' OR (r.date, r.id) > (nullif($3, '')::date, nullif($4, '')::uuid))
       ORDER BY r.date, r.id LIMIT ${BATCH}`,
      [asked.siteId, `${month}-01`, after.date, after.id],
    );
    const computed = batch.filter(({ origin }) => origin === "computed");
    const inputs = await hydrateDays(computed);
    const inputOf = new Map(computed.map(({ id }, place) => [id, inputs[place]]));
    const lines = batch.map((found) => {
      const { id, worker, date, isCurrent, origin, methodVersion, inputsSha256, refs, outcome } =
        found;
      const input = inputOf.get(id);
      const named = ([key, version]: [string, number]) => ({ key, version });
      const line: ResultLine = {
        id,
        worker,
        date,
        isCurrent,
        origin,
        methodVersion,
        governing: named(refs.governing),
        comparison: refs.comparison.map(named),
        inputsSha256,
        input: input ? { ...input, workerId: worker } : null,
        outcome,
      };
      return JSON.stringify(line);
    });
    if (lines.length > 0) yield Buffer.from(`${lines.join("\n")}\n`);
    count.rows += lines.length;
    if (batch.length < BATCH) return;
    const last = batch.at(-1)!;
    after = { date: last.date, id: last.id };
  }
}

/**
 * Records of a query as CSV, passed through from COPY to whoever adds them to a file; `count` says how many there were, without
 * the head.
 */
export async function copyRecords(
  client: pg.Client,
  query: string,
  add: (records: AsyncIterable<Buffer>, count: () => number) => Promise<void>,
): Promise<void> {
  const records = client.query(
    copyTo(`COPY (${query}) TO STDOUT WITH (FORMAT csv, HEADER true, ENCODING 'UTF8')`),
  );
  const ends = new RecordEnds();
  records.on("error", (error) => ends.destroy(error));
  try {
    await add(records.pipe(ends), () => ends.count - 1);
  } catch (error) {
    // What nobody reads any more runs out, or the connection would wait for its reader for ever.
    records.unpipe(ends);
    records.resume();
    throw error;
  }
}

/** A year's file of one state of the database. */
export function streamYearZip(
  actor: Actor,
  asked: YearRecords,
  madeAt: Date,
  out: Writable,
  onManifest: (sha256: string) => Promise<void>,
): Promise<void> {
  return readYear(actor.organizationId, (client) =>
    writeYearZip(client, actor, asked, madeAt, out, onManifest),
  );
}

/**
 * A site's year with all its records as a ZIP, written while it is read inside `readYear`. The manifest is the last but the
 * ZIP's own list: a file that breaks off has neither.
 * Before the ZIP is ended `onManifest` hears the manifest's SHA-256.
 */
export async function writeYearZip(
  client: pg.Client,
  actor: Actor,
  asked: YearRecords,
  madeAt: Date,
  out: Writable,
  onManifest: (sha256: string) => Promise<void>,
): Promise<void> {
  const { organizationId } = actor;
  const zip = new ZipStream(out, madeAt);
  const files: ManifestFile[] = [];
  const add = async (
    path: string,
    content: AsyncIterable<Buffer> | Iterable<Buffer>,
    count: () => number | null,
  ) => {
    const facts = await zip.add(path, content);
    files.push({ path, ...facts, rows: count() });
  };
  const addText = (path: string, text: string) => add(path, [Buffer.from(text)], () => null);

  const tables = yearTables(actor, asked);
  await addText("check.html", await checkPage());
  await addText("csv-metadata.json", `${JSON.stringify(csvMetadata(tables), null, 1)}\n`);
  for (const table of tables) {
    await copyRecords(client, tableQuery(table), (records, count) =>
      add(`${table.name}.csv`, records, count),
    );
  }
  const months = await rows<{ month: string }>(
    `SELECT DISTINCT to_char(r.date, 'YYYY-MM') AS month FROM day_results r WHERE r.site_id = $1 AND r.date >= make_date($2, 1, 1) AND r.date <= make_date($2, 12, 31)
         AND ${visible(dayPolicy, actor, "r")} ORDER BY 1`,
    [asked.siteId, asked.year],
  );
  for (const { month } of months) {
    const count = { rows: 0 };
    await add(
      `${RESULTS_FOLDER}${month}.jsonl`,
      resultLines(actor, asked, month, count),
      () => count.rows,
    );
  }
  const facts = await row<
    Pick<YearManifest, "organization" | "site" | "timeZone" | "ruleSets" | "methodVersions">
  >(
    `WITH found AS (SELECT DISTINCT r.governing_rule_set AS key, r.governing_version AS version, r.method_version FROM day_results r
         WHERE r.site_id = :siteId AND r.date >= make_date(:year, 1, 1) AND r.date <= make_date(:year, 12, 31) AND ${visible(dayPolicy, actor, "r")})
       SELECT o.name AS organization, s.name AS site, s.time_zone AS "timeZone",
         (SELECT coalesce(json_agg(DISTINCT jsonb_build_object('key', key, 'version', version)), '[]') FROM found) AS "ruleSets",
         (SELECT coalesce(json_agg(DISTINCT method_version), '[]') FROM found) AS "methodVersions"
       FROM sites s JOIN organizations o ON o.id = s.organization_id WHERE s.id = :siteId`,
    { siteId: asked.siteId, year: asked.year },
  );
  const manifest: YearManifest = {
    format: 1,
    madeAt: madeAt.toISOString(),
    ...facts!,
    year: asked.year,
    workers: asked.workers,
    trail: await trailHead(organizationId),
    files,
  };
  const text = Buffer.from(`${JSON.stringify(manifest, null, 1)}\n`);
  await zip.add(MANIFEST, [text]);
  await onManifest(createHash("sha256").update(text).digest("hex"));
  await zip.end();
}
