import { parse } from "csv-parse/sync";
import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { type RunningApp, startApp } from "../setup/app";
import { signInAs, startBrowser, type TestBrowser } from "../setup/browser";
import { accessibilityFaults } from "../setup/screens";

let app: RunningApp;
let browser: TestBrowser;

beforeAll(async () => {
  [app, browser] = await Promise.all([
    startApp({ label: "main_job", seed: "demo" }),
    startBrowser(),
  ]);
});
afterAll(async () => {
  await browser?.close();
  await app?.stop();
});

const somebody = (role: string, email?: string) => {
  const found = app
    .people()
    .find(
      (person) =>
        person.emailVerified &&
        person.roles.length === 1 &&
        person.roles[0] === role &&
        (!email || person.email.includes(email)),
    );
  if (!found) throw new Error(`the demo has no ${role}`);
  return found;
};

const ask = <Reply>(page: Page, path: string) =>
  page.evaluate(async (to) => (await fetch(`/api${to}`)).json(), path) as Promise<Reply>;

async function visit(name: string, width = 1280) {
  const quiet = await browser.openPage({ viewport: { width, height: 900 } });
  await signInAs(quiet.page, app.url, name);
  return quiet;
}

const expectAccessible = async (page: Page): Promise<void> =>
  expect(await accessibilityFaults(page)).toEqual([]);

async function expectNoSidewaysScroll(page: Page): Promise<void> {
  expect(
    await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth),
  ).toBeLessThanOrEqual(0);
}

/** A change by the page's own session. */
const change = (page: Page, method: string, path: string, body: object, revision: number) =>
  page.evaluate(
    async ([verb, to, text, seen]) => {
      const token = document.cookie.match(/dinward\.csrf=([^;]+)/)?.[1] ?? "";
      const headers = {
        "content-type": "application/json",
        "x-csrf-token": token,
        "if-match": seen,
      };
      return (await fetch(`/api${to}`, { method: verb, headers, body: text })).status;
    },
    [method, path, JSON.stringify(body), String(revision)] as const,
  );

interface GridRow {
  worker: { id: string; name: string };
  assignments: unknown[];
  isAbsent: boolean;
}

interface Waiting {
  crews: {
    id: string;
    name: string;
    date: string;
    saved: number;
    members: number;
    absent: number;
  }[];
}

describe("the main job, through the real sign-in of each role", () => {
  let workerName = "";
  let supervisorName = "";

  test("safety officer: what waits, a crew's day, who will be told, the mail", async () => {
    const officer = somebody("officer", "ostmere");
    const { page, close } = await visit(officer.name, 1600);
    await page.getByRole("heading", { level: 1, name: "Waiting for you" }).waitFor();
    await expectAccessible(page);
    const waiting = await ask<Waiting>(page, "/waiting");
    const crew = waiting.crews.find(
      ({ saved, absent, members }) => saved === 0 && absent === 0 && members > 2,
    );
    expect(crew, "a crew whose day is not entered").toBeDefined();

    // Somebody of that crew handed the protector back yesterday: a finding of today's entry.
    const opened = await ask<{ rows: GridRow[] }>(
      page,
      `/crews/${crew?.id}/day?date=${crew?.date}`,
    );
    const bare = opened.rows.find(
      ({ assignments, isAbsent }) => assignments.length > 0 && !isAbsent,
    );
    workerName = bare?.worker.name ?? "";
    const { rows: assigned } = await ask<{
      rows: { id: string; revision: number; toDate: string | null }[];
    }>(page, `/workers/${bare?.worker.id}/assignments`);
    const yesterday = new Date(Date.parse(`${crew?.date}T00:00:00Z`) - 86_400_000)
      .toISOString()
      .slice(0, 10);
    for (const { id, revision, toDate } of assigned) {
      if (toDate !== null && toDate <= yesterday) continue;
      expect(
        await change(page, "PATCH", `/assignments/${id}`, { toDate: yesterday }, revision),
      ).toBe(200);
    }
    supervisorName =
      (await ask<{ rows: { id: string; supervisorNames: string[] }[] }>(page, "/crews")).rows.find(
        ({ id }) => id === crew?.id,
      )?.supervisorNames[0] ?? "";

    await page.goto(`${app.url}/days/${crew?.id}/${crew?.date}`);
    const grid = page.getByRole("grid");
    await grid.waitFor();
    await expectAccessible(page);
    await page.getByRole("button", { name: /as filled in$/ }).click();
    const look = page.getByRole("dialog");
    await look.getByRole("button", { name: "They worked as filled in" }).click();
    await look.waitFor({ state: "hidden" });
    await page.getByRole("button", { name: "Save", exact: true }).click();
    const saved = page.getByText(new RegExp(`^${crew?.members} saved`)).first();
    // Where the crew is still at work at this hour, the page asks whether it will end so.
    const willEndSo = page.getByRole("button", { name: "It will end so: save" });
    await saved.or(willEndSo).first().waitFor();
    if (await willEndSo.isVisible()) await willEndSo.click();
    await saved.waitFor();
    await page.getByText(/will be told at/).waitFor();
    await page.getByRole("button", { name: "Send now" }).click();
    await page.getByText(/(were|was) told/).waitFor();
    await page.reload();
    await grid.waitFor();
    const after = await ask<Waiting>(page, "/waiting");
    expect(after.crews.find(({ id }) => id === crew?.id)?.saved).toBe(crew?.members);

    let told = "";
    for (let tries = 0; tries < 150 && told === ""; tries += 1) {
      const mails = await app.mailbox.mails();
      told =
        mails.find(({ text }) => text.includes(workerName) && text.includes("No protector"))
          ?.text ?? "";
      if (told === "") await new Promise((resolve) => setTimeout(resolve, 200));
    }
    expect(told).toContain("Open in Dinward");
    await close();
  });

  test("a day opens to its working, and it prints", async () => {
    const { page, close } = await visit(somebody("officer", "ostmere").name);
    const { findings } = await ask<{
      findings: { worker: { id: string } | null; figures: { date: string } | null }[];
    }>(page, "/waiting");
    const found = findings.find(({ worker, figures }) => worker && figures);
    await page.goto(`${app.url}/workers/${found?.worker?.id}/days/${found?.figures?.date}`);
    await page.getByRole("heading", { name: "Noise without protection, over the day" }).waitFor();
    await expectAccessible(page);
    await page.emulateMedia({ media: "print" });
    expect(await page.getByRole("navigation", { name: "Pages" }).isVisible()).toBe(false);
    await close();
  });

  test("supervisor, on a phone: one order, marked done", async () => {
    const { page, close } = await visit(supervisorName, 360);
    await page
      .getByRole("button", { name: /^Mark done/ })
      .first()
      .waitFor();
    await expectNoSidewaysScroll(page);
    await expectAccessible(page);
    await page.getByRole("button", { name: `Mark done: ${workerName}` }).click();
    await page.getByText("The officer checks it.").waitFor();
    // Another crew's page is not there for this supervisor.
    const { rows } = await ask<{ rows: { supervisorNames: string[] }[] }>(page, "/crews");
    expect(rows.length).toBeGreaterThan(0);
    expect(rows.every(({ supervisorNames }) => supervisorNames.includes(supervisorName))).toBe(
      true,
    );
    await close();
  });

  test("worker, on a phone: what to do, own history, a problem reported", async () => {
    const { page, close, allow } = await visit(somebody("worker", "d.tavernor").name, 320);
    allow(/403/);
    await page.getByRole("heading", { name: "My last shift" }).waitFor();
    await expectNoSidewaysScroll(page);
    await expectAccessible(page);
    await page.getByRole("button", { name: "Report a problem" }).click();
    await page.getByLabel("What is the problem?").fill("The cushion has a tear.");
    await page.getByRole("button", { name: "Send to the safety officer" }).click();
    await page.getByText("Thank you. Your safety officer has it.").waitFor();
    const { rows } = await ask<{ rows: { worker: { name: string } | null }[] }>(page, "/findings");
    expect(new Set(rows.map(({ worker }) => worker?.name))).toEqual(
      new Set([somebody("worker", "d.tavernor").name]),
    );
    const answer = await page.evaluate(async () => (await fetch("/api/crews")).status);
    expect(answer).toBe(403);
    await close();
  });

  test("the officer meets both: done to be checked, and the problem", async () => {
    const { page, close } = await visit(somebody("officer", "ostmere").name);
    await page.getByText("Done, to be checked").first().waitFor();
    const { rows } = await ask<{ rows: { id: string; worker: { name: string } | null }[] }>(
      page,
      "/findings?state=done",
    );
    const done = rows.find(({ worker }) => worker?.name === workerName);
    expect(done).toBeDefined();
    const problems = await ask<{ rows: { facts: { text: string } }[] }>(
      page,
      "/findings?kind=problem-reported",
    );
    expect(problems.rows.map(({ facts }) => facts.text)).toContain("The cushion has a tear.");
    await close();
  });

  test("auditor: what is missing, then the year's file, complete to its last record", async () => {
    const { page, close, allow } = await visit(somebody("auditor").name);
    allow(/403/);
    await page.getByRole("heading", { level: 1, name: "Year file" }).waitFor();
    await page.getByText("In noise but not measured").waitFor();
    await expectAccessible(page);
    const { rows } = await ask<{ rows: { id: string; name: string }[] }>(page, "/sites");
    const year = new Date().getFullYear();
    const csv = await page.evaluate(
      async ([siteId, ofYear]) =>
        (await fetch(`/api/exports/year.csv?siteId=${siteId}&year=${ofYear}`)).text(),
      [rows[0]?.id, year] as const,
    );
    const records = parse(csv, { relax_column_count: true }) as string[][];
    const [head = [], ...days] = records;
    const last = days.pop();
    expect(head).toContain("result_id");
    expect(last?.[0]).toBe("rows");
    expect(Number(last?.[1])).toBe(days.length);
    const change = await page.evaluate(
      async () =>
        (
          await fetch("/api/areas", {
            method: "POST",
            headers: { "x-csrf-token": document.cookie.match(/dinward\.csrf=([^;]+)/)?.[1] ?? "" },
          })
        ).status,
    );
    expect(change).toBe(403);
    await close();
  });

  test("administrator: a new person, who can sign in from then on; exposures stay closed", async () => {
    const { page, close, allow } = await visit(somebody("administrator").name);
    allow(/403/);
    await page
      .getByRole("link", { name: "New person" })
      .or(page.getByRole("button", { name: "New person" }))
      .first()
      .click();
    const newcomer = {
      sub: "newcomer",
      email: "newcomer@ostmere.example",
      emailVerified: true,
      name: "N. Newcomer",
      roles: ["auditor"],
      language: "en" as const,
    };
    app.knowPeople([newcomer]);
    await page.getByLabel("Name", { exact: true }).fill(newcomer.name);
    await page.getByLabel("E-mail").fill(newcomer.email);
    await page.getByLabel("Role 1", { exact: true }).selectOption("auditor");
    await expectAccessible(page);
    await page.getByRole("button", { name: "Save", exact: true }).click();
    await page.getByRole("row", { name: newcomer.name }).waitFor();
    const closed = await page.evaluate(async () => (await fetch("/api/findings")).status);
    expect(closed).toBe(403);
    await close();
    const theirs = await visit(newcomer.name);
    await theirs.page.getByRole("heading", { level: 1, name: "Year file" }).waitFor();
    await theirs.close();
  });

  test("somebody without a grant reads that and whom to ask; German before sign-in", async () => {
    const nobody = app.people().find(({ roles }) => roles.length === 0);
    const quiet = await browser.openPage();
    await quiet.page.goto(app.url);
    await quiet.page.getByRole("button", { name: "Deutsch" }).click();
    await quiet.page.getByRole("heading", { level: 1, name: "Anmelden" }).waitFor();
    await expectAccessible(quiet.page);
    await signInAs(quiet.page, app.url, nobody?.name ?? "");
    await quiet.page.waitForURL(/no-access/);
    await expectAccessible(quiet.page);
    await quiet.close();
  });
});
