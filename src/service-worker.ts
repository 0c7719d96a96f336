/**
 * The shell of the crew's pages, for when there is no connection. It answers addresses of the application and its hashed
 * files, and nothing under /api: what was seen last is kept by the pages themselves, for one user (lib/last-seen.ts).
 */

interface ShellFile {
  readonly url: string;
  /** Null where the name itself changes with what is in it. */
  readonly revision: string | null;
}

interface Lasting extends Event {
  waitUntil(promise: Promise<unknown>): void;
}
interface Asked extends Lasting {
  readonly request: Request;
  respondWith(response: Promise<Response>): void;
}
interface Worker {
  readonly __WB_MANIFEST: readonly ShellFile[];
  readonly clients: { claim(): Promise<void> };
  skipWaiting(): Promise<void>;
  addEventListener(type: "install" | "activate", listener: (event: Lasting) => void): void;
  addEventListener(type: "fetch", listener: (event: Asked) => void): void;
  addEventListener(type: "message", listener: (event: MessageEvent) => void): void;
}
declare const self: Worker;

export {}; // a module: its `self` is not the window's

const files = self.__WB_MANIFEST;
const PREFIX = "dinward-shell-";
const PAGE = "/index.html";

const addressOf = ({ url }: ShellFile) => new URL(url, location.origin).pathname;

async function cacheName(): Promise<string> {
  const text = files.map(({ url, revision }) => `${url} ${revision}`).join("\n");
  const hash = await crypto.subtle.digest("SHA-256", new TextEncoder().encode(text));
  const hex = [...new Uint8Array(hash)].map((byte) => byte.toString(16).padStart(2, "0")).join("");
  return `${PREFIX}${hex.slice(0, 16)}`;
}

/** Whole or not at all: half a shell would open a page that then breaks. */
async function install(): Promise<void> {
  const cache = await caches.open(await cacheName());
  await Promise.all(
    files.map(async (file) => {
      const address = addressOf(file);
      const known = file.revision === null ? await caches.match(address) : undefined;
      const response = known ?? (await fetch(address, { cache: "reload" }));
      if (!response.ok) throw new Error(`${address}: ${response.status}`);
      await cache.put(address, response);
    }),
  );
}

async function activate(): Promise<void> {
  const current = await cacheName();
  for (const name of await caches.keys())
    if (name.startsWith(PREFIX) && name !== current) await caches.delete(name);
  await self.clients.claim();
}

/** With a connection always the server's page, which names the newest files. */
async function openPage(request: Request): Promise<Response> {
  try {
    return await fetch(request);
  } catch (error) {
    const page = await caches.match(PAGE);
    if (page) return page;
    throw error;
  }
}

const isPage = ({ mode }: Request, pathname: string) =>
  mode === "navigate" && !/^\/(api|auth|acknowledge|healthz|readyz)(\/|$)/.test(pathname);

self.addEventListener("install", (event) => event.waitUntil(install()));
self.addEventListener("activate", (event) => event.waitUntil(activate()));
self.addEventListener("message", ({ data }) => {
  if (data === "take-over") void self.skipWaiting();
});
self.addEventListener("fetch", (event) => {
  const { request } = event;
  const { origin, pathname } = new URL(request.url);
  if (request.method !== "GET" || origin !== location.origin) return;
  if (isPage(request, pathname)) event.respondWith(openPage(request));
  else if (pathname.startsWith("/assets/"))
    event.respondWith(caches.match(pathname).then((found) => found ?? fetch(request)));
});
