import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { type BrowserContext, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, expect, test } from "vitest";
import { findChromium } from "../../scripts/lib/chromium.mjs";
import { type RunningApp, startApp } from "../setup/app";
import { signInAs, startBrowser, type TestBrowser } from "../setup/browser";

let app: RunningApp;
let browser: TestBrowser;
let phone: BrowserContext | null = null;
const profile = mkdtempSync(join(tmpdir(), "dinward-phone-"));

beforeAll(async () => {
  [app, browser] = await Promise.all([
    startApp({ label: "offline", seed: "demo" }),
    startBrowser(),
  ]);
});
afterAll(async () => {
  await phone?.close();
  await browser?.close();
  await app?.stop();
  rmSync(profile, { recursive: true, force: true });
});

/** The same phone each time: what it keeps outlives its browser. */
async function openPhone({ isOffline }: { isOffline: boolean }): Promise<Page> {
  phone = await chromium.launchPersistentContext(profile, {
    executablePath: findChromium() ?? undefined,
    args: ["--headless", "--no-sandbox", "--disable-gpu", "--no-first-run"],
    viewport: { width: 390, height: 844 },
    locale: "en-GB",
    offline: isOffline,
  });
  return phone.pages()[0] ?? (await phone.newPage());
}

const ask = <Reply>(page: Page, path: string) =>
  page.evaluate(async (to) => (await fetch(`/api${to}`)).json(), path) as Promise<Reply>;

interface Sheet {
  expected: {
    rows: {
      worker: { name: string };
      order: { findingId: string; revision: number; canMarkDone: boolean } | null;
    }[];
  };
}
interface Finding {
  state: string;
  revision: number;
  steps: { text: string | null }[];
}

/** What another does meanwhile, at a desk with a connection. */
async function takeInHand(findingId: string): Promise<Page> {
  const { page } = await browser.openPage();
  await signInAs(page, app.url, "S. Ferrand");
  const { revision } = await ask<Finding>(page, `/findings/${findingId}`);
  const status = await page.evaluate(
    async ([id, seen]) => {
      const response = await fetch(`/api/findings/${id}/steps`, {
        method: "POST",
        headers: {
          "content-type": "application/json",
          "x-csrf-token": document.cookie.match(/dinward\.csrf=([^;]+)/)?.[1] ?? "",
          "if-match": seen,
          "idempotency-key": crypto.randomUUID(),
        },
        body: JSON.stringify({ kind: "comment", text: "New cushions are on their way." }),
      });
      return response.status;
    },
    [findingId, String(revision)] as const,
  );
  expect(status).toBe(201);
  return page;
}

test("an order marked done without a connection outlives the browser, meets another's change, and is sent once", async () => {
  let page = await openPhone({ isOffline: false });
  await signInAs(page, app.url, "B. Rowntree-Adair");
  await page
    .getByRole("button", { name: /^Mark done:/ })
    .first()
    .waitFor();
  const sheetPath = new URL(page.url()).pathname;
  const { rows } = await ask<{ rows: { id: string; supervisorNames: string[] }[] }>(page, "/crews");
  const crewId = rows.find(({ supervisorNames }) =>
    supervisorNames.includes("B. Rowntree-Adair"),
  )?.id;
  const sheet = await ask<Sheet>(page, `/crews/${crewId}/sheet`);
  const row = sheet.expected.rows.find(({ order }) => order?.canMarkDone);
  const order = row?.order;
  if (!row || !order) throw new Error("the demo's crew has no open order");
  await page.waitForFunction(() => navigator.serviceWorker.controller !== null);

  await phone?.setOffline(true);
  await page
    .getByRole("button", { name: `Mark done: ${row.worker.name}` })
    .first()
    .click();
  await page.getByText("Done, not sent yet").first().waitFor();
  await page.getByText("1 thing not sent yet").waitFor();
  // What nobody has received is simply taken back.
  await page
    .getByRole("button", { name: `Undo: ${row.worker.name}` })
    .first()
    .click();
  await page.getByText("not sent yet").first().waitFor({ state: "detached" });
  await page
    .getByRole("button", { name: `Mark done: ${row.worker.name}` })
    .first()
    .click();
  await page.getByText("1 thing not sent yet").waitFor();

  // The browser is ended and started again, still without a connection.
  await phone?.close();
  page = await openPhone({ isOffline: true });
  await page.goto(app.url + sheetPath);
  await page.getByText(/^As of \d\d:\d\d, no connection\.$/).waitFor();
  await page.getByText("Done, not sent yet").first().waitFor();
  await page.getByText("1 thing not sent yet").waitFor();

  const desk = await takeInHand(order.findingId);
  await phone?.setOffline(false);
  // The same words may stand folded away in the order's own talk: here it is the list of what is unsent that says them.
  const conflict = page.getByRole("listitem").filter({ hasText: /S\. Ferrand.* was quicker/ });
  await conflict.getByText("New cushions are on their way.").waitFor();
  expect((await ask<Finding>(desk, `/findings/${order.findingId}`)).state).not.toBe("done");

  // Signing out now would lose it: that is said first.
  await page.getByRole("button", { name: "Sign out", exact: true }).click();
  const warning = page.getByRole("dialog", { name: "Something of yours is not sent yet" });
  await warning.waitFor();
  await warning.getByRole("button", { name: "Stay signed in" }).click();

  await page.getByRole("button", { name: "Do it again on what stands" }).click();
  await page.getByText(/^Sent\. Mark done:/).waitFor();
  const finding = await ask<Finding>(desk, `/findings/${order.findingId}`);
  expect(finding.state).toBe("done");
  expect(finding.revision).toBe(order.revision + 2);

  // At sign-out nothing of this person stays on the phone.
  await page.getByRole("button", { name: "Sign out", exact: true }).click();
  await page.waitForURL(/signed-out|sign-in|session\/end|logout/);
  await page.goto(`${app.url}/sign-in`);
  expect(
    await page.evaluate(() =>
      Object.keys(localStorage).filter((key) => /^dinward\.(here|acts|seen|wearing)/.test(key)),
    ),
  ).toEqual([]);
});
