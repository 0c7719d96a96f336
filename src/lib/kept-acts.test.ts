import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { hasWordsToPassOn, keptActsOf } from "./kept-acts";
import { countUnsent, forgetKept } from "./kept-list";

type Answer = { status: number; body: unknown } | "no-connection";

let answers: Answer[] = [];
let sent: { url: string; headers: Headers; body: string | null }[] = [];
let userId = "";

const session = (id: string | null): Answer => ({
  status: 200,
  body: { user: id === null ? null : { id } },
});
const stale = (state: string): Answer => ({
  status: 412,
  body: {
    code: "stale",
    current: { state, revision: 7, steps: [{ authorName: "S. Ferrand", text: "Seen to" }] },
  },
});

beforeEach(() => {
  userId = crypto.randomUUID();
  answers = [];
  sent = [];
  localStorage.clear();
  vi.stubGlobal("fetch", async (url: string, init: RequestInit) => {
    const answer = answers.shift() ?? "no-connection";
    if (answer === "no-connection") throw new TypeError("failed to fetch");
    sent.push({ url, headers: new Headers(init.headers), body: (init.body as string) ?? null });
    return new Response(JSON.stringify(answer.body), { status: answer.status });
  });
});
afterEach(() => vi.unstubAllGlobals());

function keep(kind: "mark-done" | "cannot" = "mark-done", revision = 3): string {
  const acts = keptActsOf(userId);
  const { key } = acts.hold({
    path: "/findings/f/steps",
    body: { kind, text: "" },
    revision,
    words: { kind, findingId: "f", workerName: "D. Tavernor", text: "" },
  });
  acts.release(key, true);
  return key;
}

test("an act goes under its own key and with the revision it saw, and then waits no longer", async () => {
  const key = keep();
  answers = [session(userId), { status: 200, body: { revision: 4 } }];
  expect(await keptActsOf(userId).sendAll()).toMatchObject([{ key, outcome: "sent" }]);
  expect(sent[1]?.headers.get("idempotency-key")).toBe(key);
  expect(sent[1]?.headers.get("if-match")).toBe("3");
  expect(countUnsent(localStorage, userId)).toBe(0);
});

test("without a connection it waits", async () => {
  keep();
  expect(await keptActsOf(userId).sendAll()).toEqual([]);
  expect(keptActsOf(userId).list()).toMatchObject([{ state: "unsent" }]);
});

test.each([null, "somebody-else"])("nothing is sent where %s is signed in", async (id) => {
  keep();
  answers = [session(id)];
  expect(await keptActsOf(userId).sendAll()).toEqual([]);
  expect(sent).toHaveLength(1);
  expect(keptActsOf(userId).list()).toHaveLength(1);
  expect(keptActsOf("somebody-else").list()).toEqual([]);
});

test("what another changed meanwhile is a conflict, and goes only when chosen, as another act", async () => {
  const key = keep();
  answers = [session(userId), stale("in-hand")];
  await keptActsOf(userId).sendAll();
  expect(keptActsOf(userId).list()).toMatchObject([
    { state: "conflict", stands: { state: "in-hand", revision: 7, byName: "S. Ferrand" } },
  ]);
  answers = [session(userId)];
  expect(await keptActsOf(userId).sendAll()).toEqual([]);

  keptActsOf(userId).again(key);
  answers = [session(userId), { status: 200, body: { revision: 8 } }];
  sent = [];
  await keptActsOf(userId).sendAll();
  expect(sent[1]?.headers.get("if-match")).toBe("7");
  expect(sent[1]?.headers.get("idempotency-key")).not.toBe(key);
});

test("words about an order that was closed meanwhile can go on as a comment, where that may be made", async () => {
  const acts = keptActsOf(userId);
  const { key } = acts.hold({
    path: "/findings/f/steps",
    body: { kind: "cannot", text: "No muffs left" },
    revision: 3,
    words: { kind: "cannot", findingId: "f", workerName: "D. Tavernor", text: "No muffs left" },
  });
  acts.release(key, true);
  const closed = (comment: boolean): Answer => {
    const { status, body } = stale("closed") as { status: number; body: { current: object } };
    return { status, body: { ...body, current: { ...body.current, can: { comment } } } };
  };
  answers = [session(userId), closed(true)];
  await acts.sendAll();
  const [stands] = acts.list();
  expect(stands && hasWordsToPassOn(stands)).toBe(true);
  acts.asComment(key);
  expect(acts.list()).toMatchObject([
    { state: "unsent", revision: 7, words: { kind: "comment", text: "No muffs left" } },
  ]);
  answers = [session(userId), closed(false)];
  await acts.sendAll();
  const [again] = acts.list();
  expect(again && hasWordsToPassOn(again)).toBe(false);
  acts.asComment(again?.key ?? "");
  answers = [session(userId), { status: 200, body: { revision: 8 } }];
  sent = [];
  await acts.sendAll();
  expect(sent[1]?.body).toBe(JSON.stringify({ kind: "comment", text: "No muffs left" }));
  expect(sent[1]?.headers.get("if-match")).toBe("7");
  expect(acts.list()).toEqual([]);
});

test("what somebody has done already is not done again", async () => {
  keep();
  answers = [session(userId), stale("done")];
  expect(await keptActsOf(userId).sendAll()).toMatchObject([{ outcome: "already-done" }]);
  expect(keptActsOf(userId).list()).toEqual([]);
});

test("one's own earlier act on the same order is no conflict", async () => {
  keep("cannot");
  keep("mark-done");
  answers = [
    session(userId),
    { status: 200, body: { revision: 4 } },
    { status: 200, body: { revision: 5 } },
  ];
  expect(await keptActsOf(userId).sendAll()).toHaveLength(2);
  expect(sent[2]?.headers.get("if-match")).toBe("4");
});

test("what is refused stays until it is dropped", async () => {
  const key = keep();
  answers = [session(userId), { status: 409, body: { code: "finding-closed" } }];
  await keptActsOf(userId).sendAll();
  expect(keptActsOf(userId).list()).toMatchObject([{ state: "refused", code: "finding-closed" }]);
  keptActsOf(userId).drop(key);
  expect(keptActsOf(userId).list()).toEqual([]);
});

test("at sign-out one person's go, and another's stay", () => {
  keep();
  const first = userId;
  userId = crypto.randomUUID();
  keep();
  forgetKept(localStorage, first);
  expect(countUnsent(localStorage, first)).toBe(0);
  expect(countUnsent(localStorage, userId)).toBe(1);
});

test("what is taken back before it is sent is not sent", async () => {
  const key = keep();
  keptActsOf(userId).drop(key);
  expect(countUnsent(localStorage, userId)).toBe(0);
  answers = [session(userId)];
  expect(await keptActsOf(userId).sendAll()).toEqual([]);
});

test("what is taken back while it is on its way is undone behind it", async () => {
  const key = keep();
  answers = [
    session(userId),
    { status: 200, body: { revision: 4 } },
    { status: 200, body: { revision: 5 } },
  ];
  const acts = keptActsOf(userId);
  const sending = acts.sendAll();
  while (sent.length < 2) await Promise.resolve();
  acts.drop(key);
  expect(acts.list()).toEqual([]);
  await sending;
  expect(sent[2]?.headers.get("if-match")).toBe("4");
  expect(JSON.parse(sent[2]?.body ?? "")).toEqual({ kind: "undo" });
  expect(countUnsent(localStorage, userId)).toBe(0);
});
