import type { Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { LOCALES, type Locale } from "../../shared/i18n/index";
import { type RunningApp, startApp } from "../setup/app";
import { signInAs, startBrowser, type TestBrowser } from "../setup/browser";
import { accessibilityFaults } from "../setup/screens";

let app: RunningApp;
let browser: TestBrowser;

beforeAll(async () => {
  [app, browser] = await Promise.all([
    startApp({ label: "every_screen", seed: "demo" }),
    startBrowser(),
  ]);
});
afterAll(async () => {
  await browser?.close();
  await app?.stop();
});

/** Those with few screens: the officer's and the auditor's would take as long as all other tests of the browser. */
const READERS = [
  { name: "B. Rowntree-Adair", role: "supervisor", from: "/crew-sheet" },
  { name: "D. Tavernor", role: "worker", from: "/me" },
  { name: "I. Vandermolen", role: "administrator", from: "/people" },
  { name: "O. Castellane-Wray", role: "representative", from: "/site-figures" },
  { name: "R. Quennell", role: "employer", from: "/shared-results" },
] as const;

/** A phone held upright, a desk, and what is left of a desk where everything is shown twice as large. */
const NARROW_PX = 320;
const WIDE_PX = 1280;
const ENLARGED_PX = WIDE_PX / 2;

/** Addresses that differ only in whose or of which day they are have the same screen. */
const screenOf = (address: string): string =>
  new URL(address).pathname
    .replace(/[0-9a-f]{8}-[0-9a-f-]{27}/g, ":id")
    .replace(/\d{4}-\d{2}-\d{2}/g, ":date");

const isPage = (address: string) => {
  const { origin, pathname } = new URL(address);
  return origin === app.url && !pathname.startsWith("/api/") && !/\.\w+$/.test(pathname);
};

async function settle(page: Page): Promise<void> {
  await page.locator("h1").first().waitFor();
  await page.waitForFunction(() => !document.querySelector("[aria-busy=true], .loading-line"));
}

/** One address of each screen that links lead to, from where somebody starts. */
async function screensFrom(page: Page, start: string): Promise<Map<string, string>> {
  const found = new Map([[screenOf(start), start]]);
  for (const address of found.values()) {
    await page.goto(address);
    await settle(page);
    const links = await page
      .locator("a[href]:not([download])")
      .evaluateAll((all) => all.map((link) => (link as HTMLAnchorElement).href));
    for (const link of links) {
      if (isPage(link) && !found.has(screenOf(link))) found.set(screenOf(link), link);
    }
  }
  return found;
}

/** What makes the page wider than its window, innermost first. */
const whatSticksOut = (page: Page): Promise<string[]> =>
  page.evaluate(() => {
    if (document.documentElement.scrollWidth <= window.innerWidth) return [];
    const scrolls = (element: Element | null): boolean =>
      element !== null &&
      element !== document.body &&
      (/auto|scroll|hidden|clip/.test(getComputedStyle(element).overflowX) ||
        scrolls(element.parentElement));
    const out = [...document.body.querySelectorAll("*")].filter(
      (element) =>
        element.getBoundingClientRect().right > window.innerWidth + 0.5 &&
        !scrolls(element.parentElement),
    );
    return out
      .slice(-2)
      .map(
        (element) => `${element.outerHTML.slice(0, 120)} … ${element.textContent?.slice(0, 60)}`,
      );
  });

/** The page in a language, whatever its reader's is. */
async function speak(page: Page, language: Locale): Promise<void> {
  await page.unroute("**/api/session");
  await page.route("**/api/session", async (route) => {
    const reply = await route.fetch();
    const session = await reply.json();
    if (session.user) session.user.language = language;
    await route.fulfill({ response: reply, json: session });
  });
}

describe.each(READERS)("the screens of the $role", ({ name, from }) => {
  let screens: Map<string, string>;

  test("pass the accessibility rules in light and in dark", async () => {
    const { page, close } = await browser.openPage({ viewport: { width: WIDE_PX, height: 900 } });
    await signInAs(page, app.url, name);
    screens = await screensFrom(page, `${app.url}${from}`);
    const faults: string[] = [];
    for (const [screen, address] of screens) {
      await page.goto(address);
      await settle(page);
      for (const colorScheme of ["light", "dark"] as const) {
        await page.emulateMedia({ colorScheme });
        faults.push(
          ...(await accessibilityFaults(page)).map((it) => `${screen} ${colorScheme}: ${it}`),
        );
      }
    }
    expect(faults).toEqual([]);
    await close();
  }, 300_000);

  test("fit a narrow phone in every language, and a desk at 200 %", async () => {
    const { page, close } = await browser.openPage();
    await signInAs(page, app.url, name);
    const faults: string[] = [];
    for (const language of LOCALES) {
      await speak(page, language);
      for (const [screen, address] of screens) {
        await page.setViewportSize({ width: NARROW_PX, height: 720 });
        await page.goto(address);
        await settle(page);
        expect(await page.locator("html").getAttribute("lang")).toBe(language);
        faults.push(...(await whatSticksOut(page)).map((it) => `${screen} ${language}: ${it}`));
        if (language !== "en") continue;
        await page.setViewportSize({ width: ENLARGED_PX, height: 450 });
        faults.push(...(await whatSticksOut(page)).map((it) => `${screen} at 200 %: ${it}`));
      }
    }
    expect(faults).toEqual([]);
    await close();
  }, 300_000);
});
