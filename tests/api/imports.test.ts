import { randomUUID } from "node:crypto";
import { parse } from "csv-parse/sync";
import request from "supertest";
import { describe, expect, test } from "vitest";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import { localDate, localTime } from "../../shared/time/zone";
import {
  buildCrew,
  buildInstrument,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";

interface Sent {
  kind?: "shifts" | "readings" | "past-results";
  siteId: string;
  content: string | Buffer;
  isDryRun?: boolean;
  reason?: string;
  key?: string;
}

async function send(
  { headers }: Pick<Client, "headers">,
  { kind = "shifts", siteId, content, isDryRun = false, reason, key = randomUUID() }: Sent,
) {
  const sent = request(testApp())
    .post(`/api/imports/${kind}?siteId=${siteId}&dryRun=${isDryRun}`)
    .set(headers)
    .set("Idempotency-Key", key);
  if (reason) sent.field("reason", reason);
  return sent.attach("file", Buffer.from(content), "schichten.csv");
}

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));
const day = daysFromToday(-3);
const HEADER = "employee_number,date,start,length_min,task,minutes,worn_pct";

async function buildShop() {
  const site = await buildSite();
  const grinding = await buildTask({
    site,
    name: "Schleifen, grob",
    levelDb: 94,
    metric: { kind: "steady" },
  });
  const stores = await buildTask({ site, name: "Склад", levelDb: 70, metric: { kind: "steady" } });
  const worker = await buildWorker({ site, name: "Łukasz 张", employeeNumber: "1041" });
  const crew = await buildCrew({ site, members: [worker] });
  const lines = [
    `1041,${day},06:00,480,"Schleifen, grob",240,90`,
    `1041,${day},06:00,480,Склад,240,`,
  ];
  return {
    site,
    grinding,
    stores,
    worker,
    crew,
    client: await officerAt(site),
    content: [HEADER, ...lines].join("\r\n"),
  };
}

const shiftsOf = (site: Site) =>
  select<{
    date: string;
    minutes: number[];
    worn: (number | null)[];
    crew_id: string | null;
    revision: number;
    reason: string | null;
  }>(
    `SELECT s.date::text AS date, s.crew_id, s.revision, v.reason, array_agg(t.duration_min ORDER BY t.position) AS minutes, array_agg(t.worn_pct ORDER BY t.position) AS worn
     FROM shifts s JOIN shift_revisions v ON v.id = s.current_revision_id LEFT JOIN shift_tasks t ON t.shift_revision_id = v.id
     WHERE s.site_id = $1 GROUP BY s.id, v.id ORDER BY s.date, s.starts_at`,
    [site.id],
  );

describe("who may import", () => {
  test.each(["shifts", "readings", "past-results"] as const)(
    "%s: an officer of the site, and nobody else",
    async (kind) => {
      const { site } = await buildShop();
      const { organizationId } = site;
      const sent = { kind, siteId: site.id, content: "x" };
      expect((await send(nobody, sent)).status).toBe(401);
      expect(
        (await send(await signInAs(await buildUser({ organizationId, roles: ["auditor"] })), sent))
          .status,
      ).toBe(403);
      expect((await send(await officerAt(await buildSite()), sent)).status).toBe(404);
      const elsewhere = await buildSite({ organizationId });
      const limited = await signInAs(
        await buildUser({ organizationId, roles: ["officer"], siteId: elsewhere.id }),
      );
      expect((await send(limited, sent)).status).toBe(404);
      expect(
        await select("SELECT 1 FROM audit_events WHERE organization_id = $1", [organizationId]),
      ).toHaveLength(0);
    },
  );

  test.each(["shifts", "readings", "past-results"] as const)(
    "%s: the template is a file that its own columns read",
    async (kind) => {
      const { client, site } = await buildShop();
      const answer = await client.get(`/imports/${kind}/template.csv`);
      expect(answer.status).toBe(200);
      const report = await send(client, {
        kind,
        siteId: site.id,
        content: answer.text,
        isDryRun: true,
      });
      expect(
        report.body.issues.filter(({ code }: { code: string }) => code.startsWith("column")),
      ).toEqual([]);
    },
  );
});

describe("shifts from a file", () => {
  test("a dry run says what would come of it and stores nothing", async () => {
    const { client, site, content } = await buildShop();
    const answer = await send(client, { siteId: site.id, content, isDryRun: true });
    expect(answer.body).toMatchObject({
      isDryRun: true,
      lines: 2,
      fresh: 1,
      changed: 0,
      unchanged: 0,
      workers: 1,
      firstDate: day,
      lastDate: day,
      issues: [],
      issuesCount: 0,
      entryId: null,
    });
    expect(await shiftsOf(site)).toEqual([]);
  });

  test("are stored with their tasks, computed at once, and left in the trail", async () => {
    const { client, site, crew, content } = await buildShop();
    const answer = await send(client, { siteId: site.id, content });
    expect(answer.status).toBe(201);
    expect(answer.body).toMatchObject({ fresh: 1, computedDays: 1, queuedDays: 0 });
    expect(await shiftsOf(site)).toEqual([
      {
        date: day,
        crew_id: crew.id,
        revision: 1,
        reason: null,
        minutes: [240, 240],
        worn: [90, null],
      },
    ]);
    // 94 dB for four of eight hours is LEX,8h 91.0: ten times the logarithm of a half below 94.
    const [result] = await select<{ outside_db: number }>(
      "SELECT r.outside_db FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.site_id = $1",
      [site.id],
    );
    expect(result?.outside_db).toBeCloseTo(94 + 10 * Math.log10(0.5 + 0.5 * 10 ** -2.4), 9);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1 ORDER BY id",
      [site.organizationId],
    );
    expect(events.map(({ action }) => action)).toEqual(
      expect.arrayContaining(["import-shifts", "record-shift"]),
    );
  });

  test("the same file again is refused as nothing new; the same key gets the first answer", async () => {
    const { client, site, content } = await buildShop();
    const key = randomUUID();
    const first = await send(client, { siteId: site.id, content, key });
    expect((await send(client, { siteId: site.id, content, key })).body).toEqual(first.body);
    const again = await send(client, { siteId: site.id, content });
    expect([again.status, again.body.code]).toEqual([409, "nothing-to-do"]);
    const other = await send(client, {
      siteId: site.id,
      content: content.replace(",90", ",80"),
      key,
    });
    expect([other.status, other.body.code]).toEqual([422, "key-reused"]);
    expect(await shiftsOf(site)).toHaveLength(1);
  });

  test("a changed shift needs a reason and becomes the next revision", async () => {
    const { client, site, content } = await buildShop();
    await send(client, { siteId: site.id, content });
    const changed = content.replace("240,90", "200,90");
    const refused = await send(client, { siteId: site.id, content: changed });
    expect(refused.body).toMatchObject({
      code: "import-refused",
      report: { changed: 1, issues: [{ line: 2, code: "reason-missing" }] },
    });
    const answer = await send(client, {
      siteId: site.id,
      content: changed,
      reason: "the clock of the shop was wrong",
    });
    expect(answer.body).toMatchObject({ changed: 1, fresh: 0 });
    expect(await shiftsOf(site)).toMatchObject([
      { revision: 2, reason: "the clock of the shop was wrong", minutes: [200, 240] },
    ]);
  });

  test("one bad line holds back all, and each is named by line and column", async () => {
    const { client, site } = await buildShop();
    const bad = [
      `1041,${day},06:00,480,"Schleifen, grob",240,90`,
      `9999,${day},06:00,480,Склад,240,`,
      `1041,2026-02-30,06:00,480,Склад,240,`,
      `1041,${daysFromToday(-4)},06:00,480,No such task,240,`,
      `1041,${daysFromToday(-5)},06:00,480,Склад,500,`,
      `1041,${daysFromToday(-6)},06:00,480,Склад,=1+1,`,
      `1041,${daysFromToday(-7)},06:00,480,Склад,-5,`,
      `1041,${daysFromToday(-8)},06:00,480,Склад,240,101`,
      `1041,2019-12-31,06:00,480,Склад,240,`,
      `1041,${daysFromToday(2)},06:00,480,Склад,240,`,
      `1041,${daysFromToday(-9)},06:00,1440,Склад,240,`,
      `1041,${daysFromToday(-10)},25:00,480,Склад,240,`,
      `1041,${daysFromToday(-11)},06:00,480,Склад,1e400,`,
      `1041,${day},13:00,480,Склад,240,`,
      `1041,${daysFromToday(-12)},06:00,480`,
    ];
    const answer = await send(client, { siteId: site.id, content: [HEADER, ...bad].join("\n") });
    expect([answer.status, answer.body.code]).toEqual([422, "import-refused"]);
    const found = answer.body.report.issues.map(
      ({ line, field, code }: { line: number; field: string; code: string }) => [line, field, code],
    );
    expect(found).toEqual([
      [3, "employee_number", "worker-unknown"],
      [4, "date", "not-a-date"],
      [5, "task", "task-unknown"],
      [6, "minutes", "tasks-longer-than-shift"],
      [7, "minutes", "formula-in-number"],
      [8, "minutes", "too_small"],
      [9, "worn_pct", "too_big"],
      [10, "date", "before-hire"],
      [11, "date", "in-the-future"],
      [12, "length_min", "whole-day-unconfirmed"],
      [13, "start", "not-a-time"],
      [14, "minutes", "not-a-number"],
      [15, "start", "shifts-overlap"],
      [16, "", "field-count"],
    ]);
    expect(await shiftsOf(site)).toEqual([]);
    expect(
      await select("SELECT 1 FROM audit_events WHERE organization_id = $1", [site.organizationId]),
    ).toHaveLength(0);
  });

  test("what is wrong with a line is said whatever else is wrong with its shift", async () => {
    const { client, site } = await buildShop();
    const answer = await send(client, {
      siteId: site.id,
      content: [
        HEADER,
        `9999,${day},06:00,480,Склад,900,`,
        `1041,2026-02-30,06:00,1440,No such task,240,101`,
        `1041,2019-12-31,25:00,480,Склад,240,`,
        `1041,2019-12-31,25:00,480,Склад,300,`,
        `1041,${daysFromToday(2)},06:00,,Склад,-5,`,
      ].join("\n"),
      isDryRun: true,
    });
    const found = answer.body.issues.map(
      ({ line, field, code }: { line: number; field: string; code: string }) => [line, field, code],
    );
    expect(found).toHaveLength(new Set(found.map(String)).size);
    expect(found.map(String).toSorted()).toEqual(
      [
        [2, "employee_number", "worker-unknown"],
        [2, "minutes", "tasks-longer-than-shift"],
        [3, "date", "not-a-date"],
        [3, "task", "task-unknown"],
        [3, "worn_pct", "too_big"],
        [3, "length_min", "whole-day-unconfirmed"],
        [4, "date", "before-hire"],
        [4, "start", "not-a-time"],
        [4, "minutes", "tasks-longer-than-shift"],
        [5, "task", "task-twice"],
        [6, "date", "in-the-future"],
        [6, "length_min", "empty"],
        [6, "minutes", "too_small"],
      ]
        .map(String)
        .toSorted(),
    );
  });

  test("a shift that has not ended needs its confirmation", async () => {
    const { client, site } = await buildShop();
    const startedAt = new Date(Date.now() - 60_000);
    const at = `${localDate(startedAt, "Europe/Berlin")},${localTime(startedAt, "Europe/Berlin")}`;
    const header = "employee_number,date,start,length_min,task,minutes,which_hour,open_end";
    const content = (openEnd: string) => `${header}\n1041,${at},480,Склад,480,first,${openEnd}`;
    const asked = await send(client, { siteId: site.id, content: content("") });
    expect(asked.body.report.issues).toMatchObject([
      { line: 2, field: "length_min", code: "open-end-unconfirmed" },
    ]);
    expect((await send(client, { siteId: site.id, content: content("yes") })).status).toBe(201);
  });

  test("a shift that meets one already stored is refused", async () => {
    const { client, site, content } = await buildShop();
    await send(client, { siteId: site.id, content });
    const later = await send(client, {
      siteId: site.id,
      content: `${HEADER}\n1041,${day},13:59,60,Склад,60,`,
    });
    expect(later.body.report.issues).toMatchObject([
      { line: 2, field: "start", code: "shifts-overlap", params: { localStart: "06:00" } },
    ]);
    const earlier = await send(client, {
      siteId: site.id,
      content: `${HEADER}\n1041,${day},05:00,61,Склад,60,`,
    });
    expect(earlier.body.report.issues).toMatchObject([{ line: 2, code: "shifts-overlap" }]);
    expect(
      (
        await send(client, {
          siteId: site.id,
          content: `${HEADER}\n1041,${day},14:00,60,Склад,60,`,
        })
      ).status,
    ).toBe(201);
  });

  test("of more than 500 days the rest is computed by a job, with the same result", async () => {
    const { client, site } = await buildShop();
    const lines = Array.from(
      { length: 501 },
      (_, index) => `1041,${daysFromToday(-2 - index)},06:00,480,Склад,480,`,
    );
    const answer = await send(client, { siteId: site.id, content: [HEADER, ...lines].join("\n") });
    expect(answer.body).toMatchObject({ fresh: 501, computedDays: 0, queuedDays: 501 });
    expect(
      await select("SELECT 1 FROM graphile_worker.jobs WHERE key = $1", [
        `recompute:${site.organizationId}`,
      ]),
    ).toHaveLength(1);
    await recomputeStaleDays(site.organizationId);
    const [left] = await select(
      "SELECT count(*) FILTER (WHERE is_stale)::int AS stale, count(current_result_id)::int AS computed FROM days WHERE site_id = $1",
      [site.id],
    );
    expect(left).toEqual({ stale: 0, computed: 501 });
  });
});

describe("how a file may be written", () => {
  const withComma = (decimal: string) =>
    `employee_number;date;start;length_min;task;minutes;worn_pct\n1041;${day};06:00;480;Склад;${decimal};`;
  const bytes = (text: string, encoding: "utf16le" | "utf-8") => Buffer.from(text, encoding);

  test.each([
    ["UTF-8 with a mark", (text: string) => bytes(`\uFEFF${text}`, "utf-8")],
    ["UTF-16LE with a mark", (text: string) => bytes(`\uFEFF${text}`, "utf16le")],
    ["UTF-16LE without", (text: string) => bytes(text.replaceAll("Склад", "Schleifen"), "utf16le")],
    ["UTF-16BE with a mark", (text: string) => bytes(`\uFEFF${text}`, "utf16le").swap16()],
    ["tabs", (text: string) => bytes(text.replaceAll(";", "\t"), "utf-8")],
    [
      "another order and case of columns",
      (text: string) => bytes(text.replace("employee_number", "Employee Number"), "utf-8"),
    ],
  ])("%s", async (_name, encode) => {
    const { client, site } = await buildShop();
    await buildTask({ site, name: "Schleifen" });
    const answer = await send(client, {
      siteId: site.id,
      content: encode(withComma("240,5")),
      isDryRun: true,
    });
    expect(answer.body).toMatchObject({ fresh: 1, issues: [] });
  });

  test.each([
    ["1,234", "number-ambiguous"],
    ["1.234,5", "not-a-number"],
    ["'240", "formula-in-number"],
    ["=240", "formula-in-number"],
  ])("minutes of %s are refused as %s", async (minutes, code) => {
    const { client, site } = await buildShop();
    const answer = await send(client, {
      siteId: site.id,
      content: withComma(minutes),
      isDryRun: true,
    });
    expect(answer.body.issues).toMatchObject([{ line: 2, field: "minutes", code }]);
  });

  test("a decimal comma in a file that parts its columns by commas is refused", async () => {
    const { client, site } = await buildShop();
    const answer = await send(client, {
      siteId: site.id,
      content: `${HEADER}\n1041,${day},06:00,480,Склад,"240,5",`,
      isDryRun: true,
    });
    expect(answer.body.issues).toMatchObject([{ field: "minutes", code: "number-ambiguous" }]);
  });

  test("the apostrophe that the export puts before a formula comes off again", async () => {
    const { client, site } = await buildShop();
    await buildWorker({ site, employeeNumber: "=7" });
    await buildTask({ site, name: "+Räumen" });
    const answer = await send(client, {
      siteId: site.id,
      content: `${HEADER}\n'=7,${day},06:00,480,'+Räumen,60,`,
      isDryRun: true,
    });
    expect(answer.body).toMatchObject({ fresh: 1, issues: [] });
  });

  test("columns that are missing, unknown or named twice are refused before any line is read", async () => {
    const { client, site } = await buildShop();
    const answer = await send(client, {
      siteId: site.id,
      content: "employee_number,date,start,task,minutes,minutes,wage\n1,2,3,4,5,6,7",
      isDryRun: true,
    });
    const found = answer.body.issues.map(
      ({ field, code }: { field: string; code: string }) => `${field} ${code}`,
    );
    expect(found.sort()).toEqual([
      "length_min column-missing",
      "minutes column-twice",
      "wage column-unknown",
    ]);
  });

  test.each([
    [
      "a picture",
      "picture",
      Buffer.from([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a, 0, 0, 0, 13]),
    ],
    ["a workbook", "spreadsheet", Buffer.from("PK\u0003\u0004\u0014\u0000\u0006\u0000")],
    ["an older code page", "other-encoding", Buffer.from(`${HEADER}\n1041,x,R\xe4umen`, "latin1")],
    ["nothing", "empty", Buffer.from(" \n")],
  ])("%s is no CSV, and is named", async (_name, found, content) => {
    const { client, site } = await buildShop();
    const answer = await send(client, { siteId: site.id, content });
    expect([answer.status, answer.body.code, answer.body.params]).toEqual([
      415,
      "not-csv",
      { found },
    ]);
  });

  test("a broken quote is named by its line", async () => {
    const { client, site } = await buildShop();
    const answer = await send(client, {
      siteId: site.id,
      content: `${HEADER}\n1041,${day},06:00,480,"Скл"ад,240,`,
      isDryRun: true,
    });
    expect(answer.body.issues).toMatchObject([{ line: 2, code: "quote-broken" }]);
  });

  test("a broken quote holds back its own line only, and a mark in plain text or a formula breaks nothing", async () => {
    const { client, site } = await buildShop();
    const answer = await send(client, {
      siteId: site.id,
      content: [
        HEADER,
        `1041,${day},06:00,480,3" pipe,240,`,
        `1041,${daysFromToday(-4)},06:00,480,=HYPERLINK("x"),240,`,
        `1041,${daysFromToday(-5)},06:00,480,"Скл"ад,240,`,
        `1041,${daysFromToday(-6)},06:00,480,Склад,=HYPERLINK("x"),`,
        `1041,${daysFromToday(-7)},06:00,480,"Склад,240,`,
        `1041,${daysFromToday(-8)},06:00,480,Склад,240,`,
      ].join("\n"),
      isDryRun: true,
    });
    expect(answer.status).toBe(201);
    const found = answer.body.issues.map(
      ({ line, field, code }: { line: number; field: string; code: string }) => [line, field, code],
    );
    expect(found).toEqual([
      [2, "task", "task-unknown"],
      [3, "task", "task-unknown"],
      [4, "", "quote-broken"],
      [5, "minutes", "formula-in-number"],
      [6, "", "quote-broken"],
    ]);
  });

  test("more than 20 MB is too large, and a form without a file is no import", async () => {
    const { client, site } = await buildShop();
    const large = await send(client, {
      siteId: site.id,
      content: Buffer.alloc(20 * 1024 * 1024 + 1, "a"),
    });
    expect([large.status, large.body.code]).toEqual([413, "too-large"]);
    const empty = await client.post(`/imports/shifts?siteId=${site.id}`, {});
    expect([empty.status, empty.body.issues[0].code]).toEqual([422, "file-missing"]);
  });
});

describe("readings from a file", () => {
  const header =
    "employee_number,date,instrument_serial,duration_min,covers,check_before_db,check_after_db,criterion_level_db,exchange_rate_db,threshold_db,weighting,response,dose_pct,average_db,peak_db,peak_weighting";
  const run = (checkAfter = "114.2", dose = "112") =>
    [
      header,
      `1041,${day},77-1,480,shift,114.0,${checkAfter},90,5,80,A,slow,${dose},,,`,
      `1041,${day},77-1,480,shift,114.0,${checkAfter},85,3,,A,slow,,91.4,138.2,C`,
    ].join("\n");

  test("lines of one instrument and day are one run with several settings", async () => {
    const { client, site } = await buildShop();
    await buildInstrument({ site, serialNumber: "77-1" });
    const answer = await send(client, { kind: "readings", siteId: site.id, content: run() });
    expect(answer.body).toMatchObject({ fresh: 1, lines: 2 });
    const stored = await select(
      "SELECT g.exchange_rate_db, g.threshold_db, g.dose_pct, g.average_db, g.peak_db, g.peak_weighting FROM readings g JOIN runs r ON r.current_revision_id = g.run_revision_id WHERE r.site_id = $1 ORDER BY position",
      [site.id],
    );
    expect(stored).toEqual([
      {
        exchange_rate_db: 5,
        threshold_db: 80,
        dose_pct: 112,
        average_db: null,
        peak_db: null,
        peak_weighting: null,
      },
      {
        exchange_rate_db: 3,
        threshold_db: null,
        dose_pct: null,
        average_db: 91.4,
        peak_db: 138.2,
        peak_weighting: "C",
      },
    ]);
    expect(
      (await send(client, { kind: "readings", siteId: site.id, content: run() })).body.code,
    ).toBe("nothing-to-do");
    const other = await send(client, {
      kind: "readings",
      siteId: site.id,
      content: run("114.2", "99"),
    });
    expect(other.body.report.issues).toMatchObject([{ code: "reading-recorded-already" }]);
  });

  test("field checks that drifted need the reason why the run is kept, and settings have to be possible", async () => {
    const { client, site } = await buildShop();
    await buildInstrument({ site, serialNumber: "77-1" });
    const drifted = await send(client, {
      kind: "readings",
      siteId: site.id,
      content: run("114.8"),
      isDryRun: true,
    });
    expect(drifted.body.issues).toMatchObject([
      { line: 2, field: "kept_reason", code: "field-check-drift" },
    ]);
    const impossible = await send(client, {
      kind: "readings",
      siteId: site.id,
      content: run().replace(",5,80,", ",6,80,"),
      isDryRun: true,
    });
    expect(impossible.body.issues).toMatchObject([{ line: 2, field: "exchange_rate_db" }]);
  });
});

test("a run's readings are looked at though its instrument or its worker is unknown", async () => {
  const { client, site } = await buildShop();
  await buildInstrument({ site, serialNumber: "77-1" });
  const header =
    "employee_number,date,instrument_serial,duration_min,covers,check_before_db,check_after_db,criterion_level_db,exchange_rate_db,threshold_db,weighting,response,dose_pct,average_db,peak_db,peak_weighting";
  const answer = await send(client, {
    kind: "readings",
    siteId: site.id,
    content: [
      header,
      `1041,${day},none,480,shift,114.0,114.8,90,5,80,A,slow,112,,,`,
      `1041,${day},none,480,shift,114.0,114.8,85,7,,A,slow,,198.1,138.2,C`,
      `9999,${day},77-1,480,part,,,90,5,80,A,slow,abc,,,`,
      `9999,${day},77-1,480,part,,,85,3,,A,slow,,,,`,
    ].join("\n"),
    isDryRun: true,
  });
  const found = answer.body.issues.map(
    ({ line, field, code }: { line: number; field: string; code: string }) =>
      [line, field, code].join(" "),
  );
  expect(found.toSorted()).toEqual([
    "2 instrument_serial instrument-unknown",
    "2 kept_reason field-check-drift",
    "3 average_db too_big",
    "3 exchange_rate_db invalid_union",
    "4 dose_pct not-a-number",
    "4 employee_number worker-unknown",
    "5 average_db reading-empty",
  ]);
});

describe("past years' levels from a file", () => {
  const header = "employee_number,date,level_db,at_ear_db,rule_set,length_min,grade";
  const past = (level = "91.4") =>
    `${header}\n1041,2021-05-04,${level},86.2,eu-2003-10-ec,480,task-level\n1041,2021-05-05,79.9,,eu-2003-10-ec,480,estimate`;
  const resultsOf = (site: Site) =>
    select(
      `SELECT d.date::text AS date, r.origin, r.outside_db, r.at_ear_db, r.verdict_outside, r.verdict_at_ear, r.reason, r.method_version FROM days d JOIN day_results r ON r.id = d.current_result_id
     WHERE d.site_id = $1 ORDER BY d.date`,
      [site.id],
    );

  test("are marked as imported, judged by the rule they name, and open no finding", async () => {
    const { client, site, worker } = await buildShop();
    const answer = await send(client, { kind: "past-results", siteId: site.id, content: past() });
    expect(answer.body).toMatchObject({ fresh: 2, computedDays: 0, queuedDays: 0 });
    // 2003/10/EC: action values 80 and 85 without protection, limit 87 at the ear.
    expect(await resultsOf(site)).toEqual([
      {
        date: "2021-05-04",
        origin: "imported",
        outside_db: 91.4,
        at_ear_db: 86.2,
        verdict_outside: "over",
        verdict_at_ear: "under",
        reason: "imported",
        method_version: 0,
      },
      {
        date: "2021-05-05",
        origin: "imported",
        outside_db: 79.9,
        at_ear_db: null,
        verdict_outside: "under",
        verdict_at_ear: "not-assessed",
        reason: "imported",
        method_version: 0,
      },
    ]);
    expect(
      await select("SELECT 1 FROM findings WHERE organization_id = $1", [site.organizationId]),
    ).toHaveLength(0);
    const view = await client.get(`/workers/${worker.id}/days/2021-05-04`);
    expect(view.body).toMatchObject({ origin: "imported", input: null, evaluation: null });
    expect(
      (await send(client, { kind: "past-results", siteId: site.id, content: past() })).body.code,
    ).toBe("nothing-to-do");
  });

  test("survive a recomputation, and never replace a day that was computed", async () => {
    const { client, site, content } = await buildShop();
    await send(client, { kind: "past-results", siteId: site.id, content: past() });
    const before = await resultsOf(site);
    await select("UPDATE days SET is_stale = TRUE WHERE site_id = $1", [site.id]);
    await recomputeStaleDays(site.organizationId);
    expect(await resultsOf(site)).toEqual(before);
    await send(client, { siteId: site.id, content });
    const answer = await send(client, {
      kind: "past-results",
      siteId: site.id,
      content: `${header}\n1041,${day},60,,eu-2003-10-ec,480,estimate`,
    });
    expect(answer.body.report.issues).toMatchObject([
      { line: 2, field: "date", code: "day-computed-already" },
    ]);
  });

  test("another level for the same day needs a reason, an unknown rule is refused", async () => {
    const { client, site } = await buildShop();
    await send(client, { kind: "past-results", siteId: site.id, content: past() });
    const changed = await send(client, {
      kind: "past-results",
      siteId: site.id,
      content: past("92"),
    });
    expect(changed.body.report.issues).toMatchObject([{ line: 2, code: "reason-missing" }]);
    expect(
      (
        await send(client, {
          kind: "past-results",
          siteId: site.id,
          content: past("92"),
          reason: "typed wrongly",
        })
      ).body,
    ).toMatchObject({ changed: 1, unchanged: 1 });
    const rule = await send(client, {
      kind: "past-results",
      siteId: site.id,
      content: past().replace("eu-2003-10-ec", "no-such"),
      isDryRun: true,
    });
    expect(rule.body.issues).toMatchObject([{ field: "rule_set", code: "rule-set-not-in-force" }]);
  });

  test("leave for the year's file with their origin", async () => {
    const { client, site } = await buildShop();
    await send(client, { kind: "past-results", siteId: site.id, content: past() });
    const answer = await client.get(`/exports/year.csv?siteId=${site.id}&year=2021`);
    const records: Record<string, string>[] = parse(answer.text, { columns: true });
    expect(records.map(({ origin, lex_8h_db }) => [origin, lex_8h_db])).toEqual([
      ["imported", "91.4"],
      ["imported", "79.9"],
      ["", ""],
    ]);
  });
});
