/**
 * npm test: sets up what the tests need and runs them all.
 *   npm test -- api            only these parts (types, lint, unit, published, client, api, platform, e2e)
 *   npm test -- api shifts     only files of that part whose path holds «shifts»
 */
import { existsSync, mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { compileCatalogues } from "./lib/catalogues.mjs";
import { ensureChromium } from "./lib/chromium.mjs";
import { runMain } from "./lib/failure.mjs";
import { ensurePackages, requireNode } from "./lib/packages.mjs";
import { endActiveRuns, run } from "./lib/processes.mjs";
import { projectFolder } from "./lib/project.mjs";
import { openTestCluster } from "./lib/test-cluster.mjs";

const checks = [
  { part: "types", program: "tsc", args: ["--noEmit"] },
  { part: "lint", program: "biome", args: ["ci", "."] },
];
/** Vitest projects that may run beside each other; the groups run one after the other. */
const groups = [["unit", "published", "client"], ["api"], ["platform"], ["e2e"]];

const allParts = [...checks.map(({ part }) => part), ...groups.flat()];
const args = process.argv.slice(2);
const named = args.filter((arg) => allParts.includes(arg));
const filters = args.filter((arg) => !allParts.includes(arg));
const isWanted = (part) =>
  named.length > 0 ? named.includes(part) : filters.length === 0 || groups.flat().includes(part);

const total = { passed: 0, failed: 0, skipped: 0 };

const runTool = (program, toolArgs) =>
  run(join(projectFolder, "node_modules", ".bin", program), toolArgs, {
    cwd: projectFolder,
    show: true,
  });

async function runCheck({ part, program, args: checkArgs }) {
  console.log(`\n== ${part}`);
  const { code } = await runTool(program, checkArgs);
  if (code === 0) total.passed += 1;
  else total.failed += 1;
  console.log(`${part}: ${code === 0 ? "passed" : "FAILED"}`);
}

async function runGroup(projects, folder) {
  console.log(`\n== ${projects.join(", ")}`);
  const reportFile = join(folder, `${projects[0]}.json`);
  const { code } = await runTool("vitest", [
    "run",
    ...projects.flatMap((project) => ["--project", project]),
    "--passWithNoTests",
    "--reporter=default",
    "--reporter=json",
    `--outputFile.json=${reportFile}`,
    ...filters,
  ]);
  const counted = existsSync(reportFile)
    ? countResults(JSON.parse(readFileSync(reportFile, "utf8")))
    : { passed: 0, failed: 0, skipped: 0 };
  // Vitest also fails for what belongs to no test: a set-up, an unhandled rejection.
  if (code !== 0 && counted.failed === 0) counted.failed = 1;
  for (const key of Object.keys(total)) total[key] += counted[key];
}

/** A file that could not even be loaded has no tests in the report, and counts as one failure. */
function countResults(report) {
  const broken = report.testResults.filter(
    (file) =>
      file.status === "failed" && file.assertionResults.every(({ status }) => status !== "failed"),
  );
  return {
    passed: report.numPassedTests,
    failed: report.numFailedTests + broken.length,
    skipped: report.numPendingTests + (report.numTodoTests ?? 0),
  };
}

async function main() {
  requireNode();
  await ensurePackages();
  await compileCatalogues();
  if (isWanted("e2e")) process.env.CHROMIUM = await ensureChromium();
  const folder = mkdtempSync(join(tmpdir(), "dinward-test-"));
  const needsDatabase = ["api", "platform", "e2e"].some(isWanted);
  const testCluster = needsDatabase ? await openTestCluster() : null;
  try {
    for (const check of checks) if (isWanted(check.part)) await runCheck(check);
    for (const group of groups) {
      const projects = group.filter(isWanted);
      if (projects.length > 0) await runGroup(projects, folder);
    }
  } finally {
    await testCluster?.close();
    rmSync(folder, { recursive: true, force: true });
  }
  const skipped = total.skipped > 0 ? `, ${total.skipped} skipped` : "";
  console.log(`\ntests: ${total.passed} passed, ${total.failed} failed${skipped}`);
  process.exitCode = total.failed > 0 || total.passed === 0 ? 1 : 0;
}

for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"]) process.on(signal, endActiveRuns);
await runMain(main);
