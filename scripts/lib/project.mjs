import { createHash } from "node:crypto";
import { dirname, join, resolve } from "node:path";
import { fileURLToPath } from "node:url";

export const projectFolder = resolve(dirname(fileURLToPath(import.meta.url)), "../..");

/** Locks that guard the checkout itself (packages, build), whatever data folder is in use. */
export const lockFolder = join(projectFolder, ".data", "locks");

export function shortHash(text) {
  return createHash("sha256").update(text).digest("hex").slice(0, 12);
}
