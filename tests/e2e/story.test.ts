import { execFile } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { PassThrough } from "node:stream";
import { buffer } from "node:stream/consumers";
import { pathToFileURL } from "node:url";
import { promisify } from "node:util";
import pg from "pg";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { ZipStream } from "../../server/exports/zip-stream";
import { formatDay, formatShortDate } from "../../shared/format/date";
import { addDays, localDate } from "../../shared/time/zone";
import { readZip } from "../../shared/year-file/read-zip";
import { type RunningApp, startApp } from "../setup/app";
import { type QuietPage, signInAs, startBrowser, type TestBrowser } from "../setup/browser";
import { projectFolder } from "../setup/processes";
import type { Mail } from "../setup/services";

const WORKER = "E. Vasquez-Lund";
const NUMBER = "3388";
const MAIL = "e.vasquez@ostmere.example";
/** What she wears instead of her foam: it leaves her over the limit on a loud day. */
const STOPGAP = "Fenmuff low";
const REFIT = "Fenmuff";
const DOSIMETER = "OD 40125";
/** A letter of results is due after two weeks and waits no longer from three days before. */
const HURRIED_AFTER_DAYS = 12;
const today = localDate(new Date(), "Europe/London");

let app: RunningApp;
let browser: TestBrowser;
let officer: QuietPage;
let page: Page;
let folder: string;
let workerId = "";
let siteId = "";
let findingId = "";
/** The day over the limit, the day of the refit, and the day that is measured after it. */
let over = "";
let refit = "";
let after = "";
let letterLink = "";
let yearZip = "";

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), "dinward-story-"));
  [app, browser] = await Promise.all([startApp({ label: "story", seed: "demo" }), startBrowser()]);
  const admin = await visit("I. Vandermolen");
  await admin.page.goto(`${app.url}/sites`);
  await admin.page.getByRole("button", { name: "Ostmere works" }).click();
  await admin.page.getByLabel("Before notices go").fill("0");
  await admin.page.getByRole("button", { name: "Save", exact: true }).click();
  await admin.page.getByRole("button", { name: "Ostmere works" }).waitFor();
  await admin.close();

  officer = await visit("S. Ferrand");
  page = officer.page;
  const { rows: workers } = await ask<{ rows: { id: string; siteId: string }[] }>(
    `/workers?search=${NUMBER}&limit=5`,
  );
  workerId = workers[0]?.id ?? "";
  siteId = workers[0]?.siteId ?? "";
  const [{ rows: days }, { rows: runs }] = await Promise.all([
    ask<{ rows: { date: string }[] }>(`/workers/${workerId}/days`),
    ask<{ rows: { date: string }[] }>(`/runs?workerId=${workerId}&limit=100`),
  ]);
  const measured = new Set(runs.map(({ date }) => date));
  const free = days.map(({ date }) => date).filter((date) => date < today && !measured.has(date));
  over = free.find((date) => date <= addDays(today, -HURRIED_AFTER_DAYS)) ?? "";
  after = free[0] ?? "";
  refit = days.map(({ date }) => date).findLast((date) => date > over) ?? "";
  expect(over < refit && refit < after, "three days of hers").toBe(true);
});
afterAll(async () => {
  await browser?.close();
  await app?.stop();
  if (folder) rmSync(folder, { recursive: true });
});

async function visit(name: string, width = 1280) {
  const quiet = await browser.openPage({ viewport: { width, height: 900 } });
  await signInAs(quiet.page, app.url, name);
  return quiet;
}

const ask = <Reply>(path: string) =>
  page.evaluate(async (to) => (await fetch(`/api${to}`)).json(), path) as Promise<Reply>;

const open = async (path: string, heading: string | RegExp) => {
  await page.goto(`${app.url}${path}`);
  await page.getByRole("heading", { level: 1, name: heading }).waitFor();
};

const computed = () =>
  expect
    .poll(async () => (await ask<{ daysLeft: number }>("/recompute-progress")).daysLeft, {
      timeout: 60_000,
    })
    .toBe(0);

/** What is looked after every minute is looked after now. */
async function lookAfter(): Promise<void> {
  const owner = new pg.Client({ connectionString: app.ownerUrl });
  await owner.connect();
  await owner.query("SELECT graphile_worker.add_job('look-after', job_key => 'look-after')");
  await owner.end();
}

/** A dosimeter's sheet of a day gone by, written up in one go. */
async function enterReading(date: string, levelDb: string): Promise<void> {
  await open(`/measuring/out-and-back?site=${siteId}&date=${date}`, "Out and back");
  const scan = page.getByLabel("Serial number, typed or scanned");
  await scan.fill(DOSIMETER);
  await scan.press("Enter");
  const row = page.getByRole("form", { name: new RegExp(DOSIMETER) });
  await row.getByRole("combobox", { name: "Worker or place" }).fill(NUMBER);
  await page.getByRole("option", { name: new RegExp(WORKER) }).click();
  await row.getByLabel("Check before").fill("114");
  await row.getByLabel("Out", { exact: true }).fill("06:00");
  await row.getByLabel("Back", { exact: true }).fill("14:00");
  await row.getByLabel("Check after").fill("113.9");
  await row.getByLabel("LAeq").fill(levelDb);
  await row.getByLabel("Peak, C").fill("130.5");
  await row.getByRole("button", { name: "Record the run" }).click();
  await page.getByText(`The run of ${DOSIMETER} is recorded.`).waitFor();
  await computed();
}

interface Figures {
  date: string;
  atEarDb: number | null;
  verdictAtEar: string | null;
}
const figuresOf = async (date: string) =>
  (await ask<{ rows: Figures[] }>(`/workers/${workerId}/days`)).rows.find(
    (day) => day.date === date,
  );

const openFinding = () => open(`/findings/${findingId}`, new RegExp(WORKER));

interface Letter {
  state: string;
  days: { date: string }[];
  worker: { id: string };
}
const letterOf = async (show: "all" | "acknowledged" = "all") =>
  (await ask<{ rows: Letter[] }>(`/letters?show=${show}&siteId=${siteId}&limit=100`)).rows.find(
    ({ worker, days }) => worker.id === workerId && days.some(({ date }) => date === over),
  );

interface Candidate {
  modelId: string;
  name: string;
  stock: number;
}

describe("from a reading over the limit to a year that proves itself", () => {
  test("a reading over the limit comes in through the screens, and a finding opens", async () => {
    await open(`/workers/${workerId}`, WORKER);
    await page.getByRole("button", { name: "Assign a protector" }).click();
    const form = page.getByRole("form", { name: "Assign a protector" });
    await form.getByLabel("Protector", { exact: true }).selectOption({ label: STOPGAP });
    const from = form.getByLabel("From", { exact: true });
    await from.fill(over);
    await from.blur();
    await form.getByRole("button", { name: "Assign", exact: true }).click();
    await form.waitFor({ state: "detached" });
    await computed();
    expect((await figuresOf(over))?.verdictAtEar).toBe("cant-tell-yet");

    await enterReading(over, "100.9");
    const day = await figuresOf(over);
    expect(day?.verdictAtEar).toBe("over");
    expect(day?.atEarDb).toBeGreaterThan(87);

    const { rows } = await ask<{ rows: { id: string; worker: { id: string } | null }[] }>(
      "/findings?state=open&kind=over-limit-at-ear&limit=100",
    );
    findingId = rows.find(({ worker }) => worker?.id === workerId)?.id ?? "";
    expect(findingId).not.toBe("");
  });

  test("its page says what was exceeded, whether it can be trusted, and who was told", async () => {
    await openFinding();
    const exceeded = page.getByRole("region", { name: "What was exceeded" });
    await exceeded.getByRole("link", { name: formatShortDate(over, "en") }).waitFor();
    const trust = page.getByRole("region", { name: "Can it be trusted?" });
    await trust.getByText("100.9").first().waitFor();
    const told = page.getByRole("region", { name: "Who has been told" });
    for (const name of ["S. Ferrand", WORKER]) {
      await expect
        .poll(
          async () => {
            await page.reload();
            await told.getByText(name).waitFor();
            return told.textContent();
          },
          { timeout: 30_000 },
        )
        .toMatch(new RegExp(`${name} was told`));
    }
  });

  test("the letter of results goes out in Spanish; the button acknowledges it, no opening does", async () => {
    await lookAfter();
    const spanish = formatDay(over, "es");
    let letter: Mail | undefined;
    await expect
      .poll(
        async () => {
          const mails = await app.mailbox.mails({ to: MAIL });
          letter = mails.find(
            ({ subject, text }) =>
              subject === "Resultados de las mediciones en su trabajo" && text.includes(spanish),
          );
          return letter?.subject;
        },
        { timeout: 70_000 },
      )
      .toBeDefined();
    expect(letter?.html).toMatch(/<html[^>]* lang="es"/);
    expect(letter?.text).toContain("100,9");
    letterLink = letter?.text.match(/http\S+\/acknowledge\/\S+/)?.[0] ?? "";
    expect(letter?.html).toContain(letterLink);

    // As mail servers do: opened to be looked at, and once more.
    const reader = await browser.openPage({ viewport: { width: 360, height: 800 } });
    for (const _ of ["first", "second"]) {
      await reader.page.goto(letterLink);
      await reader.page.getByRole("button", { name: "La he leído" }).waitFor();
    }
    await reader.page.locator("html[lang=es]").waitFor();
    expect((await letterOf())?.state).toBe("sent");
    await reader.page.getByRole("button", { name: "La he leído" }).click();
    await reader.page.getByText(/^Usted dijo el .* que había leído esta carta/).waitFor();
    await reader.close();

    const again = await browser.openPage();
    await again.page.goto(letterLink);
    await again.page.getByText(/^Usted dijo el .* que había leído esta carta/).waitFor();
    await again.close();
    const somebody = await visit("D. Tavernor");
    somebody.allow(/403/);
    await somebody.page.goto(letterLink);
    await somebody.page.getByText(/somebody else than the person signed in here/).waitFor();
    await somebody.close();

    expect((await letterOf("acknowledged"))?.state).toBe("acknowledged");
    await open("/letters?show=acknowledged", "Letters of results");
    await page.getByRole("link", { name: WORKER }).first().waitFor();
  });

  test("Try changes: another protector brings her under, and it is kept as a Plan", async () => {
    await openFinding();
    await page.getByRole("link", { name: "Try changes" }).click();
    await page.getByRole("heading", { level: 1, name: `Try changes: ${WORKER}` }).waitFor();
    const row = page.getByRole("row", { name: new RegExp(WORKER) });
    await row.getByText("Can’t tell yet").first().waitFor();
    await page.getByRole("button", { name: "Add a change" }).click();
    await page.getByLabel("What changes").selectOption({ label: "Another protector" });
    const form = page.getByRole("form", { name: "Another protector" });
    await form.getByLabel("Protector", { exact: true }).selectOption({ label: REFIT });
    await form.getByRole("button", { name: "Try it" }).click();
    await row.getByText("Under", { exact: true }).first().waitFor();
    const keep = page.getByRole("form", { name: "Keep it as a Plan" });
    await keep.getByLabel("Name", { exact: true }).fill("A better muff at the runs");
    await keep.getByRole("button", { name: "Keep the Plan" }).click();
    await page.getByRole("heading", { level: 1, name: "A better muff at the runs" }).waitFor();
  });

  test("refitted at the desk, one less in stock; she says on her own page that she has it", async () => {
    await open("/protectors/fitting", "Fit and issue");
    const who = page.getByLabel("Employee number, or name");
    await who.fill(NUMBER);
    await who.press("Enter");
    const form = page.getByRole("form", { name: "Test the fit" });
    const { candidates } = await ask<{ candidates: Candidate[] }>(`/workers/${workerId}/fitting`);
    const { modelId = "", stock = 0 } = candidates.find(({ name }) => name === REFIT) ?? {};
    await form.getByLabel("Device").selectOption(modelId);
    const testedOn = form.getByLabel("Tested on");
    await testedOn.fill(refit);
    await testedOn.blur();
    const trials = { "Left ear": ["26", "27", "26.5"], "Right ear": ["27", "25.5", "26"] };
    for (const [ear, values] of Object.entries(trials))
      for (const [place, value] of values.entries())
        await form
          .getByRole("group", { name: ear })
          .getByLabel(`Trial ${place + 1}`)
          .fill(value);
    await form.getByRole("button", { name: "Record the fit" }).click();
    const issue = page.getByRole("form", { name: `Issue ${REFIT}` });
    await issue.getByRole("checkbox", { name: "Alder foam" }).check();
    await issue.getByRole("checkbox", { name: /^How to put it on/ }).check();
    expect(await issue.getByLabel("Issued").inputValue()).toBe(refit);
    await issue.getByRole("button", { name: "Issue this" }).click();
    await page.getByText(`${REFIT} is issued to ${WORKER}; ${stock - 1} left in stock.`).waitFor();
    await computed();

    const own = await visit(WORKER, 360);
    await own.page.locator("html[lang=es]").waitFor();
    await own.page.getByRole("button", { name: "Sí, lo tengo" }).click();
    await own.page.getByText("Gracias, queda anotado.").waitFor();
    await own.close();
  });

  test("a reading after it is under; the finding's page proves it, and it is closed", async () => {
    await enterReading(after, "98.2");
    const day = await figuresOf(after);
    expect(day?.verdictAtEar).toBe("under");

    await openFinding();
    const measures = page.getByRole("region", { name: "What would mend it for good" });
    await measures.getByRole("button", { name: "Enter a measure" }).click();
    const form = measures.getByRole("form", { name: "New measure" });
    await form.getByLabel("Kind of control").selectOption("protect");
    await form.getByLabel("What is done").fill(`${REFIT} instead of the lighter muff`);
    const done = form.getByLabel("Done on");
    await done.fill(refit);
    await done.blur();
    await form.getByRole("button", { name: "Save", exact: true }).click();
    await form.waitFor({ state: "detached" });
    const proof = page.getByRole("region", { name: "The proof, measured" });
    for (const date of [over, after])
      await proof
        .getByRole("link", { name: formatShortDate(date, "en") })
        .first()
        .waitFor();

    await page.getByRole("button", { name: "Close", exact: true }).click();
    const close = page.getByRole("form", { name: "Close" });
    await close.getByLabel("Why it is closed").fill("Refitted; measured under since.");
    await close.getByRole("button", { name: "Close", exact: true }).click();
    await page.getByText("Closed.", { exact: true }).waitFor();
    await officer.close();
  });

  test("the auditor takes the year, and the file alone proves every result", async () => {
    const auditor = await visit("E. Lindahl-Osei");
    await auditor.page.goto(`${app.url}/year-file?site=${siteId}&year=${over.slice(0, 4)}`);
    const take = auditor.page.getByRole("button", { name: "All records: ZIP that checks itself" });
    await take.waitFor();
    const [download] = await Promise.all([auditor.page.waitForEvent("download"), take.click()]);
    yearZip = join(folder, "year.zip");
    await download.saveAs(yearZip);
    await auditor.close();
    await app.stop();

    const [said, shown] = await Promise.all([verify(yearZip), checkOffline(yearZip)]);
    expect(said).toMatch(/\d results derived again, the same/);
    expect(said).toContain("Nothing speaks against this file.");
    expect(shown).toContain("Nothing speaks against this file.");
  });

  test("one digit changed in a table is found by both", async () => {
    const changed = join(folder, "changed.zip");
    writeFileSync(changed, await withOneDigitChanged(yearZip));
    const [said, shown] = await Promise.all([verify(changed), checkOffline(changed)]);
    expect(said).toMatch(/results\.csv, \d+ records: CHANGED: another hash than the manifest says/);
    expect(said).toContain("This file is not what its manifest says.");
    expect(shown).toContain("This file is not what its manifest says.");
    expect(shown).toContain("changed: another hash");
    // The result itself is named: its stated level is not what its inputs give.
    expect(said).toMatch(/DIFFERS: .* \(results\.csv\): /);
    expect(shown).toContain("Results that differ");
  });
});

/** What the command says of a file, where nothing tells it of a database. */
async function verify(file: string): Promise<string> {
  const env = { PATH: process.env.PATH, HOME: process.env.HOME };
  const run = promisify(execFile)("npm", ["run", "--silent", "verify:export", "--", file], {
    cwd: projectFolder,
    env,
    maxBuffer: 16_000_000,
  });
  const { stdout } = await run.catch((error: { stdout: string }) => error);
  return stdout;
}

const entriesOf = async (file: string) => readZip(new Blob([readFileSync(file)]));

/** What the file's own page says of it, opened from the disk of a machine without a network. */
async function checkOffline(file: string): Promise<string> {
  const checker = join(folder, "check.html");
  for (const entry of await entriesOf(yearZip))
    if (entry.path === "check.html")
      writeFileSync(checker, await new Response(entry.stream()).text());
  const visitor = await browser.openPage({ offline: true });
  await visitor.page.goto(pathToFileURL(checker).href);
  await visitor.page.getByLabel("The year’s file (ZIP)").setInputFiles(file);
  await visitor.page.getByRole("heading", { name: "Files" }).waitFor();
  const shown = (await visitor.page.textContent("main")) ?? "";
  await visitor.close();
  return shown;
}

/** The same file, but for one digit of the first level in its table of results. */
async function withOneDigitChanged(file: string): Promise<Buffer> {
  const out = new PassThrough();
  const whole = buffer(out);
  const zip = new ZipStream(out, new Date());
  for (const entry of await entriesOf(file)) {
    const text = await new Response(entry.stream()).text();
    const other =
      entry.path === "results.csv"
        ? text.replace(
            /,(\d\d\.\d+)/,
            (_, level: string) => `,${level[0] === "9" ? 8 : 9}${level.slice(1)}`,
          )
        : text;
    await zip.add(entry.path, [Buffer.from(other)]);
  }
  await zip.end();
  out.end();
  return whole;
}
