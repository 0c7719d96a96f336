// @vitest-environment jsdom
import { QueryObserver } from "@tanstack/react-query";
import { afterEach, beforeEach, expect, test, vi } from "vitest";
import { api, connectionEvents, noReply } from "../../lib/api";
import { sessionQuery, watchRoles } from "./session";
import { clientOf } from "./test-session";

let answer: () => Response;
beforeEach(() => {
  vi.stubGlobal("fetch", async () => answer());
  return () => vi.unstubAllGlobals();
});
afterEach(() => connectionEvents.tell("ok"));

const nobody = { user: null, pendingName: null, endedAt: null };

test.each([
  ["a session that has ended", nobody, "session-expired"],
  [
    "access taken away",
    { ...nobody, pendingName: "N. N.", endedAt: "2026-12-01T09:00:00Z" },
    "access-over",
  ],
] as const)("%s leaves the page to whoever was there, and says so", async (_, session, state) => {
  const client = clientOf("officer");
  answer = () => Response.json(session);
  const kept = await client.fetchQuery({ ...sessionQuery, staleTime: 0 });
  expect(kept.user?.name).toBe("N. N.");
  expect(connectionEvents.now()).toBe(state);
});

test("whoever comes to a page while nobody is signed in is nobody", async () => {
  const client = clientOf("officer");
  client.clear();
  answer = () => Response.json(nobody);
  expect((await client.fetchQuery(sessionQuery)).user).toBeNull();
  expect(connectionEvents.now()).toBe("ok");
});

test("a refusal asks anew who may do what; no other answer does", async () => {
  const client = clientOf("officer");
  watchRoles(client);
  const asks = vi.spyOn(client, "invalidateQueries");
  const asked = async (status: number) => {
    answer = () => Response.json({ code: "x", title: "x" }, { status });
    const observer = new QueryObserver(client, {
      queryKey: ["x", status],
      queryFn: () => api.get("/x", { schema: noReply }),
      retry: false,
    });
    await observer.refetch();
    return asks.mock.calls.length;
  };
  expect(await asked(404)).toBe(0);
  expect(await asked(403)).toBe(1);
});
