import { existsSync, readdirSync, statSync } from "node:fs";
import { join } from "node:path";
import { Failure } from "./failure.mjs";
import { withLock } from "./lock.mjs";
import { run } from "./processes.mjs";
import { lockFolder, projectFolder } from "./project.mjs";

const folder = join(projectFolder, "shared", "i18n");

function areCataloguesCurrent() {
  return readdirSync(folder)
    .filter((name) => name.endsWith(".po"))
    .every((name) => {
      const compiled = join(folder, name.replace(/\.po$/, ".ts"));
      return (
        existsSync(compiled) && statSync(compiled).mtimeMs >= statSync(join(folder, name)).mtimeMs
      );
    });
}

/** Compiles the translations that are newer than their compiled form. */
export async function compileCatalogues() {
  if (areCataloguesCurrent()) return;
  await withLock(join(lockFolder, "catalogues.lock"), async () => {
    if (areCataloguesCurrent()) return;
    const cli = join(projectFolder, "node_modules", ".bin", "lingui");
    const result = await run(cli, ["compile", "--typescript"], { cwd: projectFolder });
    if (result.code !== 0) {
      throw new Failure(
        `The translations could not be compiled:\n${result.output}${result.errors}`,
      );
    }
  });
}
