import { execFileSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { Readable } from "node:stream";
import { buffer } from "node:stream/consumers";
import request from "supertest";
import { beforeAll, describe, expect, test } from "vitest";
import { ensureProgram } from "../../scripts/lib/debian-programs.mjs";
import { recomputeDays } from "../../server/commands/recompute-days";
import { sealTrail } from "../../server/lib/audit";
import { inTransaction } from "../../server/lib/db";
import { formatShortDate } from "../../shared/format/date";
import { formatLevel } from "../../shared/format/level";
import type { YearReportFigures } from "../../shared/schemas/report";
import {
  buildAssignment,
  buildDay,
  buildFinding,
  buildFitTest,
  buildJob,
  buildProtector,
  buildRun,
  buildShift,
  buildSite,
  buildSurvey,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  insert,
  type Site,
  select,
  signInAs,
  testApp,
  type Worker,
} from "../factories";
import { describeEndpoint } from "./five-cases";

beforeAll(() => ensureProgram("pdftotext", "poppler-utils"), 120_000);

const clientAt = async (site: Site, role: "officer" | "auditor", language = "en") =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: [role], language }));

async function takePdf(client: Client, path: string): Promise<Buffer> {
  const answer = await request(testApp())
    .get(`/api${path}`)
    .set(client.headers)
    .buffer(true)
    .parse((stream, done) => {
      buffer(stream as unknown as Readable).then(
        (bytes) => done(null, bytes),
        (error) => done(error, null),
      );
    });
  expect(answer.status).toBe(200);
  expect(answer.headers["content-type"]).toBe("application/pdf");
  expect(answer.headers["content-disposition"]).toMatch(
    /^attachment; filename="?[a-z0-9-]+\.pdf"?$/,
  );
  return answer.body as Buffer;
}

/** What another program reads in a PDF. */
function readBack(
  pdf: Buffer,
  program: "pdftotext" | "pdfinfo" | "pdffonts" = "pdftotext",
): string {
  const folder = mkdtempSync(join(tmpdir(), "dinward-pdf-"));
  try {
    const file = join(folder, "report.pdf");
    writeFileSync(file, pdf);
    return execFileSync(program, program === "pdftotext" ? ["-layout", file, "-"] : [file], {
      encoding: "utf8",
    });
  } finally {
    rmSync(folder, { recursive: true });
  }
}

/** Lines with runs of spaces as one. */
const plain = (text: string) => text.replace(/[ \u00a0]+/g, " ");

async function computedWorker(site: Site, language = "en") {
  const worker = await buildWorker({ site, name: "Quill Amberley-Voß", language });
  await buildAssignment({ worker });
  const task = await buildTask({ site, levelDb: 97.3 });
  const keys = ["2026-03-02", "2026-03-03"].map((date) => ({ workerId: worker.id, date }));
  for (const { date } of keys) {
    await insert("days", {
      organizationId: site.organizationId,
      workerId: worker.id,
      date,
      siteId: site.id,
    });
    await buildShift(worker, { date, tasks: [{ taskId: task.id, durationMin: 480, wornPct: 90 }] });
  }
  const compute = () =>
    inTransaction({ organizationId: site.organizationId }, () =>
      recomputeDays(site.organizationId, keys),
    );
  await compute();
  return { worker, task, compute };
}

const noVerdicts = { under: 0, over: 0, cantTell: 0, notAssessed: 0 };
const noFigures: YearReportFigures = {
  people: {
    withDay: 0,
    inNoise: 0,
    levelUnknown: 0,
    measured: 0,
    byGroup: 0,
    neverMeasured: 0,
    undecided: 0,
    overAtEar: 0,
  },
  days: { count: 0, outside: noVerdicts, atEar: null },
  histogram: [],
  months: [],
  gaps: [],
  ruleSets: [],
  findings: { opened: 0, closed: 0, open: 0, overdue: 0 },
  changes: null,
};

/** An issued report of a year of which nothing is known. */
const buildReport = async (site: Site): Promise<string> =>
  insert("year_reports", {
    organizationId: site.organizationId,
    siteId: site.id,
    year: 2026,
    number: 1,
    asOf: new Date(),
    figures: JSON.stringify(noFigures),
    results: [],
    resultsSha256: Buffer.alloc(32),
    authorId: (await buildUser({ organizationId: site.organizationId, roles: ["officer"] })).id,
  });

const recordOf = ({ id }: Pick<Worker, "id">) => `/workers/${id}/exposure-record.pdf`;

describeEndpoint({
  route: "GET /workers/:id/exposure-record.pdf",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: { path: "?language=xx" },
  badField: "language",
  call: async (site) => ({ method: "get", path: recordOf(await buildWorker({ site })) }),
});
describeEndpoint({
  route: "GET /surveys/:id/report.pdf",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/surveys/${(await buildSurvey({ site, targets: [{ taskId: null }] })).id}/report.pdf`,
  }),
});
describeEndpoint({
  route: "GET /surveys/:id/field-sheet.pdf",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/surveys/${(await buildSurvey({ site, targets: [{ taskId: null }] })).id}/field-sheet.pdf`,
  }),
});
describeEndpoint({
  route: "GET /issue-slips.pdf",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: { path: "&language=xx" },
  badField: "language",
  call: async (site) => ({
    method: "get",
    path: `/issue-slips.pdf?workerIds=${(await buildWorker({ site })).id}`,
  }),
});
describeEndpoint({
  route: "GET /year-reports",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "&year=x" },
  badField: "year",
  call: async (site) => ({ method: "get", path: `/year-reports?siteId=${site.id}&year=2026` }),
});
describeEndpoint({
  route: "POST /year-reports",
  as: "officer",
  not: "auditor",
  event: "issue-year-report",
  bad: { body: { year: 12 } },
  badField: "year",
  call: async (site) => {
    await buildDay(await buildWorker({ site }), "2026-03-02");
    return { method: "post", path: "/year-reports", body: { siteId: site.id, year: 2026 } };
  },
});
describeEndpoint({
  route: "GET /year-reports/:id/report.pdf",
  as: "auditor",
  not: "worker",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/year-reports/${await buildReport(site)}/report.pdf`,
  }),
});

describe("a worker's exposure record", () => {
  test("read back by another program it has every result's id, level and verdict as the API gives them", async () => {
    const site = await buildSite({ name: "Ostmere, works", timeZone: "UTC" });
    const { worker } = await computedWorker(site);
    const fit = await buildFitTest({ worker, parDb: 21.4, testedOn: "2026-02-03" });
    await inTransaction({ organizationId: site.organizationId }, () =>
      sealTrail(site.organizationId),
    );
    const officer = await clientAt(site, "officer");
    const { body } = await officer.get(`/workers/${worker.id}/days`);
    const pdf = await takePdf(officer, recordOf(worker));
    const text = plain(readBack(pdf));
    expect(body.rows).toHaveLength(2);
    for (const day of body.rows) {
      expect(text).toContain(day.resultId);
      const line = text.split("\n").find((one) => one.includes(day.resultId)) ?? "";
      expect(line).toContain(formatShortDate(day.date, "en"));
      expect(line).toContain(formatLevel(day.outsideDb, "en", day.outsideBound));
      expect(line).toContain(formatLevel(day.atEarDb, "en", day.atEarBound));
    }
    expect(text).toContain("Quill Amberley-Voß");
    expect(text).toContain("21.4");
    expect(text).toContain(fit.model.name);
    const [seal] = await select<{ number: number; hash: string }>(
      "SELECT number::int AS number, encode(hash, 'hex') AS hash FROM audit_seals WHERE organization_id = $1 ORDER BY number DESC LIMIT 1",
      [site.organizationId],
    );
    expect(text).toContain(`seal ${seal?.number}, ${seal?.hash.slice(0, 16)}`);
    expect(text).toMatch(/Page 1 of \d/);
    const info = readBack(pdf, "pdfinfo");
    expect(info).toMatch(/Tagged: +yes/);
    expect(info).toMatch(/Title: +Exposure record of Quill Amberley-Voß/);
  });

  test("is in the worker's language, whoever takes it, or in the one asked for", async () => {
    const site = await buildSite();
    const { worker } = await computedWorker(site, "pl");
    const officer = await clientAt(site, "officer");
    const { body } = await officer.get(`/workers/${worker.id}/days`);
    const polish = readBack(await takePdf(officer, recordOf(worker)));
    expect(polish).toContain(formatLevel(body.rows[0].outsideDb, "pl"));
    expect(polish).toContain("Przy uchu");
    const english = readBack(await takePdf(officer, `${recordOf(worker)}?language=en`));
    expect(english).toContain("At the ear");
  });

  test("is the worker's own to take, nobody else's, and an officer who takes it stands in the access log", async () => {
    const site = await buildSite();
    const [own, other] = [await buildWorker({ site }), await buildWorker({ site })];
    const me = await signInAs(
      await buildUser({
        organizationId: site.organizationId,
        roles: ["worker"],
        workerId: own.id,
      }),
    );
    await takePdf(me, recordOf(own));
    expect((await me.get(recordOf(other))).status).toBe(404);
    await takePdf(await clientAt(site, "officer"), recordOf(own));
    const reads = await select(
      "SELECT kind FROM record_reads WHERE worker_id = $1 AND kind = 'history'",
      [own.id],
    );
    expect(reads).toHaveLength(1);
  });

  test("signs and letters that the typeface lacks are still read out as they are", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site, name: "Łucja 林" });
    await buildDay(worker, "2026-05-04", { outsideDb: 84.1 });
    const text = readBack(await takePdf(await clientAt(site, "officer"), recordOf(worker)));
    expect(text).toContain("Łucja 林");
  });

  test.each([
    ["Ευτέρπη Ξανθάκη", "NotoSans-greek"],
    ["Єлизавета Щеглюк", "NotoSans-cyrillic"],
  ])("%s is written in a typeface that has its letters", async (name, font) => {
    const site = await buildSite();
    const worker = await buildWorker({ site, name });
    const pdf = await takePdf(await clientAt(site, "officer"), recordOf(worker));
    expect(readBack(pdf)).toContain(name);
    expect(readBack(pdf, "pdffonts")).toMatch(new RegExp(`\\+${font}\\b.* yes `));
  });
});

describe("a survey's report", () => {
  test("has each sample, the result of each task, and names what is missing", async () => {
    const site = await buildSite();
    const task = await buildTask({ site, name: "Fettling" });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const survey = await buildSurvey({ site, jobId: job.id, targets: [{ taskId: task.id }] });
    for (const levelDb of [90.2, 91.4, 92.6])
      await buildRun({ site, surveyId: survey.id, taskId: task.id, levelDb });
    const officer = await clientAt(site, "officer");
    const { body } = await officer.get(`/surveys/${survey.id}`);
    const text = plain(readBack(await takePdf(officer, `/surveys/${survey.id}/report.pdf`)));
    for (const { laeqDb, runRevisionId } of body.samples) {
      const at = text.split("\n").findIndex((line) => line.includes(runRevisionId.slice(0, 20)));
      expect(text.split("\n")[at]).toContain(formatLevel(laeqDb, "en"));
    }
    expect(text).toContain(formatLevel(body.results[0].levelDb, "en"));
    const { body: group } = await officer.get(`/groups/${job.id}`);
    const { budget } = group.budgets.find(
      ({ surveyId }: { surveyId: string }) => surveyId === survey.id,
    );
    expect(text).toContain(`LEX,8h ${formatLevel(budget.lexDb, "en")} dB(A)`);
    expect(text).toContain(`${formatLevel(budget.expandedDb, "en")} dB`);
    expect(text).toContain("Not on record");
    expect(text).toContain("– who measured");
    expect(text).toContain("clause 15 of ISO 9612:2009 from memory");
  });
});

describe("a survey's field sheet", () => {
  test("has a sheet for each task, with a row for each sample to write in", async () => {
    const site = await buildSite();
    const tasks = [
      await buildTask({ site, name: "Fettling" }),
      await buildTask({ site, name: "Quenching" }),
    ];
    const job = await buildJob({
      site,
      tasks: tasks.map(({ id }) => ({ taskId: id, durationMin: 240 })),
    });
    const survey = await buildSurvey({
      site,
      jobId: job.id,
      targets: tasks.map(({ id }) => ({ taskId: id })),
    });
    const officer = await clientAt(site, "officer");
    const { body } = await officer.get(`/surveys/${survey.id}`);
    const pdf = await takePdf(officer, `/surveys/${survey.id}/field-sheet.pdf`);
    const sheets = plain(readBack(pdf)).split("\f").filter(Boolean);
    expect(sheets).toHaveLength(2);
    for (const [index, sheet] of sheets.entries()) {
      expect(sheet).toContain(body.taskNames[tasks[index]!.id]);
      expect(sheet).toContain(`Field sheet ${index + 1} of 2: ${body.name}`);
      expect(sheet).toContain(survey.id);
      expect(sheet).toContain("Page 1 of 1");
      const rows = sheet.match(/^ *\d+ \d+( h| min).*$/gm);
      expect(rows).toHaveLength(body.targets[index].samplesCount);
    }
    expect(readBack(pdf, "pdfinfo")).toMatch(/Tagged: +yes/);
  });
});

describe("issue slips", () => {
  test("are a sheet for each worker in the worker's language, with the levels that the API gives", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const loud = await buildTask({
      site,
      name: "Loud",
      levelDb: 98.4,
      octaveBandsDb: [20, 20, 20, 20, 98.4, 20, 20, 20],
    });
    const job = await buildJob({ site, tasks: [{ taskId: loud.id, durationMin: 60 }] });
    const [one, other] = [
      await buildWorker({ site, jobId: job.id, name: "Ødger Holm", language: "de" }),
      await buildWorker({ site, name: "Ines Alba", language: "es" }),
    ];
    const inner = await buildProtector({ organizationId, name: "Muff", data: { snrDb: 20 } });
    await buildAssignment({ worker: one, inner });
    const officer = await clientAt(site, "officer");
    const ids = `workerIds=${one.id},${other.id}`;
    const { body } = await officer.get(`/issue-slips?${ids}`);
    const [device] = body.rows[0].protectors;
    const slips = plain(readBack(await takePdf(officer, `/issue-slips.pdf?${ids}`)))
      .split("\f")
      .filter(Boolean);
    expect(slips).toHaveLength(2);
    expect(slips[0]).toContain("Ødger Holm");
    expect(slips[0]).toContain("Muff");
    expect(slips[0]).toContain("Ihre Gehörschützer");
    expect(slips[0]).toContain(formatLevel(device.outsideDb, "de"));
    expect(slips[0]).toContain(formatLevel(device.wornDb, "de"));
    expect(slips[1]).toContain("Ines Alba");
    expect(slips[1]).not.toContain("Ødger Holm");
    const english = readBack(await takePdf(officer, `/issue-slips.pdf?${ids}&language=en`));
    expect(english.match(/Your hearing protectors/g)).toHaveLength(2);
    const foreign = await buildWorker();
    const refused = await officer.get(`/issue-slips.pdf?workerIds=${one.id},${foreign.id}`);
    expect(refused.status).toBe(404);
  });
});

describe("a year's report", () => {
  test("stays as it was issued, and the next says what changed and why", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const { task, compute } = await computedWorker(site);
    await buildDay(await buildWorker({ site }), "2026-05-04", { outsideDb: 71, atEarDb: 71 });
    const officer = await clientAt(site, "officer");
    const year = { siteId: site.id, year: 2026 };
    const first = await officer.post("/year-reports", year);
    expect(first.status).toBe(201);
    expect(first.body).toMatchObject({ number: 1, resultsCount: 3 });
    const asIssued = readBack(await takePdf(officer, `/year-reports/${first.body.id}/report.pdf`));
    const people = plain(asIssued);
    expect(people).toMatch(/With a day on record 2 /);
    expect(people).toMatch(/In noise 1 /);
    expect(people).toMatch(/Never measured 1 /);
    expect(people).toContain("This is the first report of the year.");

    await insert("task_levels", {
      organizationId,
      taskId: task.id,
      number: 2,
      metric: JSON.stringify({ kind: "laeq" }),
      levelDb: 122,
      grade: "task-level",
      effectiveFrom: "2026-03-03",
      reason: "measured anew",
    });
    await compute();
    await buildDay(await buildWorker({ site }), "2026-06-01");
    const { body: second } = await officer.post("/year-reports", year);
    expect(second).toMatchObject({ number: 2, resultsCount: 4 });
    expect(second.resultsSha256).not.toBe(first.body.resultsSha256);
    const [kept] = await select<{ changes: object }>(
      "SELECT figures->'changes' AS changes FROM year_reports WHERE id = $1",
      [second.id],
    );
    expect(kept?.changes).toMatchObject({
      since: { number: 1 },
      newDays: 1,
      goneDays: 0,
      changedDays: 1,
      byCause: [{ cause: "measured-anew", days: 1 }],
    });
    const later = plain(readBack(await takePdf(officer, `/year-reports/${second.id}/report.pdf`)));
    expect(later).toContain("1 days are new and 0 gone; 1 have another result");
    expect(later).toMatch(/Measured anew: another level of a task.* 1 /);

    // Whatever changed since, the first is what it was.
    expect(readBack(await takePdf(officer, `/year-reports/${first.body.id}/report.pdf`))).toBe(
      asIssued,
    );
    const list = await officer.get(`/year-reports?siteId=${site.id}&year=2026`);
    expect(list.body.rows.map(({ number }: { number: number }) => number)).toEqual([2, 1]);
  });

  test("an overdue finding is what the screens call one, and what no rule judges at the ear is no zero", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const worker = await buildWorker({ site });
    await buildDay(worker, "2026-05-04", {
      governingRuleSet: "us-general-industry",
      outsideDb: 92,
    });
    const year = { kind: "over-limit-outside", site, lastDate: "2026-05-04", dueOn: "2026-05-05" };
    for (const state of ["new", "in-hand", "came-back", "done"] as const)
      await buildFinding({ ...year, state, workerId: (await buildWorker({ site })).id });
    const officer = await clientAt(site, "officer");
    const { body } = await officer.post("/year-reports", { siteId: site.id, year: 2026 });
    const text = plain(readBack(await takePdf(officer, `/year-reports/${body.id}/report.pdf`)));
    expect(text).toContain("0 closed, 4 open, 3 of these overdue");
    expect(text).toContain("No rule of the year judges the day at the ear");
    expect(text).toMatch(/Over at the ear – of those in noise/);
  });

  test("one key issues one report, and a year without a day none", async () => {
    const site = await buildSite();
    const officer = await clientAt(site, "officer");
    const year = { siteId: site.id, year: 2026 };
    const empty = await officer.post("/year-reports", year);
    expect([empty.status, empty.body.code]).toEqual([422, "nothing-to-do"]);
    await buildDay(await buildWorker({ site }), "2026-05-04");
    const [one, same] = [
      await officer.post("/year-reports", year, "the-same-key"),
      await officer.post("/year-reports", year, "the-same-key"),
    ];
    expect(same.body).toEqual(one.body);
    const list = await officer.get(`/year-reports?siteId=${site.id}&year=2026`);
    expect(list.body.rows).toHaveLength(1);
  });
});
