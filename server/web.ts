import { createServer } from "node:http";
import { createApp } from "./app";
import { configOrExit } from "./config";
import { connect, sequelize } from "./lib/db";
import { createLog } from "./lib/log";
import { defineModels } from "./models";

const config = configOrExit("web");
const log = createLog(config.LOG_LEVEL);
defineModels(connect(config.DATABASE_URL, { application: "dinward web" }));

const state = { isDraining: false };
const server = createServer(createApp(config, log, state));
server.keepAliveTimeout = 65_000;

server.on("error", (error: NodeJS.ErrnoException) => {
  console.error(
    error.code === "EADDRINUSE"
      ? `Port ${config.PORT} on ${config.HOST} is in use: set PORT to a free one.`
      : `The web process can't listen: ${error.code ?? error.name}.`,
  );
  process.exit(1);
});
server.listen(config.PORT, config.HOST, () => {
  const address = server.address();
  log.info(
    { process: "web", port: typeof address === "object" && address ? address.port : config.PORT },
    "listening",
  );
});

let isEnding = false;
for (const signal of ["SIGTERM", "SIGINT"] as const) {
  process.on(signal, () => {
    if (isEnding) return;
    isEnding = true;
    state.isDraining = true;
    log.info({ process: "web", signal }, "draining");
    const hardStop = setTimeout(() => process.exit(1), 25_000);
    hardStop.unref();
    server.close(async () => {
      await sequelize().close();
      process.exit(0);
    });
    server.closeIdleConnections();
  });
}
