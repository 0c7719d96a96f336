import { execFileSync } from "node:child_process";
import { join } from "node:path";

/** In a process of its own: the compiler reads its configuration as a program started by Node.js does. */
export default function compileCatalogues(): void {
  const script = join(import.meta.dirname, "../../scripts/compile-catalogues.mjs");
  execFileSync(process.execPath, [script], { stdio: "inherit" });
}
