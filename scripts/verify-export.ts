/**
 * npm run verify:export -- FILE
 * Checks a year's file (ZIP) without database or network: hashes, counts, and every result derived again from its inputs.
 * Exit code 1 where anything differs.
 */
import { existsSync, openAsBlob } from "node:fs";
import { checkYearFile, isSound } from "../shared/year-file/check-year-file";
import { Failure, runMain } from "./lib/failure.mjs";

const STATES = {
  "as-stated": "as stated",
  changed: "CHANGED: another hash than the manifest says",
  "rows-differ": "ANOTHER NUMBER of records than the manifest says",
  missing: "MISSING",
  "not-listed": "NOT NAMED in the manifest",
};
const PROBLEMS = {
  unreadable: "can't be read",
  "unknown-method": "its version of the arithmetic is not known here",
  "unknown-rule-set": "its rule set is not known here",
  "not-computable": "nothing can be computed from its inputs",
};

async function open(file: string): Promise<Blob> {
  if (!existsSync(file)) throw new Failure(`there is no file at ${file}`);
  try {
    return await openAsBlob(file);
  } catch {
    throw new Failure(`${file} can't be read`);
  }
}

await runMain(async () => {
  const [file, ...more] = process.argv.slice(2);
  if (!file || more.length > 0) throw new Failure("say one file:  npm run verify:export -- FILE");
  const blob = await open(file);
  const report = await checkYearFile(blob);
  if (report.broken !== null) throw new Failure(`${file} is not whole: ${report.broken}`);
  const { manifest, files, rederived, imported, differing, differingCount } = report;
  const { organization, site, year, madeAt, trail } = manifest!;
  console.log(`${organization}, ${site}, ${year}; made ${madeAt}`);
  console.log(
    trail ? `last seal of the trail: ${trail.number}, ${trail.hash}` : "the trail had no seal yet",
  );
  for (const { path, rows, state } of files)
    console.log(`  ${path}${rows === null ? "" : `, ${rows} records`}: ${STATES[state]}`);
  console.log(`${rederived} results derived again, the same; ${imported} imported without inputs`);
  for (const { id, worker, date, file: where, problem, fields } of differing) {
    const what =
      problem !== null
        ? PROBLEMS[problem]
        : fields
            .map(({ name, stated, derived }) => `${name}: ${stated}, derived ${derived}`)
            .join("; ");
    console.log(`  DIFFERS: ${id}, ${worker}, ${date} (${where}): ${what}`);
  }
  if (differingCount > differing.length)
    console.log(`  and ${differingCount - differing.length} more`);
  const sound = isSound(report);
  console.log(
    sound ? "Nothing speaks against this file." : "This file is not what its manifest says.",
  );
  process.exitCode = sound ? 0 : 1;
});
