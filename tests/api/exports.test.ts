import { once } from "node:events";
import http from "node:http";
import type { AddressInfo } from "node:net";
import { parse } from "csv-parse/sync";
import pg from "pg";
import { afterAll, describe, expect, test, vi } from "vitest";
import { RecordEnds } from "../../server/exports/record-ends";
import { YEAR_COLUMNS } from "../../server/exports/year-columns";
import {
  buildAssignment,
  buildDay,
  buildFitTest,
  buildInstrument,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  insert,
  owner,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";

import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /exports/year.csv",
  as: "auditor",
  not: "supervisor",
  event: "export-year",
  bad: { path: "&year=x" },
  call: async (site) => ({ method: "get", path: `/exports/year.csv?siteId=${site.id}&year=2026` }),
});
describeEndpoint({
  route: "GET /exports/year-dictionary.csv",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "?language=xx" },
  badField: "language",
  namesNothing: true,
  call: async () => ({ method: "get", path: "/exports/year-dictionary.csv" }),
});
describeEndpoint({
  route: "GET /exports/gaps",
  as: "officer",
  not: "administrator",
  event: null,
  bad: { path: "&year=1" },
  badField: "year",
  call: async (site) => ({ method: "get", path: `/exports/gaps?siteId=${site.id}&year=2026` }),
});
describeEndpoint({
  route: "GET /exports/gap-names",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "&kind=none" },
  badField: "kind",
  call: async (site) => ({
    method: "get",
    path: `/exports/gap-names?siteId=${site.id}&year=2026&kind=not-assessed`,
  }),
});

const auditorAt = async (site: Site) =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: ["auditor"] }));

describe("the year's file", () => {
  test("states every number as it is stored, to the last bit", async () => {
    const site = await buildSite({ name: "Ostmere, works" });
    const levels = [91.300000000000011, 0.1 + 0.2 + 87, 79.6, 98.49447101817775];
    const workers = await Promise.all(levels.map(() => buildWorker({ site })));
    for (const [index, outsideDb] of levels.entries()) {
      await buildDay(workers[index]!, `2026-0${index + 1}-01`, {
        outsideDb,
        atEarDb: outsideDb / 1.3,
      });
    }
    await buildDay(workers[0]!, "2025-12-31");
    const client = await auditorAt(site);
    const answer = await client.get(`/exports/year.csv?siteId=${site.id}&year=2026`);
    expect(answer.status).toBe(200);
    expect(answer.headers["content-type"]).toContain("text/csv");
    expect(answer.text.split("\r\n")).toHaveLength(1 + levels.length + 1 + 1);
    expect(answer.text.replaceAll("\r\n", "")).not.toMatch(/[\r\n]/);
    const records: Record<string, string>[] = parse(answer.text, { columns: true });
    expect(Object.keys(records[0]!)).toEqual(YEAR_COLUMNS.map(({ name }) => name));
    expect(records.pop()).toMatchObject({ result_id: "rows", site: String(levels.length) });
    const stored = await select<{
      id: string;
      outside_db: number;
      at_ear_db: number;
      number: string;
    }>(
      `SELECT r.id, r.outside_db, r.at_ear_db, w.employee_number AS number FROM day_results r JOIN workers w ON w.id = r.worker_id
       WHERE r.site_id = $1 AND r.date >= '2026-01-01' ORDER BY r.date`,
      [site.id],
    );
    expect(
      records.map((record) => [
        record.result_id,
        Number(record.lex_8h_db),
        Number(record.at_ear_off_db),
        record.worker,
        record.site,
      ]),
    ).toEqual(
      stored.map(({ id, outside_db, at_ear_db, number }) => [
        id,
        outside_db,
        at_ear_db,
        number,
        "Ostmere, works",
      ]),
    );
    expect(stored.map(({ outside_db }) => outside_db)).toEqual(levels);
  });

  test("disarms a name that a spreadsheet would run, and no number below zero", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site, name: '=HYPERLINK("x")\n"Δ 🔧' });
    await buildDay(worker, "2026-05-04", { atEarDb: -3.2 });
    const client = await auditorAt(site);
    const answer = await client.get(`/exports/year.csv?siteId=${site.id}&year=2026&workers=name`);
    const [record]: Record<string, string>[] = parse(answer.text, { columns: true });
    expect(record).toMatchObject({ worker: `'=HYPERLINK("x")\n"Δ 🔧`, at_ear_off_db: "-3.2" });
  });

  test("its dictionary lists the file's columns and nothing else, in the language asked for or the reader's own", async () => {
    const { organizationId } = await buildSite();
    const client = await signInAs(
      await buildUser({ organizationId, roles: ["auditor"], language: "de" }),
    );
    const read = async (query: string) => {
      const { text } = await client.get(`/exports/year-dictionary.csv${query}`);
      return parse(text, { columns: true }) as Record<"name" | "meaning", string>[];
    };
    const [own, german, english] = [
      await read(""),
      await read("?language=de"),
      await read("?language=en"),
    ];
    expect(own).toEqual(german);
    for (const columns of [german, english])
      expect(columns.map(({ name }) => name)).toEqual(YEAR_COLUMNS.map(({ name }) => name));
    expect(english.map(({ meaning }) => meaning)).toEqual(
      YEAR_COLUMNS.map(({ meaning }) => meaning),
    );
    for (const [place, { name, meaning }] of german.entries())
      expect(meaning, name).not.toBe(english[place]?.meaning);
  });

  test("names a dose rule's level a time-weighted average, not an exposure level", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    await buildDay(worker, "2026-05-04", { outsideDb: 93.5 });
    await owner().query("ALTER TABLE day_results DISABLE TRIGGER append_only");
    await owner().query(
      "UPDATE day_results SET governing_rule_set = 'us-general-industry' WHERE site_id = $1",
      [site.id],
    );
    await owner().query("ALTER TABLE day_results ENABLE TRIGGER append_only");
    const client = await auditorAt(site);
    const answer = await client.get(`/exports/year.csv?siteId=${site.id}&year=2026`);
    const [record]: Record<string, string>[] = parse(answer.text, { columns: true });
    expect(record).toMatchObject({ lex_8h_db: "", twa_db: "93.5" });
  });

  test("an empty year is a header and a count of none", async () => {
    const site = await buildSite();
    const answer = await (await auditorAt(site)).get(
      `/exports/year.csv?siteId=${site.id}&year=1999`,
    );
    const records: Record<string, string>[] = parse(answer.text, { columns: true });
    expect(records).toHaveLength(1);
    expect(records[0]).toMatchObject({ result_id: "rows", site: "0" });
  });

  test("is refused for a site where only another role is held", async () => {
    const [mine, other] = [await buildSite(), await buildSite()];
    const sibling = await buildSite({ organizationId: mine.organizationId });
    const user = await buildUser({
      organizationId: mine.organizationId,
      roles: ["auditor"],
      siteId: mine.id,
    });
    await insert("role_grants", {
      organizationId: mine.organizationId,
      userId: user.id,
      role: "worker",
      siteId: sibling.id,
    });
    const client = await signInAs(user);
    const status = async (siteId: string) =>
      (await client.get(`/exports/year.csv?siteId=${siteId}&year=2026`)).status;
    expect([await status(mine.id), await status(sibling.id), await status(other.id)]).toEqual([
      200, 403, 404,
    ]);
  });
});

describe("the ends of records", () => {
  const through = async (...chunks: string[]) => {
    const ends = new RecordEnds();
    const out: Buffer[] = [];
    ends.on("data", (chunk) => out.push(chunk));
    for (const chunk of chunks) ends.write(chunk);
    ends.end();
    await once(ends, "end");
    return { text: Buffer.concat(out).toString(), count: ends.count };
  };

  test("are CR LF, wherever the chunks are cut", async () => {
    expect(await through("a,b\n1,", "2\n3", ",4\n")).toEqual({
      text: "a,b\r\n1,2\r\n3,4\r\n",
      count: 3,
    });
  });

  test("are none inside quotes, even across chunks", async () => {
    expect(await through('a\n"x\n""y', '\nz"\n1', "\n")).toEqual({
      text: 'a\r\n"x\n""y\nz"\r\n1\r\n',
      count: 3,
    });
  });
});

describe("an export that does not reach its end", () => {
  const server = testApp().listen(0, "127.0.0.1");
  afterAll(() => {
    server.closeAllConnections();
    server.close();
  });

  /** Enough records that sockets on the way can't hold them all. */
  let big: Promise<Site> | undefined;
  const bigSite = () => (big ??= buildBigSite());

  const longList = Array.from({ length: 40 }, (_, index) => ({
    criterionId: `criterion-number-${index}`,
    verdict: "under",
  }));

  async function buildBigSite() {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const resultId = await buildDay(worker, "2025-01-01");
    await owner().query(
      `WITH crowd AS (
         INSERT INTO workers (organization_id, site_id, employee_number, name, hired_on)
         SELECT $1, $2, 'n' || n, 'Worker ' || n, '2020-01-01' FROM generate_series(1, 100) n RETURNING id),
       results AS (
         INSERT INTO day_results (organization_id, site_id, worker_id, date, origin, governing_rule_set, governing_version, method_version, inputs_hash,
           shift_min, unaccounted_min, grade, outside_bound, outside_db, verdict_outside, verdict_at_ear, has_protector, criteria, refs)
         SELECT r.organization_id, r.site_id, c.id, d::date, r.origin, r.governing_rule_set, 1, 1, decode(md5(c.id::text || d), 'hex'), 480, 0, r.grade,
           r.outside_bound, 80 + random(), r.verdict_outside, r.verdict_at_ear, r.has_protector, $4::jsonb, r.refs
         FROM crowd c, generate_series(timestamp '2026-01-01', '2026-04-30', '1 day') d, day_results r WHERE r.id = $3
         RETURNING id, organization_id, site_id, worker_id, date)
       INSERT INTO days (organization_id, site_id, worker_id, date, current_result_id, is_stale)
       SELECT organization_id, site_id, worker_id, date, id, FALSE FROM results`,
      [site.organizationId, site.id, resultId, JSON.stringify({ governing: longList })],
    );
    return site;
  }

  async function open(site: Site) {
    const { headers } = await auditorAt(site);
    const { port } = server.address() as AddressInfo;
    const request = http.get({
      port,
      host: "127.0.0.1",
      path: `/api/exports/year.csv?siteId=${site.id}&year=2026`,
      headers,
    });
    const [response] = (await once(request, "response")) as [http.IncomingMessage];
    await once(response, "readable");
    return { request, response };
  }

  const queries = () =>
    select<{ pid: number }>(
      "SELECT pid FROM pg_stat_activity WHERE datname = current_database() AND application_name = 'dinward export'",
    );

  test("a reader who goes away leaves no query behind", async () => {
    const { request, response } = await open(await bigSite());
    expect(await queries()).toHaveLength(1);
    response.on("error", () => undefined);
    request.destroy();
    await vi.waitFor(async () => expect(await queries()).toHaveLength(0), { timeout: 5000 });
  });

  test("a database that fails midway cuts the connection, and the file has no last record", async () => {
    const { response } = await open(await bigSite());
    const [query] = await queries();
    const app = new pg.Client(process.env.DATABASE_URL);
    await app.connect();
    await app.query("SELECT pg_terminate_backend($1)", [query!.pid]);
    await app.end();
    const chunks: Buffer[] = [];
    const failure = await (async () => {
      for await (const chunk of response) chunks.push(chunk);
    })().then(
      () => null,
      (error: Error) => error,
    );
    expect(failure).toBeInstanceOf(Error);
    expect(Buffer.concat(chunks).toString()).not.toMatch(/^rows,/m);
    expect(await queries()).toHaveLength(0);
  });

  test("a whole file of many records ends with their number", async () => {
    const site = await bigSite();
    const answer = await (await auditorAt(site)).get(
      `/exports/year.csv?siteId=${site.id}&year=2026`,
    );
    const records: string[][] = parse(answer.text);
    expect(records.at(-1)?.slice(0, 2)).toEqual(["rows", "12000"]);
    expect(records).toHaveLength(12_002);
  });
});

describe("what is missing in a year", () => {
  const gaps = async (site: Site) => {
    const client = await auditorAt(site);
    const { counts, ...more } = (await client.get(`/exports/gaps?siteId=${site.id}&year=2026`))
      .body;
    const names = async (kind: string) =>
      (await client.get(`/exports/gap-names?siteId=${site.id}&year=2026&kind=${kind}`)).body.rows;
    return {
      counts: Object.fromEntries(
        counts.map((found: { kind: string; count: number }) => [found.kind, found.count]),
      ),
      names,
      ...more,
    };
  };

  test("a worker over 80 dB known only from the task's level is not measured, until a run of that year is there", async () => {
    const site = await buildSite();
    const [loud, quiet, measured] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    await buildDay(loud, "2026-03-02", { outsideDb: 80.1 });
    await buildDay(quiet, "2026-03-02", { outsideDb: 80 });
    await buildDay(measured, "2026-03-02", { outsideDb: 95 });
    const instrument = await buildInstrument({ site });
    await owner().query(
      `WITH v AS (INSERT INTO run_revisions (organization_id, run_id, number, duration_min, covers) VALUES ($1, gen_random_uuid(), 1, 480, 'shift') RETURNING id, run_id)
       INSERT INTO runs (id, organization_id, site_id, instrument_id, worker_id, date, current_revision_id) SELECT run_id, $1, $2, $3, $4, '2026-07-01', id FROM v`,
      [site.organizationId, site.id, instrument.id, measured.id],
    );
    const { counts, names } = await gaps(site);
    expect(counts["not-measured"]).toBe(1);
    expect(await names("not-measured")).toEqual([
      {
        id: loud.id,
        name: loud.name,
        employeeNumber: loud.employeeNumber,
        note: null,
        date: "2026-03-02",
      },
    ]);
  });

  test("a notice sent more than a day after the entry is late, one that failed was not sent", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const user = await buildUser({
      organizationId: site.organizationId,
      name: "Ada Lund",
      roles: ["supervisor"],
    });
    const task = await buildTask({ site });
    const { organizationId } = site;
    const findingId = await insert("findings", {
      organizationId,
      siteId: site.id,
      workerId: worker.id,
      kind: "no-protector",
      state: "new",
      firstDate: "2026-03-01",
      lastDate: "2026-03-04",
    });
    const resultOf = new Map<string, string>();
    for (const [day, state, sentAt] of [
      ["01", "sent", "2026-03-01T18:00Z"],
      ["02", "sent", "2026-03-03T18:00Z"],
      ["03", "failed", null],
      ["04", "waiting", null],
    ] as const) {
      const date = `2026-03-${day}`;
      const resultId = await buildDay(worker, date, { decidingTaskId: task.id });
      resultOf.set(date, resultId);
      const noticeId = await insert("notices", {
        organizationId,
        siteId: site.id,
        recipientId: user.id,
        entryId: crypto.randomUUID(),
        audience: "supervisor",
        state,
        sentAt,
        messageId: `<${date}@x>`,
        createdAt: `${date}T12:00Z`,
        notBefore: state === "waiting" ? new Date(Date.now() + 60_000) : `${date}T12:15Z`,
      });
      await insert("notice_items", {
        organizationId,
        noticeId,
        findingId,
        workerId: worker.id,
        date,
        resultId,
      });
    }
    await insert("finding_evidence", {
      organizationId,
      findingId,
      workerId: worker.id,
      date: "2026-03-04",
      resultId: resultOf.get("2026-03-04"),
    });
    const { counts, names } = await gaps(site);
    expect(counts).toMatchObject({ "notice-late": 1, "notice-not-sent": 1, "no-protector": 1 });
    expect(await names("notice-late")).toMatchObject([
      { id: worker.id, note: "Ada Lund", date: "2026-03-02" },
    ]);
    expect(await names("notice-not-sent")).toMatchObject([{ id: worker.id, date: "2026-03-03" }]);
    expect(await names("no-protector")).toMatchObject([
      { id: worker.id, note: task.name, date: "2026-03-04" },
    ]);
  });

  test("where the site asks for fit tests, who wears a protector in noise and has none within the interval", async () => {
    const site = await buildSite();
    await owner().query("UPDATE sites SET fit_every_months = 12 WHERE id = $1", [site.id]);
    const [never, longAgo, lately] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    for (const worker of [never, longAgo, lately]) await buildDay(worker, "2026-03-02");
    await buildFitTest({ worker: longAgo, testedOn: "2025-03-01" });
    await buildFitTest({ worker: lately, testedOn: "2025-03-03" });
    const { counts, names } = await gaps(site);
    expect(counts["not-fitted"]).toBe(2);
    expect((await names("not-fitted")).map(({ id }: { id: string }) => id).sort()).toEqual(
      [never.id, longAgo.id].sort(),
    );
    const silent = await buildSite();
    await buildDay(await buildWorker({ site: silent }), "2026-03-02");
    expect((await gaps(silent)).counts["not-fitted"]).toBe(1);
  });

  test("where the site states no interval it says so, and counts who was never tested with what they wear", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const [worn, other] = [
      await buildProtector({ organizationId }),
      await buildProtector({ organizationId }),
    ];
    const [never, long, elsewhere] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    for (const worker of [never, long, elsewhere]) {
      await buildDay(worker, "2026-03-02");
      await buildAssignment({ worker, inner: worn });
    }
    await buildFitTest({ worker: long, model: worn, testedOn: "2021-03-01" });
    await buildFitTest({ worker: elsewhere, model: other, testedOn: "2026-02-01" });
    const client = await auditorAt(site);
    const of = async () =>
      (await client.get(`/exports/gaps?siteId=${site.id}&year=2026`)).body.counts.find(
        ({ kind }: { kind: string }) => kind === "not-fitted",
      );
    expect(await of()).toEqual({ kind: "not-fitted", count: 2, hasNoInterval: true });
    const { names } = await gaps(site);
    expect((await names("not-fitted")).map(({ id }: { id: string }) => id).sort()).toEqual(
      [never.id, elsewhere.id].sort(),
    );
    await owner().query("UPDATE sites SET fit_every_months = 12 WHERE id = $1", [site.id]);
    expect(await of()).toEqual({ kind: "not-fitted", count: 2 });
  });

  test("a letter of results is late until it reached its worker within the rule's days", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const letter = async (date: string, dueOn: string, signedOn: string | null) => {
      const worker = await buildWorker({ site });
      const resultId = await buildDay(worker, date);
      const letterId = await insert("result_letters", {
        organizationId,
        siteId: site.id,
        workerId: worker.id,
        ruleSet: "eu-2003-10-ec",
        ruleSetVersion: 1,
        dueOn,
        language: "en",
        subject: "Results",
        bodyText: "91.3 dB",
      });
      await insert("result_letter_days", {
        organizationId,
        letterId,
        workerId: worker.id,
        date,
        resultId,
        criterion: "upper-action",
        isOver: true,
      });
      if (signedOn !== null)
        await insert("notice_acknowledgements", {
          organizationId,
          letterId,
          way: "paper",
          signedOn,
          recordedBy: (await buildUser({ organizationId, roles: ["officer"] })).id,
        });
      return worker.id;
    };
    const unsent = await letter("2026-03-02", "2026-03-17", null);
    const late = await letter("2026-03-02", "2026-03-17", "2026-03-18");
    await letter("2026-03-02", "2026-03-17", "2026-03-17");
    await letter("2026-03-02", "2126-03-17", null);
    await letter("2025-03-03", "2025-03-17", null);
    const { counts, names } = await gaps(site);
    expect(counts["letter-late"]).toBe(2);
    expect((await names("letter-late")).map(({ id }: { id: string }) => id).sort()).toEqual(
      [unsent, late].sort(),
    );
  });

  test("the months state medians of the unrounded levels", async () => {
    const site = await buildSite();
    for (const outsideDb of [80, 90, 91])
      await buildDay(await buildWorker({ site }), "2026-02-03", {
        outsideDb,
        atEarDb: outsideDb - 20,
      });
    await buildDay(await buildWorker({ site }), "2025-02-03");
    const { months, years, ruleSets } = await gaps(site);
    expect(months).toEqual([
      {
        month: 2,
        days: 3,
        over: 0,
        cantTell: 0,
        notAssessed: 0,
        overOutside: 3,
        cantTellOutside: 0,
        protectorFault: 0,
        corrected: 0,
        medianAtEarDb: 70,
        medianOutsideDb: 90,
      },
    ]);
    expect(years).toEqual([2026, 2025]);
    expect(ruleSets).toEqual([{ key: "eu-2003-10-ec", version: 1 }]);
  });
});
