import { readFile } from "node:fs/promises";

let page: Promise<string> | undefined;

/** The page that checks a year's file offline: bundled beside the server (scripts/build.mjs), or made when run from source. */
export function checkPage(): Promise<string> {
  page ??= import.meta.url.endsWith(".ts")
    ? fromSource()
    : readFile(new URL("./check.html", import.meta.url), "utf8");
  return page;
}

async function fromSource(): Promise<string> {
  // Named at run time: a bundle of the server has no use for the bundler.
  const maker: string = "../../scripts/lib/check-page.mjs";
  const { bundleCheckPage } = (await import(maker)) as { bundleCheckPage(): Promise<string> };
  return bundleCheckPage();
}
