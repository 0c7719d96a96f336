import { signInAs, startBrowser } from "../tests/setup/browser";

const url = "http://127.0.0.1:4810";
const browser = await startBrowser();
const shoot = async (page: import("playwright-core").Page, name: string) => {
  await page.waitForTimeout(900);
  await page.screenshot({ path: `/tmp/s4-${name}.png`, fullPage: true });
  console.log(name, await page.evaluate(() => document.documentElement.scrollWidth));
};
try {
  const { page, problems } = await browser.openPage({ viewport: { width: 1440, height: 1000 } });
  await signInAs(page, url, "S. Ferrand");
  await page.goto(`${url}/protectors/fitting`);
  await page.getByLabel("Employee number, or name").waitFor({ timeout: 60_000 });
  await page.keyboard.type("4417");
  await page.keyboard.press("Enter");
  await page.getByRole("form", { name: "Test the fit" }).waitFor({ timeout: 60_000 });
  const address = page.url();
  const cell = (ear: string, n: number) => page.getByRole("group", { name: `${ear} ear` }).getByRole("textbox").nth(n - 1);
  await cell("Left", 1).click();
  for (const key of ["29", "Enter", "31", "Enter", "Enter", "30", "Enter", "28"]) key === "Enter" ? await page.keyboard.press(key) : await page.keyboard.type(key);
  await shoot(page, "typed-1440");
  await page.keyboard.press("Enter");
  await page.keyboard.press("Enter");
  await page.getByRole("form", { name: /^Issue/ }).waitFor({ timeout: 60_000 });
  await page.getByRole("form", { name: /^Issue/ }).getByLabel("Alder foam").click();
  await page.getByLabel(/was shown/).click();
  await shoot(page, "issue-1440");
  await page.getByRole("button", { name: "Issue this" }).first().click();
  await page.waitForFunction(() => document.querySelector(".desk") === null, null, { timeout: 60_000 });
  await shoot(page, "issued-1440");
  console.log("focus", await page.evaluate(() => document.activeElement?.className));
  const worker = address.split("/").at(-1);
  await page.goto(`${url}/workers/${worker}#fits`);
  await page.getByRole("heading", { name: "Fits and issues" }).waitFor({ timeout: 60_000 });
  await shoot(page, "worker-1440");
  await page.getByRole("button", { name: /^Correct the fit/ }).first().click();
  await shoot(page, "correct-1440");
  await page.keyboard.press("Escape");
  const site = await page.evaluate(async () => (await (await fetch("/api/sites")).json()).rows[0].id);
  await page.goto(`${url}/rules/sites/${site}`);
  await page.getByRole("button", { name: "Change how fits are tested" }).click({ timeout: 60_000 });
  await shoot(page, "policy-1440");
  await page.goto(`${url}/findings?kind=fit-failed`);
  await page.getByRole("link", { name: "Does not fit" }).first().click({ timeout: 60_000 });
  await page.getByRole("heading", { name: "What was done" }).waitFor({ timeout: 60_000 });
  await shoot(page, "finding-1440");
  for (const [name, width, colorScheme] of [["360", 360, "light"], ["1440-dark", 1440, "dark"], ["360-dark", 360, "dark"]] as const) {
    const other = await browser.openPage({ viewport: { width, height: 900 }, colorScheme });
    await signInAs(other.page, url, "S. Ferrand");
    await other.page.goto(address);
    await other.page.getByRole("form", { name: "Test the fit" }).waitFor({ timeout: 60_000 });
    await shoot(other.page, `desk-${name}`);
    await other.page.goto(`${url}/protectors/fits`);
    await other.page.getByRole("heading", { name: "Against the label" }).waitFor({ timeout: 60_000 });
    await shoot(other.page, `fits-${name}`);
    console.log(other.problems);
    await other.page.context().close();
  }
  const me = await browser.openPage({ viewport: { width: 360, height: 800 } });
  await signInAs(me.page, url, "D. Tavernor");
  await me.page.goto(`${url}/me`);
  await me.page.getByRole("button", { name: "Yes, I have it" }).waitFor({ timeout: 60_000 });
  await shoot(me.page, "me-360");
  console.log(problems, me.problems);
} finally {
  await browser.close();
}
