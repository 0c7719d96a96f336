import { execFileSync } from "node:child_process";
import { createHash } from "node:crypto";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { PassThrough, type Readable } from "node:stream";
import { buffer } from "node:stream/consumers";
import { parse } from "csv-parse/sync";
import request from "supertest";
import { beforeAll, describe, expect, test } from "vitest";
import { ensureProgram } from "../../scripts/lib/debian-programs.mjs";
import { recomputeDays } from "../../server/commands/recompute-days";
import { streamYearWorkbook } from "../../server/exports/year-workbook";
import { ZipStream } from "../../server/exports/zip-stream";
import { sealTrail } from "../../server/lib/audit";
import { inTransaction } from "../../server/lib/db";
import { Actor } from "../../server/lib/policy";
import { checkYearFile, isSound } from "../../shared/year-file/check-year-file";
import type { ResultLine, YearManifest } from "../../shared/year-file/manifest";
import { readZip } from "../../shared/year-file/read-zip";
import {
  buildAssignment,
  buildDay,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  insert,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";
import { describeEndpoint } from "./five-cases";

testApp();

describeEndpoint({
  route: "GET /exports/year.zip",
  as: "auditor",
  not: "worker",
  event: "export-year-records",
  bad: { path: "&workers=nobody" },
  badField: "workers",
  call: async (site) => ({ method: "get", path: `/exports/year.zip?siteId=${site.id}&year=2026` }),
});

/** Three computed days in two months, one of which was corrected since, and one that was imported. */
async function layOutYear() {
  const site = await buildSite({ name: "Ostmere, works", timeZone: "UTC" });
  const { organizationId } = site;
  const worker = await buildWorker({
    site,
    name: "Quill Amberley-Voss",
    employeeNumber: "ZX-4711",
  });
  await buildAssignment({ worker });
  const [loud, quiet] = [
    await buildTask({ site, levelDb: 97.3 }),
    await buildTask({ site, levelDb: 74 }),
  ];
  const keys = ["2026-03-02", "2026-03-03", "2026-04-01"].map((date) => ({
    workerId: worker.id,
    date,
  }));
  for (const { date } of keys) {
    await insert("days", { organizationId, workerId: worker.id, date, siteId: site.id });
    await buildShift(worker, {
      date,
      tasks: [
        { taskId: loud.id, durationMin: 110.5, wornPct: 90 },
        { taskId: quiet.id, durationMin: 369.5 },
      ],
    });
  }
  const compute = () =>
    inTransaction({ organizationId }, () => recomputeDays(organizationId, keys));
  await compute();
  await insert("task_levels", {
    organizationId,
    taskId: loud.id,
    number: 2,
    metric: JSON.stringify({ kind: "laeq" }),
    levelDb: 99.1,
    grade: "task-level",
    effectiveFrom: "2026-04-01",
    reason: "measured anew",
  });
  await compute();
  await buildDay(await buildWorker({ site }), "2026-05-04", {
    origin: "imported",
    outsideDb: 91.3,
    atEarDb: 79.6,
  });
  await inTransaction({ organizationId }, () => sealTrail(organizationId));
  return { site, worker };
}

async function takeZip(site: Site, workers = "number"): Promise<Buffer> {
  const auditor = await signInAs(
    await buildUser({ organizationId: site.organizationId, roles: ["auditor"] }),
  );
  const answer = await request(testApp())
    .get(`/api/exports/year.zip?siteId=${site.id}&year=2026&workers=${workers}`)
    .set(auditor.headers)
    .buffer(true)
    .parse((stream, done) => {
      buffer(stream as unknown as Readable).then(
        (bytes) => done(null, bytes),
        (error) => done(error, null),
      );
    });
  expect(answer.status).toBe(200);
  expect(answer.headers["content-type"]).toBe("application/zip");
  return answer.body as Buffer;
}

const blobOf = (bytes: Buffer) => new Blob([new Uint8Array(bytes)]);

async function textsOf(bytes: Buffer): Promise<Map<string, string>> {
  const texts = new Map<string, string>();
  for (const entry of await readZip(blobOf(bytes)))
    texts.set(entry.path, await new Response(entry.stream()).text());
  return texts;
}

/** The file as somebody would make it anew who also mends its manifest. */
async function rewrite(bytes: Buffer, change: (path: string, text: string) => string) {
  const texts = await textsOf(bytes);
  const manifest = JSON.parse(texts.get("manifest.json") ?? "") as YearManifest;
  const out = new PassThrough();
  const whole = buffer(out);
  const zip = new ZipStream(out, new Date());
  for (const file of manifest.files) {
    const content = Buffer.from(change(file.path, texts.get(file.path) ?? ""));
    await zip.add(file.path, [content]);
    file.sha256 = createHash("sha256").update(content).digest("hex");
  }
  await zip.add("manifest.json", [Buffer.from(JSON.stringify(manifest))]);
  await zip.end();
  out.end();
  return blobOf(await whole);
}

describe("the year's ZIP", () => {
  test("checks and derives itself again: nothing but the file is needed", async () => {
    const { site } = await layOutYear();
    const bytes = await takeZip(site);
    const report = await checkYearFile(blobOf(bytes));
    expect(report).toMatchObject({
      broken: null,
      // Three days, of one of which an earlier result is kept; and one imported.
      rederived: 4,
      imported: 1,
      differing: [],
      differingCount: 0,
    });
    expect(report.files.filter(({ state }) => state !== "as-stated")).toEqual([]);
    expect(isSound(report)).toBe(true);
    const rowsOf = Object.fromEntries(report.files.map(({ path, rows }) => [path, rows]));
    expect(rowsOf).toMatchObject({
      "check.html": null,
      "workers.csv": 2,
      "shifts.csv": 3,
      "shift-tasks.csv": 6,
      "results.csv": 4,
      "results/2026-03.jsonl": 2,
      "results/2026-04.jsonl": 2,
      "results/2026-05.jsonl": 1,
    });
    const [head] = await select<{ number: number; hash: string }>(
      "SELECT number::int AS number, encode(hash, 'hex') AS hash FROM audit_seals WHERE organization_id = $1 ORDER BY number DESC LIMIT 1",
      [site.organizationId],
    );
    expect(report.manifest).toMatchObject({ site: site.name, year: 2026, trail: head });

    // The trail knows the file by its manifest.
    const manifest = (await textsOf(bytes)).get("manifest.json") ?? "";
    const [finished] = await select<{ sha256: string }>(
      "SELECT v.recorded->>'manifestSha256' AS sha256 FROM audit_events e JOIN audit_values v ON v.event_id = e.id WHERE e.organization_id = $1 AND e.action = 'finish-year-records'",
      [site.organizationId],
    );
    expect(finished?.sha256).toBe(createHash("sha256").update(manifest).digest("hex"));
  });

  test("its tables have the columns that its metadata name, and its key is one", async () => {
    const { site } = await layOutYear();
    const texts = await textsOf(await takeZip(site));
    const { tables } = JSON.parse(texts.get("csv-metadata.json") ?? "") as {
      tables: {
        url: string;
        tableSchema: { columns: { name: string }[]; primaryKey?: string[] };
      }[];
    };
    expect(tables.map(({ url }) => url).sort()).toEqual(
      [...texts.keys()].filter((path) => path.endsWith(".csv")).sort(),
    );
    for (const { url, tableSchema } of tables) {
      const [head, ...records]: string[][] = parse(texts.get(url) ?? "");
      expect(head, url).toEqual(tableSchema.columns.map(({ name }) => name));
      const keys = records.map((record) =>
        (tableSchema.primaryKey ?? []).map((name) => record[head!.indexOf(name)]).join(" "),
      );
      expect(new Set(keys).size, url).toBe(records.length);
    }
  });

  test("under made-up names nobody's name and number are in it, and the same person is one throughout", async () => {
    const { site, worker } = await layOutYear();
    const texts = await textsOf(await takeZip(site, "pseudonym"));
    const all = [...texts]
      .filter(([path]) => path !== "check.html")
      .map(([, text]) => text)
      .join("\n");
    for (const secret of [worker.name, "ZX-4711", worker.id]) expect(all).not.toContain(secret);
    const workers = (
      parse(texts.get("workers.csv") ?? "", { columns: true }) as { worker: string }[]
    ).map((one) => one.worker);
    expect(new Set(workers).size).toBe(2);
    const shifts: { worker: string }[] = parse(texts.get("shifts.csv") ?? "", { columns: true });
    for (const shift of shifts) expect(workers).toContain(shift.worker);
    expect(isSound(await checkYearFile(blobOf(await takeZip(site, "pseudonym"))))).toBe(true);
  });

  test("letters of results stand in it with how they went, and who acknowledged them", async () => {
    const { site, worker } = await layOutYear();
    const { organizationId } = site;
    const recorder = await buildUser({ organizationId, roles: ["officer"], name: "Ada Lund" });
    const [found] = await select<{ id: string }>(
      "SELECT current_result_id AS id FROM days WHERE worker_id = $1 AND date = '2026-03-02'",
      [worker.id],
    );
    const letter = async (date: string, resultId: string | undefined, more: object = {}) => {
      const id = await insert("result_letters", {
        organizationId,
        siteId: site.id,
        workerId: worker.id,
        ruleSet: "eu-2003-10-ec",
        ruleSetVersion: 1,
        dueOn: "2026-03-17",
        language: "es",
        subject: "Results",
        bodyText: `${worker.name}, 91.3 dB`,
        ...more,
      });
      await insert("result_letter_days", {
        organizationId,
        letterId: id,
        workerId: worker.id,
        date,
        resultId,
        criterion: "upper-action",
        isOver: true,
      });
      return id;
    };
    const first = await letter("2026-03-02", found?.id);
    const correction = await letter("2026-03-02", found?.id, { replacesId: first });
    await letter("2025-03-02", await buildDay(worker, "2025-03-02"));
    await insert("notice_acknowledgements", {
      organizationId,
      letterId: correction,
      way: "paper",
      signedOn: "2026-03-10",
      recordedBy: recorder.id,
    });
    const bytes = await takeZip(site, "name");
    const report = await checkYearFile(blobOf(bytes));
    expect(isSound(report)).toBe(true);
    expect(report.files).toContainEqual({ path: "letters.csv", rows: 2, state: "as-stated" });
    const named: Record<string, string>[] = parse((await textsOf(bytes)).get("letters.csv") ?? "", {
      columns: true,
    });
    const common = { language: "es", due_on: "2026-03-17", result_ids: found?.id };
    expect(named).toMatchObject([
      { ...common, letter_id: first, worker: worker.name, kind: "results", state: "replaced" },
      {
        ...common,
        letter_id: correction,
        kind: "correction",
        correction_of: first,
        state: "acknowledged",
        delivery: "paper",
        acknowledged_by: "paper",
        signed_on: "2026-03-10",
        recorded_by: "Ada Lund",
      },
    ]);
    const madeUp = (await textsOf(await takeZip(site, "pseudonym"))).get("letters.csv") ?? "";
    for (const secret of [worker.name, "ZX-4711", worker.id, "Ada Lund"])
      expect(madeUp).not.toContain(secret);
    expect(madeUp).toContain("W-");
  });

  test("a file that breaks off is none", async () => {
    const { site } = await layOutYear();
    const bytes = await takeZip(site);
    for (const share of [0.3, 0.9, 0.999]) {
      const cut = bytes.subarray(0, Math.floor(share * bytes.length));
      expect((await checkYearFile(blobOf(cut))).broken).toBe("it has no end");
    }
    expect((await checkYearFile(new Blob(["no file"]))).broken).not.toBeNull();
  });

  test("a changed record is named by the hash, and an invented result by its inputs, though the hashes were mended", async () => {
    const { site } = await layOutYear();
    const bytes = await takeZip(site);
    const changeLine = (text: string, change: (line: ResultLine) => void) =>
      text
        .split("\n")
        .map((line, place) => {
          if (place > 0 || line === "") return line;
          const result = JSON.parse(line) as ResultLine;
          change(result);
          return JSON.stringify(result);
        })
        .join("\n");

    const outcome = await checkYearFile(
      await rewrite(bytes, (path, text) =>
        path === "results/2026-03.jsonl"
          ? changeLine(text, (line) => {
              line.outcome.outsideDb = 70;
            })
          : text,
      ),
    );
    expect(outcome.files.every(({ state }) => state === "as-stated")).toBe(true);
    expect(outcome).toMatchObject({ rederived: 3, differingCount: 1 });
    expect(outcome.differing[0]).toMatchObject({ date: "2026-03-02", problem: null });
    expect(outcome.differing[0]?.fields).toEqual([
      { name: "outsideDb", stated: "70", derived: expect.stringMatching(/^\d/) },
    ]);

    // An input that was changed comes out otherwise, and the table of results says what it always did.
    const input = await checkYearFile(
      await rewrite(bytes, (path, text) =>
        path === "results/2026-03.jsonl"
          ? changeLine(text, (line) => {
              (line.input as { shifts: { tasks: { durationMin: number }[] }[] }).shifts[0]!
                .tasks[0]!.durationMin = 20;
            })
          : text,
      ),
    );
    expect(input.differing.map(({ file }) => file)).toEqual([
      "results/2026-03.jsonl",
      "results.csv",
    ]);

    const table = await checkYearFile(
      await rewrite(bytes, (path, text) =>
        path === "results.csv" ? text.replaceAll(",over,", ",under,") : text,
      ),
    );
    expect(table.differingCount).toBeGreaterThan(0);
    expect(table.differing[0]).toMatchObject({ file: "results.csv" });

    const hash = await checkYearFile(
      blobOf(
        await (async () => {
          const texts = await textsOf(bytes);
          const out = new PassThrough();
          const whole = buffer(out);
          const zip = new ZipStream(out, new Date());
          for (const [path, text] of texts)
            await zip.add(path, [
              Buffer.from(path === "shifts.csv" ? text.replace("480", "481") : text),
            ]);
          await zip.add("more.csv", [Buffer.from("a\r\n")]);
          await zip.end();
          out.end();
          return whole;
        })(),
      ),
    );
    expect(hash.files.filter(({ state }) => state !== "as-stated")).toEqual([
      { path: "more.csv", rows: null, state: "not-listed" },
      { path: "shifts.csv", rows: 3, state: "changed" },
    ]);
  });
});

describeEndpoint({
  route: "GET /exports/year.xlsx",
  as: "auditor",
  not: "worker",
  event: "export-year-workbook",
  bad: { path: "&workers=nobody" },
  badField: "workers",
  call: async (site) => ({ method: "get", path: `/exports/year.xlsx?siteId=${site.id}&year=2026` }),
});

/** Reads a workbook with nothing but a ZIP and an XML reader, and prints its sheets: each cell with the kind it is of. */
const READ_WORKBOOK = `
import json, re, sys, zipfile
import xml.etree.ElementTree as tree
S = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"
R = "{http://schemas.openxmlformats.org/officeDocument/2006/relationships}id"
book = zipfile.ZipFile(sys.argv[1])
targets = {r.get("Id"): r.get("Target") for r in tree.fromstring(book.read("xl/_rels/workbook.xml.rels"))}
def place(reference):
    at = 0
    for letter in re.match("[A-Z]+", reference).group(): at = at * 26 + ord(letter) - 64
    return at - 1
def cells(row):
    out = []
    for c in row.iter(S + "c"):
        assert c.find(S + "f") is None
        while len(out) < place(c.get("r")): out.append(["", ""])
        kind = c.get("t") or "n"
        value = c.find(S + "v")
        text = value.text if value is not None else "".join(t.text or "" for t in c.iter(S + "t"))
        out.append([kind, text or ""])
    return out
print(json.dumps({s.get("name"): [cells(r) for r in tree.fromstring(book.read("xl/" + targets[s.get(R)])).iter(S + "row")]
    for s in tree.fromstring(book.read("xl/workbook.xml")).iter(S + "sheet")}))
`;
type Sheets = Record<string, [kind: string, text: string][][]>;

function readWorkbook(bytes: Buffer): Sheets {
  const folder = mkdtempSync(join(tmpdir(), "dinward-xlsx-"));
  try {
    const file = join(folder, "year.xlsx");
    writeFileSync(file, bytes);
    const printed = execFileSync("python3", ["-c", READ_WORKBOOK, file], {
      encoding: "utf8",
      maxBuffer: 1e8,
    });
    return JSON.parse(printed) as Sheets;
  } finally {
    rmSync(folder, { recursive: true });
  }
}

describe("the year's workbook", () => {
  beforeAll(() => ensureProgram("python3", "python3"), 120_000);

  /** The workbook and the ZIP's tables of one state of the same year. */
  async function both(rowsPerSheet?: number) {
    const { site } = await layOutYear();
    await select("UPDATE workers SET name = $2 WHERE site_id = $1", [
      site.id,
      '=HYPERLINK("x")\n"Δ & <b> 🔧',
    ]);
    const { id: userId } = await buildUser({
      organizationId: site.organizationId,
      roles: ["auditor"],
    });
    const actor = new Actor(userId, site.organizationId, "", null, "en", null, [
      { role: "auditor", siteId: null },
    ]);
    const out = new PassThrough();
    const whole = buffer(out);
    const asked = { siteId: site.id, year: 2026, workers: "name", salt: "0".repeat(32) } as const;
    await streamYearWorkbook(actor, asked, new Date(), out, rowsPerSheet);
    const sheets = readWorkbook(await whole);
    const texts = await textsOf(await takeZip(site, "name"));
    return { sheets, texts };
  }

  test("read by another program it has the ZIP's tables cell by cell, numbers as numbers and text as text", async () => {
    const { sheets, texts } = await both();
    const { tables } = JSON.parse(texts.get("csv-metadata.json") ?? "") as {
      tables: { url: string; tableSchema: { columns: { name: string; datatype: unknown }[] } }[];
    };
    expect(Object.keys(sheets)).toEqual([
      "about",
      "columns",
      ...tables.map(({ url }) => url.replace(".csv", "")),
    ]);
    let compared = 0;
    for (const { url, tableSchema } of tables) {
      const name = url.replace(".csv", "");
      // The two exports and what asked for them are events of their own.
      if (name === "trail") continue;
      const records: string[][] = parse(texts.get(url) ?? "");
      const sheet = sheets[name]!;
      expect(sheet.length, name).toBe(records.length);
      for (const [at, record] of records.entries())
        for (const [place, field] of record.entries()) {
          const { datatype } = tableSchema.columns[place]!;
          const [kind = "", text = ""] = sheet[at]![place] ?? [];
          compared += 1;
          if (at === 0 || field === "") expect(text).toBe(field);
          else if (datatype === "double" || datatype === "integer") {
            expect(kind).toBe("n");
            expect(Number(text)).toBe(Number(field));
          } else if (datatype === "boolean")
            expect([kind, text]).toEqual(["b", field === "true" ? "1" : "0"]);
          else expect([kind, text]).toEqual(["str", field]);
        }
    }
    expect(compared).toBeGreaterThan(400);
    // A name that a spreadsheet would run is text, and disarmed.
    expect(sheets.workers?.[1]?.[0]).toEqual(["str", `'=HYPERLINK("x")\n"Δ & <b> 🔧`]);
  });

  test("a table that is longer than a sheet goes on on the next, under the same head", async () => {
    const { sheets, texts } = await both(4);
    const records: string[][] = parse(texts.get("shift-tasks.csv") ?? "");
    expect(records).toHaveLength(7);
    const [first, second] = [sheets["shift-tasks"]!, sheets["shift-tasks 2"]!];
    expect([first.length, second.length]).toEqual([4, 4]);
    expect(second[0]).toEqual(first[0]);
    expect([...first.slice(1), ...second.slice(1)].map((row) => row[0]?.[1])).toEqual(
      records.slice(1).map(([id]) => id),
    );
  });
});
