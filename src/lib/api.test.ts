// @vitest-environment jsdom
import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { ApiError, api, type ConnectionState, connectionEvents, noReply } from "./api";

const fetchStub = vi.fn<typeof fetch>();
const text = { parse: (value: unknown) => String(value) };
let states: ConnectionState[] = [];
let unsubscribe = () => {};

beforeEach(() => {
  vi.stubGlobal("fetch", fetchStub);
  connectionEvents.tell("ok");
  states = [];
  unsubscribe = connectionEvents.subscribe((state) => states.push(state));
});
afterEach(() => {
  unsubscribe();
  fetchStub.mockReset();
  vi.unstubAllGlobals();
});

const problem = (status: number, body: object) =>
  new Response(JSON.stringify(body), {
    status,
    headers: { "content-type": "application/problem+json" },
  });
const sent = () => {
  const [url, init] = fetchStub.mock.calls[0] ?? [];
  return { url, init, headers: new Headers(init?.headers) };
};

test("a query leaves out what is not set, and the reply passes its schema", async () => {
  fetchStub.mockResolvedValue(Response.json("fine"));
  await expect(
    api.get("/workers", {
      schema: text,
      query: { search: "Ó Riada", crew: null, kind: ["a", "b"] },
    }),
  ).resolves.toBe("fine");
  expect(sent().url).toBe("/api/workers?search=%C3%93+Riada&kind=a&kind=b");
});

test("a change carries its key, its revision and the token against forgery", async () => {
  // biome-ignore lint/suspicious/noDocumentCookie: what the server sets
  document.cookie = "dinward.csrf=token%3D1";
  fetchStub.mockImplementation(async () => new Response(null, { status: 204 }));
  const options = { schema: noReply, body: { a: 1 }, ifMatch: '"3"', idempotencyKey: "one-change" };
  await api.post("/shifts", options);
  await api.post("/shifts", options);
  const keys = fetchStub.mock.calls.map(([, init]) =>
    new Headers(init?.headers).get("idempotency-key"),
  );
  expect(keys).toEqual(["one-change", "one-change"]);
  expect(sent().headers.get("x-csrf-token")).toBe("token=1");
  expect(sent().headers.get("if-match")).toBe('"3"');
  expect(sent().init?.body).toBe('{"a":1}');
});

test("a refusal becomes an error with its code, its issues by path and the whole body", async () => {
  const body = {
    title: "stale",
    code: "stale",
    params: {},
    issues: [{ path: ["tasks", 2, "durationMin"], code: "too_small", params: { minimum: 0 } }],
    current: { number: 2 },
  };
  fetchStub.mockResolvedValue(problem(412, body));
  const error = await api
    .put("/shifts/1", { schema: noReply, body: {} })
    .catch((caught: unknown) => caught);
  expect(error).toBeInstanceOf(ApiError);
  expect(error).toMatchObject({
    status: 412,
    code: "stale",
    issues: [{ path: "tasks.2.durationMin", code: "too_small", params: { minimum: 0 } }],
    body: { current: { number: 2 } },
  });
});

test("a lost session is told to the page, but not where the question was who is there", async () => {
  fetchStub.mockImplementation(async () =>
    problem(401, { code: "signed-out", title: "signed-out" }),
  );
  await api.get("/session", { schema: text, asksWhoIsThere: true }).catch(() => null);
  expect(states).toEqual(["ok"]);
  await api.get("/workers", { schema: text }).catch(() => null);
  expect(states).toEqual(["ok", "session-expired"]);
});

test("that nothing is granted any more is told as such, not as a lost sign-in", async () => {
  for (const code of ["access-taken", "access-ended"]) {
    fetchStub.mockResolvedValueOnce(problem(401, { code, title: code }));
    await api.get("/workers", { schema: text }).catch(() => null);
  }
  expect(states).toEqual(["ok", "access-over"]);
});

test("a lost connection is told, and told again when it is back", async () => {
  fetchStub.mockRejectedValueOnce(new TypeError("Failed to fetch"));
  await expect(api.get("/workers", { schema: text })).rejects.toMatchObject({
    status: 0,
    code: "no-connection",
  });
  fetchStub.mockResolvedValue(Response.json("back"));
  await api.get("/workers", { schema: text });
  expect(states).toEqual(["ok", "offline", "ok"]);
});

test("a server without its database is told as well, and that it is back", async () => {
  fetchStub.mockResolvedValueOnce(problem(503, { code: "database-down", title: "database-down" }));
  await expect(api.get("/workers", { schema: text })).rejects.toMatchObject({ status: 503 });
  expect(connectionEvents.now()).toBe("unavailable");
  fetchStub.mockResolvedValue(Response.json("back"));
  await api.get("/workers", { schema: text });
  expect(states).toEqual(["ok", "unavailable", "ok"]);
});

test("an aborted request is no lost connection", async () => {
  const aborter = new AbortController();
  aborter.abort();
  fetchStub.mockRejectedValue(new DOMException("Aborted", "AbortError"));
  await expect(api.get("/x", { schema: text, signal: aborter.signal })).rejects.toMatchObject({
    name: "AbortError",
  });
  expect(states).toEqual(["ok"]);
});
