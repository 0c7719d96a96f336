import { spawnSync } from "node:child_process";
import { randomBytes } from "node:crypto";
import {
  chmodSync,
  chownSync,
  existsSync,
  lstatSync,
  mkdirSync,
  readFileSync,
  renameSync,
  rmSync,
  truncateSync,
  writeFileSync,
} from "node:fs";
import { join, resolve } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { isRoot } from "./apt.mjs";
import { diskFull, explainFileError, Failure, notWritable } from "./failure.mjs";
import { withLock } from "./lock.mjs";
import { findFreePort, isPortFree } from "./ports.mjs";
import { findPostgresPrograms } from "./postgres-programs.mjs";
import { commandLineOf, isAlive, run } from "./processes.mjs";
import { projectFolder, shortHash } from "./project.mjs";

const HOST = "127.0.0.1";
const SUPERUSER = "postgres";
const OWNER = "dinward_owner";
const APPLICATION = "dinward_app";
const EXTENSIONS = ["btree_gist", "pgcrypto"];
const LOG_LIMIT_BYTES = 20_000_000;

/**
 * Opens the PostgreSQL cluster that belongs to `folder`, making and starting it as needed.
 *
 * PostgreSQL refuses to run as root, so for root everything in the cluster's home belongs to an
 * unprivileged account. `durable: false` gives up surviving a power cut, for throw-away test data.
 */
export async function openCluster({ folder, durable, firstPort, log = () => {} }) {
  const programs = await findPostgresPrograms();
  try {
    mkdirSync(folder, { recursive: true });
    return await withLock(join(folder, "cluster.lock"), async () => {
      const account = await findAccount();
      const home = await prepareHome(resolve(folder), account, log);
      const settings = readSettings(folder, home);
      const context = { ...settings, home, account, folder, durable, programs };
      if (!existsSync(join(home, "pg"))) await initialise(context, log);
      await start(context, firstPort);
      const cluster = describe(context);
      await prepareRoles(cluster, context);
      return cluster;
    });
  } catch (error) {
    throw explainFileError(error, folder);
  }
}

/** The account that runs PostgreSQL: nobody but ourselves, unless we are root. */
async function findAccount() {
  if (!isRoot) return {};
  for (const name of ["postgres", "dinward-db"]) {
    const account = await lookUpAccount(name);
    if (account) return account;
  }
  await run("useradd", [
    "--system",
    "--no-create-home",
    "--shell",
    "/usr/sbin/nologin",
    "dinward-db",
  ]);
  const made = await lookUpAccount("dinward-db");
  if (made) return made;
  throw new Failure("No unprivileged account for PostgreSQL: run  useradd --system dinward-db");
}

async function lookUpAccount(name) {
  const uid = await run("id", ["-u", name]);
  const gid = await run("id", ["-g", name]);
  return uid.code === 0 && gid.code === 0
    ? { uid: Number(uid.output), gid: Number(gid.output) }
    : null;
}

/**
 * Runs one of PostgreSQL's programs as its account, from a folder that any account may enter. Apart
 * from our process group: Ctrl-C must not cut a start or a stop of the database in half.
 */
function runAsAccount({ programs, account }, program, args) {
  const options = { cwd: "/", env: smallEnvironment(), detached: true, ...account };
  return run(join(programs.folder, program), args, options);
}

function smallEnvironment() {
  return { PATH: "/usr/local/bin:/usr/bin:/bin", LC_ALL: "C", TZ: "UTC" };
}

/**
 * The cluster's home: inside the data folder if the account can get there, else under /var/tmp,
 * for a project often lies under a home folder that is closed to other accounts.
 */
async function prepareHome(folder, account, log) {
  const inside = join(folder, "home");
  if (makeHome(inside, account)) return inside;
  const outside = `/var/tmp/dinward-${shortHash(`${projectFolder}\n${folder}`)}`;
  if (!existsSync(join(folder, "cluster.json")) && existsSync(outside) && isOwn(outside, account)) {
    log(`The data folder is new: removing the database that an earlier one left in ${outside}`);
    await stopLeftover(outside);
    rmSync(outside, { recursive: true, force: true });
  }
  if (!makeHome(outside, account)) throw notWritable(outside);
  return outside;
}

/** Whether `home` is now a folder of the account's own that it can enter and write. */
function makeHome(home, account) {
  const existed = existsSync(home);
  try {
    mkdirSync(home, { recursive: true, mode: 0o700 });
    if (existed && !isOwn(home, account)) return false;
    if (account.uid !== undefined) chownSync(home, account.uid, account.gid);
    chmodSync(home, 0o700);
  } catch (error) {
    if (error.code === "ENOSPC") throw error;
    if (!existed) rmSync(home, { recursive: true, force: true });
    return false;
  }
  const test = spawnSync("/bin/sh", ["-c", 'cd "$1" && test -w .', "sh", home], {
    cwd: "/",
    env: smallEnvironment(),
    ...account,
  });
  if (test.status === 0) return true;
  if (!existed) rmSync(home, { recursive: true, force: true });
  return false;
}

/** Under /var/tmp anybody could lay out a folder of our name: only the account's own one counts. */
function isOwn(home, account) {
  const facts = lstatSync(home);
  return facts.isDirectory() && facts.uid === (account.uid ?? process.getuid?.() ?? facts.uid);
}

async function stopLeftover(home) {
  const pid = postmasterPid(home);
  if (!pid) return;
  process.kill(pid, "SIGQUIT");
  for (let tries = 0; isAlive(pid) && tries < 100; tries += 1) await sleep(50);
}

function readSettings(folder, home) {
  const file = join(folder, "cluster.json");
  if (existsSync(file)) return JSON.parse(readFileSync(file, "utf8"));
  if (existsSync(join(home, "pg"))) {
    throw new Failure(
      `${file} with the database's passwords is gone: restore it, or remove ${home}.`,
    );
  }
  const password = () => randomBytes(24).toString("base64url");
  const settings = {
    superPassword: password(),
    ownerPassword: password(),
    appPassword: password(),
  };
  saveSettings(folder, settings);
  return settings;
}

function saveSettings(folder, settings) {
  const file = join(folder, "cluster.json");
  const draft = `${file}.new`;
  writeFileSync(draft, `${JSON.stringify(settings, null, 2)}\n`, { mode: 0o600 });
  renameSync(draft, file);
}

async function initialise(context, log) {
  const { home, account, durable, superPassword } = context;
  log("Making the database cluster");
  const fresh = join(home, "pg.new"); // renamed when whole, so that a killed run leaves no half
  rmSync(fresh, { recursive: true, force: true });
  const passwordFile = join(home, "password");
  writeForAccount(passwordFile, superPassword, account);
  const result = await runAsAccount(context, "initdb", [
    `--pgdata=${fresh}`,
    `--username=${SUPERUSER}`,
    `--pwfile=${passwordFile}`,
    "--auth=scram-sha-256",
    "--encoding=UTF8",
    "--lc-collate=C", // screens sort by the reader's language, the database by code point
    `--lc-ctype=${process.platform === "darwin" ? "en_US.UTF-8" : "C.UTF-8"}`,
    ...(durable ? [] : ["--no-sync"]),
  ]);
  rmSync(passwordFile, { force: true });
  if (result.code !== 0) throw explainDatabaseError(result.output + result.errors, home);
  renameSync(fresh, join(home, "pg"));
}

function writeForAccount(file, text, account) {
  writeFileSync(file, text, { mode: 0o600 });
  if (account.uid !== undefined) chownSync(file, account.uid, account.gid);
}

async function start(context, firstPort) {
  const { home, account, folder } = context;
  const data = join(home, "pg");
  if (postmasterPid(home)) {
    // Left running by a start that was killed: what it listens on is what counts.
    context.port = Number(readFileSync(join(data, "postmaster.pid"), "utf8").split("\n")[3]);
    return;
  }
  rmSync(join(data, "postmaster.pid"), { force: true });
  const logFile = join(home, "postgres.log");
  keepLogShort(logFile);
  for (let attempt = 0; ; attempt += 1) {
    if (!context.port || !(await isPortFree(context.port))) {
      context.port = await findFreePort(firstPort + attempt);
      saveSettings(folder, settingsOf(context));
    }
    writeForAccount(join(data, "postgresql.conf"), configuration(context), account);
    const result = await runAsAccount(context, "pg_ctl", [
      "start",
      "--wait",
      "--silent",
      "--timeout=90",
      `--pgdata=${data}`,
      `--log=${logFile}`,
    ]);
    if (result.code === 0) return;
    const report = lastLines(logFile) + result.output + result.errors;
    const lostThePort = /address already in use/i.test(report);
    if (!lostThePort || attempt >= 4) throw explainDatabaseError(report, home);
    context.port = undefined;
  }
}

function settingsOf({ superPassword, ownerPassword, appPassword, port }) {
  return { superPassword, ownerPassword, appPassword, port };
}

function configuration({ port, durable }) {
  const lines = [
    `listen_addresses = '${HOST}'`,
    `port = ${port}`,
    "unix_socket_directories = ''", // passwords over loopback only, and no path that can be too long
    "password_encryption = 'scram-sha-256'",
    "max_connections = 200",
    "shared_buffers = '128MB'",
    "timezone = 'UTC'",
    "log_timezone = 'UTC'",
    "datestyle = 'iso, ymd'",
    "log_line_prefix = '%m [%p] %q%u@%d '",
    "log_checkpoints = off",
  ];
  if (!durable) {
    lines.push(
      "fsync = off",
      "synchronous_commit = off",
      "full_page_writes = off",
      "autovacuum_naptime = '10min'",
      "max_wal_size = '4GB'",
      "checkpoint_timeout = '1h'",
    );
  }
  return `# Written by Dinward at every start.\n${lines.join("\n")}\n`;
}

/** The running server's process number; a number that meanwhile names another program is not one. */
function postmasterPid(home) {
  try {
    const pid = Number(readFileSync(join(home, "pg", "postmaster.pid"), "utf8").split("\n")[0]);
    if (!isAlive(pid)) return null;
    const commandLine = commandLineOf(pid);
    return commandLine === null || commandLine.includes(home) ? pid : null;
  } catch {
    return null;
  }
}

function keepLogShort(file) {
  try {
    if (lstatSync(file).size > LOG_LIMIT_BYTES) truncateSync(file);
  } catch (error) {
    if (error.code !== "ENOENT") throw error;
  }
}

function lastLines(file) {
  try {
    return readFileSync(file, "utf8").split("\n").slice(-20).join("\n");
  } catch {
    return "";
  }
}

/** One line for what PostgreSQL says in many. */
export function explainDatabaseError(report, home) {
  if (/no space left on device|disk quota exceeded/i.test(report)) return diskFull(home);
  if (/address already in use/i.test(report)) {
    return new Failure("The database found no free port: close what uses the ports and try again.");
  }
  if (/permission denied|read-only file system/i.test(report)) return notWritable(home);
  const lines = report.split("\n").filter((line) => /(FATAL|PANIC|ERROR|error):/.test(line));
  const reason = (lines.at(-1) ?? report.trim().split("\n").at(-1) ?? "").replace(
    /^.*?(?=[A-Z]+:)/,
    "",
  );
  return new Failure(
    `The database did not start: ${reason.trim()} (log: ${join(home, "postgres.log")})`,
  );
}

async function prepareRoles(cluster, { ownerPassword, appPassword }) {
  // The owner bypasses row security: backups must be whole, and set-up crosses organizations.
  const role = (name, password, options) => `
    DO $$ BEGIN
      IF NOT EXISTS (SELECT FROM pg_roles WHERE rolname = '${name}') THEN CREATE ROLE ${name}; END IF;
    END $$;
    ALTER ROLE ${name} LOGIN NOSUPERUSER NOCREATEDB NOCREATEROLE NOREPLICATION ${options} PASSWORD '${password}';`;
  await cluster.sql(
    role(OWNER, ownerPassword, "BYPASSRLS") + role(APPLICATION, appPassword, "NOBYPASSRLS"),
  );
}

function describe(context) {
  const { home, port, programs } = context;
  const passwords = {
    super: [SUPERUSER, context.superPassword],
    owner: [OWNER, context.ownerPassword],
    app: [APPLICATION, context.appPassword],
  };

  /** Runs SQL and gives the rows back as lines of «|»-separated text. */
  async function sql(text, { database = "postgres", role = "super" } = {}) {
    const [user, password] = passwords[role];
    const result = await run(
      join(programs.folder, "psql"),
      [
        "-X",
        "-q",
        "-A",
        "-t",
        "-v",
        "ON_ERROR_STOP=1",
        "-h",
        HOST,
        "-p",
        String(port),
        "-U",
        user,
        "-d",
        database,
      ],
      {
        env: { ...smallEnvironment(), PGPASSWORD: password, PGCONNECT_TIMEOUT: "10" },
        input: text,
      },
    );
    if (result.code !== 0) throw explainSqlError(result.errors, home);
    return result.output.split("\n").filter((line) => line !== "");
  }

  return {
    host: HOST,
    port,
    home,
    version: programs.version,
    programsFolder: programs.folder,
    sql,

    /** Connection address of a database for the role "app", "owner" or "super". */
    url(role, database) {
      const [user, password] = passwords[role];
      return `postgres://${user}:${password}@${HOST}:${port}/${database}`;
    },

    isAlive: () => postmasterPid(home) !== null,

    /** The one line for a server that is found dead. */
    explainDeath() {
      const logFile = join(home, "postgres.log");
      if (/no space left on device/i.test(lastLines(logFile))) return diskFull(home);
      return new Failure(`The database ended unexpectedly (log: ${logFile})`);
    },

    async hasDatabase(name) {
      return (await sql(`SELECT 1 FROM pg_database WHERE datname = '${name}'`)).length > 0;
    },

    /** A new database of the owner's, empty with the extensions or a copy of `template`. */
    async createDatabase(name, { template } = {}) {
      const source = template ?? "template0";
      await sql(`CREATE DATABASE ${name} OWNER ${OWNER} TEMPLATE ${source} ENCODING 'UTF8';
        REVOKE ALL ON DATABASE ${name} FROM PUBLIC;
        GRANT CONNECT, TEMPORARY ON DATABASE ${name} TO ${APPLICATION};`);
      if (template) return;
      const extensions = EXTENSIONS.map((extension) => `CREATE EXTENSION ${extension};`).join("\n");
      await sql(extensions, { database: name });
    },

    async dropDatabase(name) {
      await sql(`DROP DATABASE IF EXISTS ${name} WITH (FORCE)`);
    },

    async stop() {
      if (postmasterPid(home) === null) return;
      const stop = (mode) =>
        runAsAccount(context, "pg_ctl", [
          "stop",
          "--wait",
          "--silent",
          "--timeout=30",
          `--mode=${mode}`,
          `--pgdata=${join(home, "pg")}`,
        ]);
      const result = await stop("fast");
      if (result.code !== 0) await stop("immediate");
    },

    /** Stops the cluster and removes everything it held. */
    async destroy() {
      await this.stop();
      rmSync(home, { recursive: true, force: true });
      rmSync(context.folder, { recursive: true, force: true });
    },
  };
}

function explainSqlError(errors, home) {
  if (/no space left on device/i.test(errors)) return diskFull(home);
  if (/connection .*failed|could not connect/i.test(errors)) {
    return new Failure(`The database does not answer (log: ${join(home, "postgres.log")}).`);
  }
  return new Error(`the database refused a statement: ${errors.trim()}`);
}
