import { createServer } from "node:http";
import { build } from "esbuild";
import { afterAll, beforeAll, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { ruleSetInForce } from "../../shared/rule-sets";
import { ENGINE_VECTORS } from "../published/vectors";
import { startBrowser, type TestBrowser } from "../setup/browser";

/** The very sources of the record's engine, as one script for a page. */
const entry = `
import { evaluateDay } from "./shared/acoustics/day";
import { ruleSetInForce } from "./shared/rule-sets";
globalThis.evaluate = (day, governing, comparison) =>
  JSON.stringify(evaluateDay(day, ruleSetInForce(governing, day.date), comparison.map((key) => ruleSetInForce(key, day.date))));
`;

let browser: TestBrowser;
let url: string;
const server = createServer(async (request, response) => {
  if (request.url !== "/engine.js") {
    response.setHeader("content-type", "text/html");
    response.end(
      '<!doctype html><title>engine</title><link rel="icon" href="data:,"><script src="/engine.js"></script>',
    );
    return;
  }
  const { outputFiles } = await build({
    stdin: { contents: entry, resolveDir: ".", loader: "ts" },
    bundle: true,
    write: false,
    format: "iife",
  });
  response.setHeader("content-type", "text/javascript");
  response.end(outputFiles[0]?.text);
});

beforeAll(async () => {
  await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
  const address = server.address();
  url = `http://127.0.0.1:${typeof address === "object" ? address?.port : 0}/`;
  browser = await startBrowser();
});
afterAll(async () => {
  await browser?.close();
  server.close();
});

/** Numbers apart, which powers and logarithms of two machines may round differently in their last digit. */
function flatten(value: unknown, path = ""): Map<string, unknown> {
  if (typeof value !== "object" || value === null) return new Map([[path, value]]);
  return new Map(
    Object.entries(value).flatMap(([name, member]) => [...flatten(member, `${path}.${name}`)]),
  );
}

test("the preview in the browser is the record's own arithmetic: same words, numbers to a billionth", async () => {
  const { page, close } = await browser.openPage();
  await page.goto(url);
  for (const { name, day, governing, comparison } of ENGINE_VECTORS) {
    const find = (key: string) => {
      const found = ruleSetInForce(key, day.date);
      if (!found) throw new Error(`no ${key} on ${day.date}`);
      return found;
    };
    const here = flatten(
      JSON.parse(JSON.stringify(evaluateDay(day, find(governing), comparison.map(find)))),
    );
    const answer = await page.evaluate(
      ([input, key, others]) =>
        (
          globalThis as unknown as { evaluate(d: unknown, g: string, c: readonly string[]): string }
        ).evaluate(input, key, others),
      [day, governing, comparison] as const,
    );
    const there = flatten(JSON.parse(answer));
    expect([...there.keys()], name).toEqual([...here.keys()]);
    for (const [path, value] of here) {
      if (typeof value === "number")
        expect(there.get(path), `${name} ${path}`).toBeCloseTo(value, 9);
      else expect(there.get(path), `${name} ${path}`).toBe(value);
    }
  }
  await close();
});
