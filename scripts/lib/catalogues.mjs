import { createHash } from "node:crypto";
import {
  existsSync,
  mkdirSync,
  readdirSync,
  readFileSync,
  renameSync,
  writeFileSync,
} from "node:fs";
import { join } from "node:path";
import { cataloguePartNames, partOfSource, textsInSource } from "./catalogue-parts.mjs";
import { withLock } from "./lock.mjs";
import { lockFolder, projectFolder } from "./project.mjs";

const folder = join(projectFolder, "shared", "i18n");
const compiledFolder = join(folder, "compiled");
const stampFile = join(compiledFolder, "made-from");

const isSource = (name) => /\.tsx?$/.test(name) && !/\.test\.tsx?$/.test(name);

/** The texts of each part, sorted, as the sources have them. */
function collectTexts() {
  const texts = new Map(cataloguePartNames.map((part) => [part, new Set()]));
  for (const top of ["src", "server", "shared"]) {
    for (const name of readdirSync(join(projectFolder, top), { recursive: true })) {
      const path = `${top}/${name.replaceAll("\\", "/")}`;
      if (!isSource(path) || path.startsWith("shared/i18n/compiled/")) continue;
      const part = partOfSource(path);
      if (!part) continue;
      for (const text of textsInSource(readFileSync(join(projectFolder, path), "utf8")))
        texts.get(part).add(text);
    }
  }
  return new Map([...texts].map(([part, ids]) => [part, [...ids].sort()]));
}

/** Languages with a file of their own, beside English, which is in the sources. */
const translatedLanguages = () =>
  readdirSync(folder)
    .filter((name) => name.endsWith(".po"))
    .map((name) => name.slice(0, -".po".length))
    .sort();

/** A language in its own words: "Deutsch", "Español". */
function ownName(language) {
  const name = new Intl.DisplayNames([language], { type: "language" }).of(language);
  return name.charAt(0).toLocaleUpperCase(language) + name.slice(1);
}

function writeChanged(name, text) {
  const file = join(compiledFolder, name);
  if (existsSync(file) && readFileSync(file, "utf8") === text) return;
  // Whoever reads at this moment has the file of before, or this one, and never a half.
  writeFileSync(`${file}.new`, text);
  renameSync(`${file}.new`, file);
}

async function compile(texts) {
  // Loaded only where there is something to compile.
  const { createCompiledCatalog, getCatalogs } = await import("@lingui/cli/api");
  const { getConfig } = await import("@lingui/conf");
  const config = getConfig({ cwd: projectFolder });
  const [catalogue] = await getCatalogs(config);
  const languages = ["en", ...translatedLanguages()];
  mkdirSync(compiledFolder, { recursive: true });
  for (const language of languages) {
    const translated = language === "en" ? {} : await catalogue.read(language);
    for (const [part, ids] of texts) {
      const messages = Object.fromEntries(
        ids
          // English with nothing to fill in is its own id: carrying it twice would be half of a page's words.
          .filter((id) => language !== "en" || /[{}<>'#]/.test(id))
          // What isn't translated yet stands in English.
          .map((id) => [id, translated[id]?.translation || id]),
      );
      const { source, errors } = createCompiledCatalog(language, messages, { namespace: "ts" });
      if (errors.length > 0) {
        const [{ id, error }] = errors;
        throw new Error(`shared/i18n/${language}.po, «${id}»: ${error.message}`);
      }
      writeChanged(`${part}-${language}.ts`, source);
    }
  }
  writeChanged(
    "locales.ts",
    `// Made from the files of shared/i18n by scripts/lib/catalogues.mjs.
export const LOCALES = ${JSON.stringify(languages)} as const;
export type Locale = (typeof LOCALES)[number];

/** Each language in its own words. */
export const LOCALE_NAMES: Readonly<Record<Locale, string>> = ${JSON.stringify(
      Object.fromEntries(languages.map((language) => [language, ownName(language)])),
    )};
`,
  );
  // One literal import a file, so that the bundler makes one chunk each.
  const load = (part, language) => `${language}: () => import("./${part}-${language}")`;
  writeChanged(
    "catalogues.ts",
    `// Made from the files of shared/i18n by scripts/lib/catalogues.mjs.
export const CATALOGUES = {
${[...texts.keys()]
  .map((part) => `  ${part}: { ${languages.map((language) => load(part, language)).join(", ")} },`)
  .join("\n")}
} as const;
`,
  );
}

/** Compiles the translations, unless those that are there were made from the same texts. */
export async function compileCatalogues() {
  const texts = collectTexts();
  const hash = createHash("sha256").update(JSON.stringify([...texts]));
  for (const path of [
    ...translatedLanguages().map((language) => join(folder, `${language}.po`)),
    import.meta.filename,
  ])
    hash.update(readFileSync(path));
  const stamp = hash.digest("hex");
  const isCurrent = () => existsSync(stampFile) && readFileSync(stampFile, "utf8") === stamp;
  if (isCurrent()) return;
  await withLock(join(lockFolder, "catalogues.lock"), async () => {
    if (isCurrent()) return;
    await compile(texts);
    writeFileSync(stampFile, stamp);
  });
}
