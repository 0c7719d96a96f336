import { mkdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { PEOPLE } from "../demo/people";
import type { Demo } from "./programme";
import { known } from "./programme";

/** What the local sign-in provider reads: who can be chosen on its page. */
export function writePeopleFile(demo: Demo, folder: string): string {
  const people = PEOPLE.map(
    ({
      sub,
      name,
      email,
      emailVerified,
      language,
      grants,
      groups,
      worker,
      bindsByCode,
      guest,
      note,
    }) => ({
      sub,
      name,
      email,
      emailVerified,
      language,
      groups,
      roles: [...new Set([...grants.map(({ role }) => role), ...(guest ? [guest.as] : [])])],
      note: bindsByCode
        ? `${note}. Employee number ${worker}, printed code ${known(demo.codes, sub)}`
        : note,
    }),
  );
  mkdirSync(folder, { recursive: true });
  const file = join(folder, "demo-people.json");
  writeFileSync(file, `${JSON.stringify(people, null, 2)}\n`, { mode: 0o600 });
  return file;
}
