import { createServer } from "node:net";

export function isPortFree(port, host = "127.0.0.1") {
  return new Promise((done) => {
    const probe = createServer();
    probe.once("error", () => done(false));
    probe.listen({ port, host, exclusive: true }, () => probe.close(() => done(true)));
  });
}

/**
 * A free port from `from` upwards, under 32768: from there on the system hands ports to outgoing
 * connections, and one of those could take the place of a server that was just stopped.
 */
export async function findFreePort(from, taken = []) {
  for (let port = from; port < 32_768; port += 1) {
    if (!taken.includes(port) && (await isPortFree(port))) return port;
  }
  throw new Error(`no free port between ${from} and 32767`);
}

/**
 * Keeps a port from others until `release` is called just before its own program takes it; null where another program
 * has it.
 */
export function holdPort(port, host = "127.0.0.1") {
  return new Promise((done) => {
    const holder = createServer((connection) => connection.destroy());
    const release = () => new Promise((released) => holder.close(released));
    holder.once("error", () => done(null));
    holder.listen({ port, host, exclusive: true }, () => {
      holder.unref();
      done({ port, release });
    });
  });
}

/** The first port from `from` upwards that could be held; see findFreePort. */
export async function holdFreePort(from, taken = []) {
  for (let port = from; ; port += 1) {
    port = await findFreePort(port, taken);
    const held = await holdPort(port);
    if (held) return held;
  }
}

/** A random place to start looking, so that runs beside each other rarely meet. */
export function randomPort() {
  return 15_000 + Math.floor(Math.random() * 15_000);
}
