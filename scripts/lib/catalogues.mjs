import { existsSync, readdirSync, readFileSync, statSync, writeFileSync } from "node:fs";
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

/** An English text with nothing to fill in is its own id: carrying it twice would be half of a page's words. */
function dropPlainText(file) {
  const text = readFileSync(file, "utf8");
  const match = /JSON\.parse\("((?:[^"\\]|\\.)*)"\)/.exec(text);
  if (!match) throw new Failure(`${file} does not look like a compiled catalogue`);
  const messages = JSON.parse(JSON.parse(`"${match[1]}"`));
  for (const [id, parts] of Object.entries(messages)) {
    if (parts.length === 1 && parts[0] === id) delete messages[id];
  }
  const kept = JSON.stringify(JSON.stringify(messages));
  writeFileSync(
    file,
    text.replace(match[0], () => `JSON.parse(${kept})`),
  );
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
    for (const name of readdirSync(folder))
      if (/-en\.ts$/.test(name)) dropPlainText(join(folder, name));
  });
}
