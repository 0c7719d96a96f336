import { writeFileSync } from "node:fs";
import { signInAs, startBrowser } from "../tests/setup/browser";
import { behind, cancelled, gaussianNoise, pairFile } from "../tests/factories/microphone-check";

const url = process.env.PUBLIC_URL ?? "http://127.0.0.1:4800";
const browser = await startBrowser();
const shoot = async (page: import("playwright-core").Page, name: string) => {
  await page.waitForTimeout(600);
  await page.screenshot({ path: `/tmp/s2-${name}.png`, fullPage: true });
};
try {
  const outside = gaussianNoise(20, 5);
  const shaped = outside.map((v, i) => (i === 0 ? v : v + 0.9 * outside[i - 1]!) * 0.4);
  const inside = behind(shaped, 22).map((v, i, all) => (i < 2 ? v : v * 0.5 + all[i - 1]! * 0.3 + all[i - 2]! * 0.2));
  writeFileSync("/tmp/s2-off.wav", pairFile([shaped, inside]));
  writeFileSync("/tmp/s2-on.wav", pairFile([shaped, cancelled(inside, 10, 0.85)]));
  writeFileSync("/tmp/s2-swapped.wav", pairFile([inside, shaped]));
  const { page, problems } = await browser.openPage({ viewport: { width: 1440, height: 1000 } });
  await signInAs(page, url, "S. Ferrand");
  const ask = (address: string) =>
    page.evaluate(async (to) => (await fetch(`/api${to}`)).json(), address);
  const workers = await ask("/workers?limit=50");
  const models = await ask("/protectors");
  const active = models.rows.find((m: any) => m.data.active && !m.isArchived) ?? models.rows[0];
  const worker = workers.rows[0];
  const form = `${url}/workers/${worker.id}/microphone-check?model=${active.id}`;
  await page.goto(form);
  await page.getByRole("heading", { name: "A new check" }).waitFor();
  await shoot(page, "form-1440");
  await page.getByText("Not calibrated, but equally sensitive").click();
  await page.getByLabel("Active part off").setInputFiles("/tmp/s2-off.wav");
  await page.getByLabel(/^Active part on/).setInputFiles("/tmp/s2-on.wav");
  await page.getByRole("button", { name: "Send the recordings in" }).click();
  await page.getByRole("heading", { name: "Found at this ear" }).waitFor({ timeout: 180_000 });
  await shoot(page, "result-1440");
  const address = page.url();
  await page.getByRole("button", { name: "Keep as a fit test" }).click();
  await page.getByLabel("Tested on").waitFor({ timeout: 60_000 });
  await shoot(page, "keep-1440");
  await page.getByRole("form", { name: "Keep as a fit test" }).getByRole("button", { name: "Keep as a fit test" }).click();
  await page.getByText("It stands among").waitFor({ timeout: 60_000 });
  await shoot(page, "kept-1440");
  for (const [name, width, colorScheme] of [["360", 360, "light"], ["1440-dark", 1440, "dark"], ["360-dark", 360, "dark"]] as const) {
    const other = await browser.openPage({ viewport: { width, height: 900 }, colorScheme });
    await signInAs(other.page, url, "S. Ferrand");
    await other.page.goto(address);
    await other.page.getByRole("heading", { name: "Found at this ear" }).waitFor({ timeout: 60_000 });
    await shoot(other.page, `result-${name}`);
    await other.page.goto(form);
    await other.page.getByRole("heading", { name: "A new check" }).waitFor({ timeout: 60_000 });
    if (width === 360) await other.page.getByText("Octave bands off a meter").click();
    await shoot(other.page, `form-${name}`);
    console.log(name, other.problems, await other.page.evaluate(() => document.documentElement.scrollWidth));
  }
  await page.goto(form);
  await page.getByText("Not calibrated, but equally sensitive").click();
  await page.getByLabel("Active part off").setInputFiles("/tmp/s2-swapped.wav");
  await page.getByRole("button", { name: "Send the recordings in" }).click();
  await page.getByRole("button", { name: /take outside for inside/ }).waitFor({ timeout: 180_000 });
  await shoot(page, "swapped-1440");
  await page.getByRole("button", { name: /take outside for inside/ }).click();
  await page.getByRole("button", { name: "Keep as a fit test" }).waitFor();
  await shoot(page, "turned-1440");
  console.log(problems);
} finally {
  await browser.close();
}
