import { randomBytes } from "node:crypto";
import { mkdirSync, mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { TestProject } from "vitest/node";
import type { Ports, Secrets } from "../../scripts/lib/environment.mjs";
import { choosePorts, startMailCatcher, startProvider } from "./services";

declare module "vitest" {
  interface ProvidedContext {
    services: {
      ports: Ports;
      publicUrl: string;
      secrets: Secrets;
      /** Files put here (`addPeople`) say whom the provider knows. */
      peopleFolder: string;
      mailsUrl: string;
      folder: string;
    };
  }
}

/** One sign-in provider and one mail catcher for all tests of a run. */
export default async function setUp(project: TestProject) {
  const folder = mkdtempSync(join(tmpdir(), "dinward-services-"));
  const ports = await choosePorts();
  const publicUrl = `http://127.0.0.1:${ports.web}`;
  const secret = () => randomBytes(32).toString("base64url");
  const secrets = { client: secret(), session: secret(), hook: secret() };
  const peopleFolder = join(folder, "people");
  mkdirSync(peopleFolder);
  const [provider, catcher] = await Promise.all([
    startProvider({ ports, publicUrl, secrets, people: peopleFolder, serviceDir: folder }),
    startMailCatcher({ ports, secrets, serviceDir: folder }),
  ]);
  const mailsUrl = catcher.mailbox.url;
  project.provide("services", { ports, publicUrl, secrets, peopleFolder, mailsUrl, folder });
  return async () => {
    await Promise.all([provider.stop(), catcher.stop()]);
    rmSync(folder, { recursive: true, force: true });
  };
}
