/**
 * npm start: brings the demo up on this machine with nothing installed by hand.
 *   --reset  empties the demo and fills it anew, dated from today
 *   --dev    serves the sources with hot reload instead of a build
 * Environment: DINWARD_DATA (data folder, .data unless said), PORT (of the application).
 */
import { randomBytes } from "node:crypto";
import { existsSync, mkdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { join, resolve } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { Children } from "./lib/children.mjs";
import { openCluster } from "./lib/cluster.mjs";
import {
  applicationEnvironment,
  catcherEnvironment,
  catcherScript,
  issuerUrl,
  providerEnvironment,
  providerScript,
} from "./lib/environment.mjs";
import { diskFull, explainFileError, Failure } from "./lib/failure.mjs";
import { lockHolder, tryLock, unlock } from "./lib/lock.mjs";
import { ensurePackages, requireNode } from "./lib/packages.mjs";
import { holdFreePort, holdPort } from "./lib/ports.mjs";
import { endActiveRuns, endGroup, isSameProcess, run } from "./lib/processes.mjs";
import { projectFolder } from "./lib/project.mjs";

const DATABASE = "dinward";
const FIRST_PORT = 4600;
const isReset = process.argv.includes("--reset");
const isDev = process.argv.includes("--dev");
const dataFolder = resolve(process.env.DINWARD_DATA ?? join(projectFolder, ".data"));
const inData = (...parts) => join(dataFolder, ...parts);

const files = {
  lock: inData("start.lock"),
  running: inData("running.json"),
  seeded: inData("seeded.json"),
  app: inData("app"),
  services: inData("services"),
  logs: inData("logs"),
};

let holdsLock = false;
let opening;
let cluster;
let children;
let stopping;

/** Undoes a start, however far it came; safe to call more than once. */
function stopAll() {
  stopping ??= (async () => {
    endActiveRuns();
    await children?.stop(["web", "work", "client"]);
    cluster ??= await opening?.catch(() => undefined);
    await cluster?.stop();
    if (!holdsLock) return;
    rmSync(files.running, { force: true });
    unlock(files.lock);
  })();
  return stopping;
}

/** Where a start goes no further once it is being stopped: whoever stops it ends the process. */
async function goOn() {
  if (stopping) await new Promise(() => {});
}

async function endWith(line) {
  if (stopping) return;
  console.error(`dinward: ${line}`);
  await stopAll();
  process.exit(1);
}

function readJson(file) {
  return existsSync(file) ? JSON.parse(readFileSync(file, "utf8")) : null;
}

function writeJson(file, value) {
  writeFileSync(file, `${JSON.stringify(value, null, 2)}\n`, { mode: 0o600 });
}

/** Says where another start of the same data folder runs, and ends. */
function yieldToOther() {
  const holder = lockHolder(files.lock);
  const address = readJson(files.running)?.address;
  const where = address ? `is running already on ${address}` : "is being started already";
  const process_ = holder ? ` (process ${holder.pid})` : "";
  if (isReset) {
    console.error(`dinward: Dinward ${where}${process_}: stop it first (Ctrl-C), then reset.`);
    process.exit(1);
  }
  console.log(`Dinward ${where}${process_}; this start leaves it alone.`);
  process.exit(0);
}

/** A start that was killed outright leaves its processes behind. */
async function endLeftovers() {
  for (const child of readJson(files.running)?.children ?? []) {
    if (isSameProcess(child)) await endGroup(child.pid);
  }
  rmSync(files.running, { force: true });
}

/**
 * Ports stay what they were at the last start, for the application's is in mails and bookmarks; where another program has
 * taken one meanwhile, a free one takes its place from then on. They are held until the programs take them: installing and
 * filling last minutes, in which another start would find them free.
 */
async function holdPorts() {
  const file = inData("ports.json");
  const known = readJson(file) ?? {};
  const ports = {};
  const held = [];
  for (const [name, what] of [
    ["web", "the application"],
    ["signIn", "the local sign-in provider"],
    ["smtp", "the mail catcher"],
    ["mails", "the page of caught mails"],
    ["client", "the hot reload"],
  ]) {
    const isTold = name === "web" && Boolean(process.env.PORT);
    const asked = isTold ? Number(process.env.PORT) : known[name];
    let hold = asked ? await holdPort(asked) : null;
    if (!hold && isTold) {
      throw new Failure(
        `Port ${asked} for ${what} is in use by another program: choose another with  PORT=… npm start.`,
      );
    }
    hold ??= await holdFreePort(FIRST_PORT, Object.values({ ...known, ...ports }));
    if (asked && hold.port !== asked)
      console.log(
        `Port ${asked} for ${what} is in use by another program: ${hold.port} from now on`,
      );
    ports[name] = hold.port;
    held.push(hold);
  }
  writeJson(file, ports);
  const release = () => Promise.all(held.map((hold) => hold.release()));
  return { ports, release };
}

/**
 * A sign-in is bound to the provider's address. This database knows no provider but the local one, so that people bound
 * at its earlier port go on at the present one.
 */
async function followIssuer(ports) {
  const issuer = issuerUrl(ports);
  await cluster.sql(
    `UPDATE users u SET issuer = '${issuer}' WHERE u.issuer LIKE 'http://localhost:%' AND u.issuer <> '${issuer}'
       AND NOT EXISTS (SELECT FROM users other WHERE other.issuer = '${issuer}' AND other.subject = u.subject)`,
    { database: DATABASE, role: "owner" },
  );
}

function readSecrets() {
  const file = inData("secrets.json");
  const known = readJson(file);
  // One of a demo from before there was the third is completed.
  if (known?.hook) return known;
  const secret = () => randomBytes(32).toString("base64url");
  const secrets = { client: secret(), session: secret(), hook: secret(), ...known };
  writeJson(file, secrets);
  return secrets;
}

/** Runs one step to its end; what it says is shown only if it fails. */
async function runStep(what, args, env) {
  const result = await run(process.execPath, args, { cwd: projectFolder, env });
  await goOn();
  if (result.code === 0) return;
  const report = result.output + result.errors;
  const logFile = join(files.logs, "start.log");
  writeFileSync(logFile, report);
  if (/ENOSPC|no space left on device/i.test(report)) throw diskFull(dataFolder);
  if (!cluster.isAlive()) throw cluster.explainDeath();
  const words = report
    .split("\n")
    .map((line) => line.trim())
    .filter((line) => line && !/^at |^Node\.js v|build failed/i.test(line));
  const reason = words.find((line) => /error|could not|cannot|failed/i.test(line)) ?? words.at(-1);
  throw new Failure(`${what} failed: ${reason ?? "no reason given"} (log: ${logFile})`);
}

/** How Node.js runs one of the server's entry points. */
function entryPoint(name) {
  return isDev
    ? ["--import", "tsx", `server/${name}.ts`]
    : ["--enable-source-maps", `dist/server/${name}.js`];
}

async function build() {
  const args = isDev ? ["scripts/compile-catalogues.mjs"] : ["scripts/build.mjs", "--if-changed"];
  const env = { ...process.env, NO_COLOR: "1", FORCE_COLOR: "0" };
  delete env.NODE_ENV; // Vite builds for production unless told otherwise
  await runStep("The build", args, env);
}

/** The database with its schema, and with the demo's data the first time. */
async function fillDatabase(env) {
  const isSeeded = existsSync(files.seeded) && (await cluster.hasDatabase(DATABASE));
  if (!isSeeded) {
    rmSync(files.seeded, { force: true });
    await cluster.dropDatabase(DATABASE); // half filled by a start that was stopped
    rmSync(files.app, { recursive: true, force: true });
    rmSync(join(files.services, "mails"), { recursive: true, force: true });
    await cluster.createDatabase(DATABASE);
  }
  mkdirSync(files.app, { recursive: true });
  await runStep("The migration", entryPoint("migrate"), env);
  if (isSeeded) return;
  console.log(isReset ? "Filling the demo anew" : "Filling the demo (only the first time)");
  await runStep("Filling the demo", entryPoint("seed-demo"), env);
  writeJson(files.seeded, { seededAt: new Date().toISOString() });
}

function startProcesses({ env, ports, publicUrl, secrets }) {
  const common = { ports, publicUrl, secrets, serviceDir: files.services };
  const people = join(files.app, "demo-people.json");
  children.start("sign-in", [providerScript], providerEnvironment({ ...common, people }));
  children.start("mail", [catcherScript], catcherEnvironment(common));
  if (isDev) {
    const watch = ["node_modules/tsx/dist/cli.mjs", "watch", "--clear-screen=false"];
    children.start("web", [...watch, "server/web.ts"], env);
    children.start("work", [...watch, "server/work.ts"], env);
    children.start("client", ["node_modules/vite/bin/vite.js", "--port", String(ports.client)], {
      ...env,
      DINWARD_API_URL: `http://127.0.0.1:${ports.web}`,
    });
  } else {
    children.start("web", entryPoint("web"), env);
    children.start("work", entryPoint("work"), env);
  }
}

async function answers(address) {
  try {
    return (await fetch(address, { signal: AbortSignal.timeout(5000) })).ok;
  } catch {
    return false;
  }
}

async function waitUntilReady(addresses) {
  const deadline = Date.now() + 90_000;
  for (const address of addresses) {
    while (!(await answers(address))) {
      await goOn();
      if (Date.now() > deadline)
        throw new Failure(`${address} did not answer (logs: ${files.logs})`);
      await sleep(100);
    }
  }
}

const roleWords = {
  officer: "Safety officer",
  supervisor: "Supervisor",
  worker: "Worker",
  auditor: "Auditor",
  administrator: "Administrator",
  representative: "Workers’ representative",
  employer: "Outside employer",
  visitor: "Visitor",
};

async function printWelcome({ publicUrl, ports }) {
  const people = await (await fetch(`http://localhost:${ports.signIn}/demo-people`)).json();
  const rows = people.map((person) => {
    const roles = (person.roles ?? []).map((role) => roleWords[role] ?? role);
    const notes = [...roles];
    if (roles.length === 0) notes.push("no role granted");
    if (!person.emailVerified) notes.push("e-mail not verified");
    return [person.name, notes.join(", "), person.email];
  });
  const width = (column) => Math.max(...rows.map((row) => row[column].length), 0);
  const table = rows.map(
    ([name, roles, email]) => `  ${name.padEnd(width(0))}  ${roles.padEnd(width(1))}  ${email}`,
  );
  console.log(`
Dinward is ready:  ${publicUrl}

Who can sign in (on a page of the local provider, without a password):
${table.join("\n")}

Mails that it sends:  http://127.0.0.1:${ports.mails}
Logs:  ${files.logs}
Stop with Ctrl-C.`);
}

/** A dead database is noticed even while nobody uses it. */
async function watchDatabase() {
  while (!stopping) {
    await sleep(1000);
    if (!stopping && !cluster.isAlive()) await endWith(cluster.explainDeath().message);
  }
}

async function start() {
  requireNode();
  if (process.env.NODE_ENV === "production") {
    throw new Failure(
      "npm start is the demo; in production run  npm run serve  and  npm run work.",
    );
  }
  holdsLock = tryLock(files.lock);
  if (!holdsLock) yieldToOther();
  await endLeftovers();
  await ensurePackages();
  await goOn();
  mkdirSync(files.logs, { recursive: true });
  const { ports, release } = await holdPorts();
  const publicUrl = `http://127.0.0.1:${isDev ? ports.client : ports.web}`;
  const secrets = readSecrets();
  opening = openCluster({
    folder: inData("cluster"),
    durable: true,
    firstPort: FIRST_PORT + 100,
    log: console.log,
  });
  cluster = await opening;
  await goOn();
  void watchDatabase();
  await build();
  if (isReset) rmSync(files.seeded, { force: true });
  const env = applicationEnvironment({
    mode: "development",
    cluster,
    database: DATABASE,
    ports,
    publicUrl,
    secrets,
    dataDir: files.app,
  });
  await fillDatabase(env);
  await followIssuer(ports);
  await release();
  children = new Children({ logFolder: files.logs, show: isDev, onDeath: endWith });
  startProcesses({ env, ports, publicUrl, secrets });
  writeJson(files.running, { address: publicUrl, children: children.identities() });
  await waitUntilReady([
    `http://127.0.0.1:${ports.web}/readyz`,
    `http://localhost:${ports.signIn}/.well-known/openid-configuration`,
    `http://127.0.0.1:${ports.mails}/messages`,
    publicUrl,
  ]);
  await printWelcome({ publicUrl, ports });
}

for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"]) {
  process.on(signal, async () => {
    if (!stopping) console.log("\nStopping");
    await stopAll();
    process.exit(0);
  });
}

try {
  await start();
} catch (error) {
  const explained = explainFileError(error, dataFolder);
  if (!(explained instanceof Failure)) console.error(explained);
  await endWith(explained instanceof Failure ? explained.message : "the start failed; see above");
}
