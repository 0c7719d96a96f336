import { chmodSync, existsSync, mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { createServer, type Server } from "node:net";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { findFreePort, randomPort } from "../../scripts/lib/ports.mjs";
import { buildApp } from "../setup/app";
import { projectFolder, type RunningProcess, startProcess } from "../setup/processes";
import type { Person } from "../setup/services";
import { Visitor } from "../setup/visitor";

const dataFolder = mkdtempSync(join(tmpdir(), "dinward-start-"));
const script = [join(projectFolder, "scripts", "start.mjs")];
let port: number;

function startDemo(...flags: string[]): RunningProcess {
  return startWith({ PORT: String(port) }, ...flags);
}

function startWith(more: Record<string, string>, ...flags: string[]): RunningProcess {
  const { NODE_ENV, VITEST, PORT, ...env } = process.env;
  const environment = { ...env, DINWARD_DATA: dataFolder, ...more };
  return startProcess("start", [...script, ...flags], environment);
}

async function waitForLine(demo: RunningProcess, pattern: RegExp): Promise<string> {
  for (;;) {
    const line = pattern.exec(demo.output());
    if (line) return line[0];
    if (demo.hasEnded()) throw new Error(`it ended without «${pattern.source}»:\n${demo.output()}`);
    await sleep(50);
  }
}

/** Living processes among those given, in their groups, or with the data folder in the command line. */
function processesOf(pids: number[]): string[] {
  const found: string[] = [];
  for (const pid of readdirSync("/proc").filter((name) => /^\d+$/.test(name))) {
    try {
      const commandLine = readFileSync(`/proc/${pid}/cmdline`, "utf8").replaceAll("\0", " ");
      const stat = readFileSync(`/proc/${pid}/stat`, "utf8");
      const [state, , group] = stat.slice(stat.lastIndexOf(")") + 2).split(" ");
      const isListed = pids.includes(Number(pid)) || pids.includes(Number(group));
      if (state !== "Z" && (isListed || commandLine.includes(dataFolder))) found.push(commandLine);
    } catch {
      // It ended while we looked.
    }
  }
  return found;
}

function runningPids(): number[] {
  const running = JSON.parse(readFileSync(join(dataFolder, "running.json"), "utf8"));
  return running.children.map((child: { pid: number }) => child.pid);
}

const readPeople = (): Person[] =>
  JSON.parse(readFileSync(join(dataFolder, "app", "demo-people.json"), "utf8"));

async function signInAsOfficer(at = port) {
  const officer = readPeople().find(({ roles }) => roles.includes("officer"));
  if (!officer) throw new Error("the demo has no officer");
  const visitor = new Visitor();
  const url = `http://127.0.0.1:${at}`;
  const { url: end } = await visitor.signIn(`${url}/api/auth/sign-in`, officer.sub);
  expect(end.pathname).toBe("/");
  const answer = await visitor.request(`${url}/api/session`);
  const session = (await answer.json()) as { user: { id: string; name: string } };
  expect(session.user.name).toBe(officer.name);
  return session.user;
}

beforeAll(async () => {
  chmodSync(dataFolder, 0o755); // the database's account has to get in
  await buildApp();
  port = await findFreePort(randomPort());
});

afterAll(() => rmSync(dataFolder, { recursive: true, force: true }));

describe("npm start", () => {
  let userId: string;

  test("brings an empty data folder to a sign-in, and stops without a process left", async () => {
    const demo = startDemo();
    await waitForLine(demo, /Stop with Ctrl-C/);
    expect(demo.output()).toContain(`Dinward is ready:  http://127.0.0.1:${port}`);
    for (const { name } of readPeople()) expect(demo.output()).toContain(name);
    userId = (await signInAsOfficer()).id;
    const pids = runningPids();
    expect(pids).toHaveLength(4);
    expect(processesOf(pids).length).toBeGreaterThan(4);

    demo.signal("SIGINT");
    expect(await demo.ended).toBe(0);
    expect(processesOf(pids)).toEqual([]);
    expect(existsSync(join(dataFolder, "start.lock"))).toBe(false);
  });

  test("twice at once: the second says where the first runs, and the first goes on with its data", async () => {
    const first = startDemo();
    await waitForLine(first, /Stop with Ctrl-C/);
    expect(first.output()).not.toContain("Filling the demo");
    const second = startDemo();
    expect(await second.ended).toBe(0);
    expect(second.output()).toContain(`is running already on http://127.0.0.1:${port}`);

    const reset = startDemo("--reset");
    expect(await reset.ended).toBe(1);
    expect(reset.output()).toContain("stop it first");

    expect((await signInAsOfficer()).id).toBe(userId);
    await first.stop();
  });

  test("two started in the same moment: one runs, the other leaves it alone", async () => {
    const both = [startDemo(), startDemo()];
    const yielded = await Promise.race(both.map(async (demo) => [demo, await demo.ended] as const));
    const [other] = both.filter((demo) => demo !== yielded[0]);
    expect(yielded[1]).toBe(0);
    expect(yielded[0].output()).toContain("this start leaves it alone");
    await waitForLine(other!, /Stop with Ctrl-C/);
    await signInAsOfficer();
    await other!.stop();
  });

  test("killed outright: the next start clears up after it", async () => {
    const killed = startDemo();
    await waitForLine(killed, /Stop with Ctrl-C/);
    const pids = runningPids();
    killed.signal("SIGKILL");
    await killed.ended;

    const next = startDemo();
    await waitForLine(next, /Stop with Ctrl-C/);
    const { children } = JSON.parse(readFileSync(join(dataFolder, "running.json"), "utf8"));
    for (const { pid } of children) expect(pids).not.toContain(pid);
    await signInAsOfficer();

    process.kill(children.find(({ name }: { name: string }) => name === "work").pid, "SIGKILL");
    expect(await next.ended).toBe(1);
    expect(next.output()).toMatch(/^dinward: The work process ended unexpectedly/m);
    expect(processesOf(runningPidsOf(children))).toEqual([]);
  });

  test("a dead database is one clear line, and nothing stays", async () => {
    const demo = startDemo();
    await waitForLine(demo, /Stop with Ctrl-C/);
    const pids = runningPids();
    process.kill(databasePid(), "SIGKILL");
    expect(await demo.ended).toBe(1);
    const lines = demo
      .output()
      .split("\n")
      .filter((line) => line.startsWith("dinward: "));
    expect(lines).toHaveLength(1);
    expect(processesOf(pids)).toEqual([]);
  });

  test("a port in use is one clear line", async () => {
    const blocker = createServer().listen(port, "127.0.0.1");
    const demo = startDemo();
    expect(await demo.ended).toBe(1);
    expect(demo.output()).toBe(
      `dinward: Port ${port} for the application is in use by another program: choose another with  PORT=… npm start.\n`,
    );
    await new Promise((done) => blocker.close(done));
  });

  test("remembered ports that other programs took: the next start takes others, keeps them, and who was bound signs in", async () => {
    const portsFile = join(dataFolder, "ports.json");
    const readPorts = (): Record<string, number> => JSON.parse(readFileSync(portsFile, "utf8"));
    const before = readPorts();
    const blockers = await Promise.all(
      Object.values(before).map(
        (taken) =>
          new Promise<Server>((done) => {
            const blocker = createServer().listen(taken, "127.0.0.1", () => done(blocker));
          }),
      ),
    );
    const demo = startWith({});
    await waitForLine(demo, /Stop with Ctrl-C/);
    const moved = readPorts();
    for (const [name, taken] of Object.entries(before)) expect(moved[name], name).not.toBe(taken);
    expect(demo.output()).toContain(`Dinward is ready:  http://127.0.0.1:${moved.web}`);
    expect((await signInAsOfficer(moved.web)).id).toBe(userId);
    await demo.stop();

    await Promise.all(blockers.map((blocker) => new Promise((done) => blocker.close(done))));
    const next = startWith({});
    await waitForLine(next, /Stop with Ctrl-C/);
    expect(readPorts()).toEqual(moved);
    await next.stop();
  });
});

const runningPidsOf = (children: { pid: number }[]) => children.map(({ pid }) => pid);

function databasePid(): number {
  const home = join(dataFolder, "cluster", "home");
  return Number(readFileSync(join(home, "pg", "postmaster.pid"), "utf8").split("\n")[0]);
}
