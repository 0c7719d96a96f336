import { execFile } from "node:child_process";
import { randomBytes } from "node:crypto";
import {
  cpSync,
  existsSync,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { promisify } from "node:util";
import { inject } from "vitest";
import { copyDatabase, dropDatabase } from "./copy-database";
import { projectFolder, type RunningProcess, startProcess, waitFor } from "./processes";
import {
  addPeople,
  choosePorts,
  type Mailbox,
  type Person,
  startMailCatcher,
  startProvider,
} from "./services";

export interface RunningApp {
  url: string;
  issuer: string;
  /** Connection of the role that owns the tables and sees every organization. */
  ownerUrl: string;
  dataDir: string;
  mailbox: Mailbox;
  /** What the application's processes are started with. */
  env: NodeJS.ProcessEnv;
  web: RunningProcess;
  work: RunningProcess;
  catcher: RunningProcess;
  provider: RunningProcess;
  people(): Person[];
  knowPeople(people: readonly Person[]): void;
  /** One more process on the same database; `port` makes it a second address. */
  startWeb(port?: number): Promise<RunningProcess>;
  startWork(): RunningProcess;
  stop(): Promise<void>;
}

/** Builds the sources as `npm start` does; quick when nothing has changed. */
export async function buildApp(): Promise<void> {
  const { NODE_ENV, VITEST, ...env } = process.env; // a bundler under NODE_ENV=test builds for tests
  await promisify(execFile)(process.execPath, ["scripts/build.mjs", "--if-changed"], {
    cwd: projectFolder,
    env,
  });
}

const entry = (name: string) => ["--enable-source-maps", `dist/server/${name}.js`];

/** What does not hang on where the other services are. */
const settings = (database: { appUrl: string; ownerUrl: string }, dataDir: string) => ({
  NODE_ENV: "development",
  HOST: "127.0.0.1",
  PORT: "1",
  DATABASE_URL: database.appUrl,
  OWNER_DATABASE_URL: database.ownerUrl,
  OIDC_ISSUER: "http://localhost:1",
  OIDC_CLIENT_ID: "dinward",
  OIDC_CLIENT_SECRET: "unused",
  OIDC_ALLOW_INSECURE: "true",
  SMTP_URL: "smtp://127.0.0.1:1",
  MAIL_FROM: "Dinward <noise@dinward.example>",
  SESSION_SECRETS: "unused-".repeat(8),
  PUBLIC_URL: "http://127.0.0.1:1",
  DATA_DIR: dataDir,
  TRUST_PROXY: "false",
  LOG_LEVEL: "warn",
});

/** The demo is filled once in a run, by the first file that wants it; the others copy it. */
async function copyDemo(label: string, dataDir: string) {
  const { demoFolder } = inject("database");
  const filledFile = join(demoFolder, "filled");
  const demoData = join(demoFolder, "app");
  if (!existsSync(filledFile)) {
    mkdirSync(demoData, { recursive: true });
    const filling = await copyDatabase("demo");
    const env = { ...process.env, ...settings(filling, demoData) };
    // A short past is enough for a test, and the story is the same.
    const seedDemo = [...entry("seed-demo"), "--months=2"];
    await promisify(execFile)(process.execPath, seedDemo, { cwd: projectFolder, env });
    writeFileSync(filledFile, filling.name);
  }
  cpSync(demoData, dataDir, { recursive: true });
  return copyDatabase(label, readFileSync(filledFile, "utf8"));
}

/** The built application on a fresh database, with a sign-in provider and a mail catcher of its own. */
export async function startApp({
  label,
  seed,
  people = [],
}: {
  /** Part of the database's name: unique among the apps that run at once. */
  label: string;
  /** "demo" fills in what `npm start` shows; "empty" leaves the schema alone. */
  seed: "demo" | "empty";
  people?: readonly Person[];
}): Promise<RunningApp> {
  await buildApp();
  const folder = mkdtempSync(join(tmpdir(), "dinward-app-"));
  const dataDir = join(folder, "app");
  const peopleFolder = join(folder, "people");
  mkdirSync(dataDir);
  const ports = await choosePorts();
  const url = `http://127.0.0.1:${ports.web}`;
  const secret = () => randomBytes(32).toString("base64url");
  const secrets = { client: secret(), session: secret(), hook: secret() };
  const database = seed === "demo" ? await copyDemo(label, dataDir) : await copyDatabase(label);
  addPeople(peopleFolder, people);
  const env: NodeJS.ProcessEnv = {
    ...process.env,
    ...settings(database, dataDir),
    PORT: String(ports.web),
    OIDC_ISSUER: `http://localhost:${ports.signIn}`,
    OIDC_CLIENT_SECRET: secrets.client,
    SMTP_URL: `smtp://127.0.0.1:${ports.smtp}`,
    SESSION_SECRETS: secrets.session,
    MAIL_HOOK_SECRETS: secrets.hook,
    MAIL_RETURN_TO: "returned@dinward.example",
    PUBLIC_URL: url,
  };
  const demoPeople = join(dataDir, "demo-people.json");
  const readPeople = (): Person[] =>
    existsSync(demoPeople) ? JSON.parse(readFileSync(demoPeople, "utf8")) : [...people];
  if (seed === "demo") addPeople(peopleFolder, readPeople(), "demo");

  const started: RunningProcess[] = [];
  async function startWeb(port = ports.web) {
    const web = startProcess("web", entry("web"), { ...env, PORT: String(port) });
    started.push(web);
    await waitFor(`http://127.0.0.1:${port}/readyz`, web);
    return web;
  }
  function startWork() {
    const work = startProcess("work", entry("work"), env);
    started.push(work);
    return work;
  }
  const common = { ports, publicUrl: url, secrets, serviceDir: folder };
  const [provider, catcher, web] = await Promise.all([
    startProvider({ ...common, people: peopleFolder }),
    startMailCatcher(common),
    startWeb(),
  ]);
  const work = startWork();

  return {
    url,
    issuer: provider.issuer,
    ownerUrl: database.ownerUrl,
    dataDir,
    mailbox: catcher.mailbox,
    env,
    web,
    work,
    catcher,
    provider,
    people: readPeople,
    knowPeople: (more) => addPeople(peopleFolder, more, randomBytes(4).toString("hex")),
    startWeb,
    startWork,
    async stop() {
      await Promise.all(started.map((process_) => process_.stop()));
      await Promise.all([provider.stop(), catcher.stop()]);
      await dropDatabase(database.name);
      rmSync(folder, { recursive: true, force: true });
    },
  };
}
