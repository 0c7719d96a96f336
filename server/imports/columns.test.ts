import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { IMPORT_KINDS } from "../../shared/schemas/import";
import { IMPORT_COLUMNS } from "./columns";

const page = readFileSync(join(import.meta.dirname, "../../docs/import.md"), "utf8");

test.each(IMPORT_KINDS)("docs/import.md names every column of %s, and no other", (kind) => {
  const section = page.split(/^## /m).find((part) => part.includes(`(\`${kind}\`)`)) ?? "";
  const named = [...section.matchAll(/^\| `(\w+)` *\| (yes)? *\| (.+?) *\|$/gm)];
  expect(named.map(([, name, yes, meaning]) => [name, yes === "yes", meaning])).toEqual(
    IMPORT_COLUMNS[kind].map(({ name, isRequired, meaning }) => [name, isRequired, meaning]),
  );
});
