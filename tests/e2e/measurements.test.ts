import type { Page } from "playwright-core";
import { afterAll, beforeAll, expect, test } from "vitest";
import { addDays, localDate } from "../../shared/time/zone";
import { type RunningApp, startApp } from "../setup/app";
import { type QuietPage, signInAs, startBrowser, type TestBrowser } from "../setup/browser";

let app: RunningApp;
let browser: TestBrowser;
let visit: QuietPage;
let page: Page;

const GROUP = "Casting washer";
const TASK = "Casting wash";
const SURVEY = "Casting wash, measured again";
/** Whose day the level decides: washes castings for most of the shift. */
const WORKER = "J. Penhallow";
const METER = "OM 2203";
const OTHER_METER = "OD 40121";
/** It has not been anywhere yet, and no file of its has come in. */
const DOSIMETER = "OD 40125";
const today = localDate(new Date(), "Europe/London");
const yesterday = addDays(today, -1);

beforeAll(async () => {
  [app, browser] = await Promise.all([
    startApp({ label: "measurements", seed: "demo" }),
    startBrowser(),
  ]);
  visit = await browser.openPage({ viewport: { width: 1280, height: 900 } });
  page = visit.page;
  await signInAs(page, app.url, "S. Ferrand");
});
afterAll(async () => {
  await browser?.close();
  await app?.stop();
});

const open = async (path: string, heading: string | RegExp) => {
  await page.goto(`${app.url}${path}`);
  await page.getByRole("heading", { level: 1, name: heading }).waitFor();
};
const ask = <Reply>(path: string) =>
  page.evaluate(async (to) => (await fetch(`/api${to}`)).json(), path) as Promise<Reply>;

/** The clock of the file at a second of it. */
const FILE_FROM_S = 6.5 * 3600;
const FILE_FOR_S = 2 * 3600;
const clockAt = (seconds: number) =>
  [3600, 60, 1]
    .map((unit, index) => Math.floor(seconds / unit) % (index === 0 ? 24 : 60))
    .map((part) => String(part).padStart(2, "0"))
    .join(":");

/** Semicolons, decimal commas and the day first: an hour of washing at 90.0 dB, and a microphone that was knocked. */
function levelsFile(): string {
  const [year, month, day] = yesterday.split("-");
  const comma = (levelDb: number) => levelDb.toFixed(1).replace(".", ",");
  const lines = Array.from({ length: FILE_FOR_S }, (_, second) => {
    const minute = second / 60;
    const levelDb = minute >= 90 && minute < 95 ? 118 : minute >= 10 && minute < 70 ? 90 : 74;
    // Dotted, a date is the day first whatever day it is: no test may hang on the calendar.
    return `${day}.${month}.${year};${clockAt(FILE_FROM_S + second)};${comma(levelDb)};${comma(levelDb + 16)}`;
  });
  return `${["Datum;Tijd;Niveau;Piek", ...lines].join("\r\n")}\r\n`;
}

let surveyPath = "";

test("a survey is planned from what wants measuring: draw, samples, instruments", async () => {
  await open("/measuring", "To be measured");
  await page.getByRole("link", { name: `Plan a survey of ${GROUP}` }).click();
  await page.getByRole("heading", { level: 1, name: "New survey" }).waitFor();
  const form = page.getByRole("form", { name: "New survey" });
  await form.getByLabel("Name", { exact: true }).fill(SURVEY);
  await form.getByRole("radio", { name: /Task by task/ }).check();
  for (const other of ["Inspection", "Break"])
    await form.getByRole("button", { name: `Leave ${other} out` }).click();
  const from = form.getByLabel("From", { exact: true });
  await from.fill(yesterday);
  await from.blur();
  // Both of the group are drawn; nobody is left for a reserve.
  await form.getByText(WORKER).first().waitFor();
  for (const serial of [METER, DOSIMETER])
    await form.getByRole("checkbox", { name: new RegExp(serial) }).check();
  await form.getByLabel("Who observes").fill("P. Lanyon-Orr, supervisor");
  await form.getByRole("button", { name: "Save", exact: true }).click();
  await page.getByRole("heading", { level: 1, name: SURVEY }).waitFor();
  surveyPath = new URL(page.url()).pathname;
  await page.getByText(/Planned\. Task by task/).waitFor();
  await page.getByRole("button", { name: "Begin measuring" }).click();
  await page.getByRole("button", { name: "Measuring is done" }).waitFor();
});

test("an instrument goes out with a serial number and comes back with its field checks", async () => {
  await open("/measuring/out-and-back", "Out and back");
  const day = page.getByLabel("Day", { exact: true });
  await day.fill(yesterday);
  await day.blur();
  await page.waitForURL(new RegExp(yesterday));
  const scan = page.getByLabel("Serial number, typed or scanned");
  await scan.fill(DOSIMETER);
  await scan.press("Enter");
  const row = page.getByRole("form", { name: new RegExp(DOSIMETER) });
  await row.getByText(`for ${SURVEY}`).waitFor();
  await row.getByRole("combobox", { name: "Worker or place" }).fill("Penhallow");
  await page.getByRole("option", { name: new RegExp(WORKER) }).click();
  await row.getByLabel("Check before").fill("114");
  await row.getByLabel("Out", { exact: true }).fill("06:00");
  // A sheet of the day before is written up in one go.
  await row.getByLabel("Back", { exact: true }).fill("10:00");
  await row.getByLabel("Check after").fill("113.9");
  await row.getByText("More about this run").click();
  await row.getByLabel("It covers").selectOption({ label: "a part; only evidence" });
  await row.getByRole("button", { name: "Record the run" }).click();
  await page.getByText(`The run of ${DOSIMETER} is recorded.`).waitFor();
  await row.getByText("10:00").waitFor();
});

test("two samples are taken by hand, at the width of a phone", async () => {
  await page.setViewportSize({ width: 320, height: 720 });
  for (const [serial, levelDb] of [
    [METER, "89.6"],
    [OTHER_METER, "90.2"],
  ] as const) {
    await page.goto(`${app.url}${surveyPath}`);
    await page.getByRole("link", { name: `Take a sample of ${TASK}` }).click();
    await page.getByRole("heading", { level: 1, name: "Sample by hand" }).waitFor();
    const form = page.getByRole("form", { name: "Sample by hand" });
    const instrument = form.getByLabel("Instrument", { exact: true });
    const choice = instrument.locator("option", { hasText: serial });
    await instrument.selectOption((await choice.getAttribute("value")) ?? "");
    await form.getByLabel("Level, LAeq").fill(levelDb);
    await form.getByLabel("or minutes").fill("6");
    await form.getByRole("textbox", { name: /^Place/ }).fill("Wash line, at the ear");
    await form.getByLabel("Field check before").fill("94.0");
    await form.getByLabel("Field check after").fill("94.1");
    expect(
      await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth),
    ).toBeLessThanOrEqual(0);
    await form.getByRole("button", { name: "Save the sample" }).click();
    await page.getByRole("heading", { level: 1, name: "Saved" }).waitFor();
  }
  await page.setViewportSize({ width: 1280, height: 900 });
});

test("a time history comes in through a mapping that is made for it", async () => {
  const { rows } = await ask<{ rows: { id: string; serialNumber: string }[] }>(
    `/runs?surveyId=${surveyPath.split("/").at(-1)}&limit=50`,
  );
  const run = rows.find(({ serialNumber }) => serialNumber === DOSIMETER);
  expect(run).toBeDefined();
  const { rows: instruments } = await ask<{ rows: { id: string; serialNumber: string }[] }>(
    "/instruments",
  );
  const instrument = instruments.find(({ serialNumber }) => serialNumber === DOSIMETER);
  await open(
    `/measuring/histories/import?run=${run?.id}&instrument=${instrument?.id}`,
    "Import a time history",
  );
  await page.locator("input[type=file]").setInputFiles({
    name: "niveaus.csv",
    mimeType: "text/csv",
    buffer: Buffer.from(levelsFile()),
  });
  await page.getByRole("button", { name: "Send the file in" }).click();
  await page.getByRole("heading", { level: 1, name: "niveaus.csv" }).waitFor();
  for (const [column, role] of [
    ["Datum", "Date"],
    ["Tijd", "Time of day"],
    ["Niveau", "LAeq, mean of the interval"],
    ["Piek", "LCpeak"],
  ] as const)
    await page.getByLabel(`What ${column} is`).selectOption({ label: role });
  await page.getByRole("radio", { name: "Comma, 84,3" }).check();
  await page.getByRole("radio", { name: "day, month, year" }).check();
  await page.getByRole("button", { name: "Read the whole file" }).click();
  await page.getByText("Nothing stands in the way").waitFor({ timeout: 60_000 });
  await page.getByRole("radio", { name: "a part; only evidence" }).check();
  await page.getByRole("button", { name: "Store all of it" }).click();
  await page.getByRole("link", { name: "Open the history" }).click({ timeout: 60_000 });
  await page.getByRole("heading", { level: 1, name: new RegExp(WORKER) }).waitFor();
});

test("a task is drawn under it, and a knocked microphone is left out for a reason", async () => {
  const form = page.getByRole("form", { name: "Bracket under the time history" });
  const between = async (from: string, to: string) => {
    await form.getByLabel("From", { exact: true }).fill(from);
    await form.getByLabel("To", { exact: true }).fill(to);
    await form.getByRole("button", { name: "Draw it" }).click();
  };
  await page.getByRole("button", { name: "Add a task" }).click();
  await form.getByLabel("Task", { exact: true }).selectOption({ label: TASK });
  await between("06:40", "07:40");
  await page.getByRole("button", { name: "Leave out a stretch" }).click();
  await form.getByLabel("Left out, because", { exact: true }).fill("Microphone knocked");
  await between("08:00", "08:05");
  await page.getByRole("button", { name: "Save the brackets" }).click();
  const results = page.getByRole("table", { name: "Results with and without what is left out" });
  const laeq = results.getByRole("row", { name: /LAeq/ });
  // 60 of 115 minutes at 90 dB and 55 at 74; with 5 at 118 dB beside them: sums by hand of the file's levels.
  await laeq.getByText("87.3").waitFor();
  await laeq.getByText("104.3").waitFor();
});

test("survey and group show what it comes to, and how sure it is", async () => {
  await page.goto(`${app.url}${surveyPath}`);
  const result = page
    .getByRole("table", { name: "Results, target by target" })
    .getByRole("row", { name: new RegExp(TASK) });
  await result.getByText("3 / 3").waitFor();
  await result.getByText("89.9").waitFor();
  await page.getByText("bracket of a time history").waitFor();
  await page.getByRole("link", { name: GROUP }).click();
  await page.getByRole("heading", { level: 1, name: GROUP }).waitFor();
  const budget = page.getByRole("region", { name: new RegExp(`How sure it is.*${SURVEY}`) });
  await budget
    .getByText(/± ?\d\.\d dB/)
    .first()
    .waitFor();
  await budget.getByText(/What would narrow it most/).waitFor();
});

test("adopted after the preview, it decides the day's verdict, and the working names it", async () => {
  const { rows: workers } = await ask<{ rows: { id: string; name: string }[] }>(
    "/workers?search=Penhallow&limit=10",
  );
  const worker = workers.find(({ name }) => name === WORKER);
  await page.goto(`${app.url}${surveyPath}`);
  await page.getByRole("button", { name: "Adopt the results" }).first().click();
  const form = page.getByRole("form", { name: "Adopt the results" });
  const from = form.getByLabel("Holds from");
  await from.fill(yesterday);
  await from.blur();
  await form.getByLabel("Reason").fill("Two years since it was measured");
  await form.getByRole("button", { name: "See who changes verdict" }).click();
  await page
    .getByRole("heading", { name: /change(s)? verdict$/ })
    .first()
    .waitFor();
  await page.getByRole("button", { name: "Save and compute anew" }).click();
  await page.getByRole("heading", { name: "Levels that rest on it" }).waitFor();
  await expect
    .poll(async () => (await ask<{ daysLeft: number }>("/recompute-progress")).daysLeft, {
      timeout: 90_000,
    })
    .toBe(0);
  await page.goto(`${app.url}/workers/${worker?.id}/days/${yesterday}`);
  await page.getByText("Over", { exact: true }).first().waitFor();
  // The samples stand in the working, and its source leads to the survey that took them.
  await page.getByText("89.6 90.2 90.0").waitFor();
  await page.getByRole("link", { name: `${TASK}, ${yesterday}` }).click();
  await page.getByRole("heading", { level: 1, name: TASK }).waitFor();
  await page.getByRole("link", { name: SURVEY }).first().click();
  await page.getByRole("heading", { level: 1, name: SURVEY }).waitFor();
  await visit.close();
});
