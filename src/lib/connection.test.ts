// @vitest-environment jsdom
import { QueryObserver } from "@tanstack/react-query";
import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { api, connectionEvents } from "./api";
import { watchConnection } from "./connection";
import { createQueryClient } from "./query-client";

let isUp = true;
let asked: string[] = [];
let stop: () => void;
const client = createQueryClient();

beforeEach(() => {
  vi.useFakeTimers();
  isUp = true;
  asked = [];
  vi.stubGlobal("fetch", async (address: string) => {
    asked.push(address);
    if (!isUp) throw new TypeError("not reached");
    return new Response(JSON.stringify({ address }), { status: 200 });
  });
  stop = watchConnection(client);
});
afterEach(() => {
  stop();
  client.clear();
  connectionEvents.tell("ok");
  vi.useRealTimers();
  vi.unstubAllGlobals();
});

const probes = () => asked.filter((address) => address === "/api/session").length;
const goAway = () => {
  isUp = false;
  connectionEvents.tell("offline");
};

test("asks again from one second on, less and less often, and no more once it answered", async () => {
  goAway();
  await vi.advanceTimersByTimeAsync(999);
  expect(probes()).toBe(0);
  await vi.advanceTimersByTimeAsync(1);
  expect(probes()).toBe(1);
  await vi.advanceTimersByTimeAsync(1_500);
  expect(probes()).toBe(2);
  await vi.advanceTimersByTimeAsync(60_000);
  const before = probes();
  await vi.advanceTimersByTimeAsync(30_000);
  expect(probes() - before).toBe(3);
  isUp = true;
  await vi.advanceTimersByTimeAsync(10_000);
  expect(connectionEvents.now()).toBe("ok");
  const answered = probes();
  await vi.advanceTimersByTimeAsync(60_000);
  expect(probes()).toBe(answered);
});

test("a network that is back, or a page that is looked at, is a reason to ask at once", async () => {
  goAway();
  window.dispatchEvent(new Event("online"));
  await vi.advanceTimersByTimeAsync(0);
  expect(probes()).toBe(1);
  isUp = true;
  document.dispatchEvent(new Event("visibilitychange"));
  await vi.advanceTimersByTimeAsync(0);
  expect(connectionEvents.now()).toBe("ok");
});

test("a page that nobody looks at asks nothing", async () => {
  const visibility = vi.spyOn(document, "visibilityState", "get").mockReturnValue("hidden");
  goAway();
  await vi.advanceTimersByTimeAsync(60_000);
  expect(probes()).toBe(0);
  visibility.mockRestore();
});

test("a lost session is no lost connection", async () => {
  connectionEvents.tell("session-expired");
  await vi.advanceTimersByTimeAsync(60_000);
  expect(probes()).toBe(0);
});

test("what could not be fetched meanwhile is fetched by itself, and nothing else", async () => {
  const watch = (name: string) =>
    new QueryObserver(client, {
      queryKey: [name],
      queryFn: () => api.get(`/${name}`, { schema: { parse: (value) => value } }),
    }).subscribe(() => undefined);
  const ends = [watch("before")];
  await vi.advanceTimersByTimeAsync(0);
  isUp = false;
  ends.push(watch("meanwhile"));
  await vi.advanceTimersByTimeAsync(10_000);
  expect(client.getQueryState(["meanwhile"])?.status).toBe("error");
  expect(connectionEvents.now()).toBe("offline");
  isUp = true;
  await vi.advanceTimersByTimeAsync(10_000);
  expect(client.getQueryState(["meanwhile"])?.status).toBe("success");
  expect(asked.filter((address) => address === "/api/before")).toHaveLength(1);
  for (const end of ends) end();
});
