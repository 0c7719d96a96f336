import { execFile } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { promisify } from "node:util";
import type { TestProject } from "vitest/node";
import { applicationEnvironment } from "../../scripts/lib/environment.mjs";
import { openTestCluster } from "../../scripts/lib/test-cluster.mjs";
import { noPorts } from "./services";

declare module "vitest" {
  interface ProvidedContext {
    database: {
      /** Begins the name of every database of this run. */
      prefix: string;
      template: string;
      superUrl: string;
      ownerUrl: string;
      appUrl: string;
      programsFolder: string;
      /** Where the demo is kept that the files of a run copy; each of them may be the one that fills it. */
      demoFolder: string;
    };
  }
}

/** Migrates one database; tests get copies of it. */
export default async function setUp(project: TestProject) {
  const { cluster, prefix, close } = await openTestCluster();
  const template = `${prefix}_template`;
  try {
    await cluster.createDatabase(template);
    const env = applicationEnvironment({
      mode: "test",
      cluster,
      database: template,
      ports: noPorts,
      publicUrl: "http://127.0.0.1:1",
      secrets: { client: "unused", session: "unused-".repeat(8), hook: "unused-".repeat(8) },
      dataDir: "/nowhere",
    });
    await promisify(execFile)(process.execPath, ["--import", "tsx", "server/migrate.ts"], { env });
  } catch (error) {
    await close();
    const { stdout = "", stderr = "" } = error as { stdout?: string; stderr?: string };
    throw new Error(`the test database could not be migrated\n${stdout}${stderr}`, {
      cause: error,
    });
  }
  const demoFolder = mkdtempSync(join(tmpdir(), "dinward-demo-"));
  project.provide("database", {
    prefix,
    template,
    superUrl: cluster.url("super", "postgres"),
    ownerUrl: cluster.url("owner", "DATABASE"),
    appUrl: cluster.url("app", "DATABASE"),
    programsFolder: cluster.programsFolder,
    demoFolder,
  });
  return async () => {
    rmSync(demoFolder, { recursive: true, force: true });
    await close();
  };
}
