import type { Page } from "playwright-core";
import { startBrowser } from "../tests/setup/browser";
import { spreadOf, title } from "./lib/measure";
import { baseUrl, openDatabase, organizations, signIn } from "./lib/scale";

/** How much slower than this machine's processor a phone in the shop is taken to be. */
const SLOWER = 4;
const TIMES = 7;
const PAGE = baseUrl.replace("/api", "/me");
const BARE = baseUrl.replace("/api", "/bench-bare");

/** Runs in the page: notes when what matches has been painted, ms from the navigation on. Text, as the loader's helpers are not there. */
const noteContent = (selector: string) => `
new MutationObserver((_, observer) => {
  if (!document.querySelector(${JSON.stringify(selector)})?.textContent.trim()) return;
  observer.disconnect();
  requestAnimationFrame(() => setTimeout(() => { window.contentAt = performance.now(); }));
}).observe(document, { subtree: true, childList: true, characterData: true });`;

/** What any page has to do that gets the same bytes: fetch them, all at once, and write a sentence. */
const bare = (addresses: readonly string[]) => `<!doctype html><title>bare</title><h1></h1><script>
Promise.all(${JSON.stringify(addresses)}.map((address) => fetch(address).then((answer) => answer.arrayBuffer()))).then(() => {
  document.querySelector("h1").textContent = "here";
});
</script>`;

const db = await openDatabase();
const { id: organizationId } = (await organizations(db))[0]!;
const { cookie } = await signIn(db, organizationId, "worker");
await db.end();
const cookies = cookie!.split("; ").map((pair) => {
  const [name, value] = [pair.slice(0, pair.indexOf("=")), pair.slice(pair.indexOf("=") + 1)];
  return { name, value, url: baseUrl };
});

const browser = await startBrowser();

/** A first visit, with nothing kept from before: ms until the content is painted. */
async function visit(
  address: string,
  selector: string,
  prepare: (page: Page) => Promise<unknown> = async () => undefined,
): Promise<number> {
  const { page, close } = await browser.openPage({ viewport: { width: 390, height: 844 } });
  await page.context().addCookies(cookies);
  const processor = await page.context().newCDPSession(page);
  await processor.send("Emulation.setCPUThrottlingRate", { rate: SLOWER });
  await page.addInitScript({ content: noteContent(selector) });
  await prepare(page);
  await page.goto(address, { waitUntil: "commit" });
  const found = await page.waitForFunction(
    () => (window as unknown as { contentAt?: number }).contentAt,
  );
  const at = Number(await found.jsonValue());
  await page.close();
  await close();
  return at;
}

const CONTENT = ".me h1:not(:has(.loading-line))";
/** What the page asks for until its content is there. */
const asked = new Set<string>();
await visit(PAGE, CONTENT, async (page) => {
  page.on("response", (response) => {
    if (response.ok() && response.request().method() === "GET" && response.url() !== PAGE)
      asked.add(response.url());
  });
});
const taken: [number[], number[]] = [[], []];
for (let time = 0; time < TIMES; time += 1) {
  taken[0].push(await visit(PAGE, CONTENT));
  taken[1].push(
    await visit(BARE, "h1", (page) =>
      page.route(BARE, (route) =>
        route.fulfill({ contentType: "text/html", body: bare([...asked]) }),
      ),
    ),
  );
}
await browser.close();
const [ours, bound] = taken.map(spreadOf);
title(`A worker's page on a ${SLOWER}× slowed processor, first visit`);
console.log(
  `  content after p50 ${ours!.p50.toFixed(0)} ms, p95 ${ours!.p95.toFixed(0)} ms; the same ${asked.size} files only fetched ${bound!.p50.toFixed(0)} ms; × ${(ours!.p50 / bound!.p50).toFixed(2)}`,
);
