import { type Browser, type BrowserContextOptions, chromium, type Page } from "playwright-core";
import { findChromium } from "../../scripts/lib/chromium.mjs";

const flags = [
  "--headless",
  "--no-sandbox", // the tests run as root in a container
  "--disable-gpu",
  "--disable-quic",
  "--no-first-run",
  "--disable-background-networking",
  "--disable-component-update",
  "--disable-sync",
];

export interface QuietPage {
  page: Page;
  /** What went wrong in the page so far and was not allowed. */
  problems: string[];
  /** Problems that a test brings about on purpose, by their text, from now on. */
  allow(...patterns: RegExp[]): void;
  /** Closes the page's context; throws if anything went wrong in it. */
  close(): Promise<void>;
}

export interface TestBrowser {
  browser: Browser;
  /** A page with cookies of its own, as another person's browser would have. */
  openPage(options?: BrowserContextOptions): Promise<QuietPage>;
  close(): Promise<void>;
}

export async function startBrowser(): Promise<TestBrowser> {
  const executablePath = findChromium();
  if (!executablePath) throw new Error("Chromium is missing: npm test installs it");
  const browser = await chromium.launch({ executablePath, args: flags });

  async function openPage(options: BrowserContextOptions = {}): Promise<QuietPage> {
    const context = await browser.newContext({
      viewport: { width: 1280, height: 800 },
      ...options,
    });
    const page = await context.newPage();
    const problems: string[] = [];
    const allowed: RegExp[] = [];
    const report = (problem: string) => {
      if (!allowed.some((pattern) => pattern.test(problem))) problems.push(problem);
    };
    context.on("console", (message) => {
      if (message.type() === "error")
        report(`console: ${message.text()} (${message.location().url})`);
    });
    context.on("weberror", (error) =>
      report(`page: ${error.error().stack ?? error.error().message}`),
    );
    context.on("requestfailed", (request) => {
      const reason = request.failure()?.errorText ?? "";
      // The page itself drops requests when it moves on; nobody was waiting for them.
      if (reason !== "net::ERR_ABORTED") report(`request: ${request.url()} ${reason}`);
    });
    context.on("request", (request) => {
      const { protocol, hostname } = new URL(request.url());
      const isOurs =
        !/^(https?|wss?):$/.test(protocol) || ["127.0.0.1", "localhost"].includes(hostname);
      if (!isOurs) report(`request to another host: ${request.url()}`);
    });
    context.on("response", (response) => {
      if (response.status() >= 500) report(`answer ${response.status()}: ${response.url()}`);
    });
    return {
      page,
      problems,
      allow: (...patterns) => void allowed.push(...patterns),
      async close() {
        await context.close();
        if (problems.length > 0) throw new Error(`the page had problems:\n${problems.join("\n")}`);
      },
    };
  }

  return { browser, openPage, close: () => browser.close() };
}

/** Signs in through the provider's page, from wherever the application led to it. */
export async function signInAs(page: Page, url: string, name: string): Promise<void> {
  await page.goto(`${url}/api/auth/sign-in`);
  await page
    .getByRole("button", { name: new RegExp(`(Sign in as|Anmelden als) ${name}$`) })
    .click();
  await page.waitForURL((address) => address.origin === url);
}
