import { existsSync } from "node:fs";
import { installDebianPackages } from "./apt.mjs";

const places = ["/usr/bin/chromium", "/usr/bin/chromium-browser", "/usr/bin/google-chrome"];

export function findChromium() {
  return [process.env.CHROMIUM, ...places].find((file) => file && existsSync(file)) ?? null;
}

/** The browser for the browser tests; installs Debian's as root. */
export async function ensureChromium() {
  const found = findChromium();
  if (found) return found;
  await installDebianPackages(["chromium"], "Chromium");
  const installed = findChromium();
  if (!installed) throw new Error("Chromium was installed but is not where Debian puts it");
  return installed;
}
