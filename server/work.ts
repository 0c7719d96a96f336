import { randomUUID } from "node:crypto";
import { setTimeout as sleep } from "node:timers/promises";
import { Logger, parseCronItems, run, type TaskList } from "graphile-worker";
import { configOrExit } from "./config";
import { analyseStoredRecording } from "./jobs/analyse-recording";
import { checkMicrophones } from "./jobs/check-microphones";
import { erasePeople } from "./jobs/erase-people";
import { lookAfter } from "./jobs/look-after";
import { readHistoryImport } from "./jobs/read-history";
import { recomputeStaleDays } from "./jobs/recompute-stale-days";
import { searchTimetable } from "./jobs/search-timetable";
import { sendDigest } from "./jobs/send-digest";
import { sendEscalation } from "./jobs/send-escalation";
import { sendNotice } from "./jobs/send-notice";
import { sendTrailMail } from "./jobs/send-trail-mail";
import { sealTrail } from "./lib/audit";
import { connect, inTransaction, organizationIds, sequelize } from "./lib/db";
import { openFileStore } from "./lib/file-store";
import type { JobPayloads } from "./lib/jobs";
import { createLog, describeError } from "./lib/log";
import { Mailer } from "./lib/mailer";
import { withRequestId } from "./lib/request-context";
import { defineModels } from "./models";

const config = configOrExit("work");
const log = createLog(config.LOG_LEVEL);
defineModels(connect(config.DATABASE_URL, { application: "dinward work" }));
openFileStore(config.DATA_DIR);
const mailer = new Mailer(config.SMTP_URL, config.MAIL_FROM, config.MAIL_RETURN_TO);
let isStopping = false;

/** A job runs under an id of its own, which its events and log lines carry. */
const job =
  <N extends keyof JobPayloads>(name: N, work: (payload: JobPayloads[N]) => Promise<unknown>) =>
  async (payload: unknown) => {
    const requestId = randomUUID();
    await withRequestId(requestId, async () => {
      try {
        await work(payload as JobPayloads[N]);
        log.info({ job: name, requestId }, "job done");
      } catch (error) {
        log.warn({ job: name, requestId, ...describeError(error) }, "job failed");
        throw error;
      }
    });
  };

const taskList: TaskList = {
  "recompute-days": job("recompute-days", ({ organizationId }) =>
    recomputeStaleDays(organizationId, () => isStopping),
  ),
  "send-notice": job("send-notice", (payload) => sendNotice(payload, mailer, config.PUBLIC_URL)),
  "send-escalation": job("send-escalation", (payload) =>
    sendEscalation(payload, mailer, config.PUBLIC_URL),
  ),
  "send-digest": job("send-digest", (payload) => sendDigest(payload, mailer, config.PUBLIC_URL)),
  "send-trail-mail": job("send-trail-mail", (payload) =>
    sendTrailMail(payload, mailer, config.PUBLIC_URL),
  ),
  "erase-people": job("erase-people", (payload) => erasePeople(payload, () => isStopping)),
  "read-history": job("read-history", (payload) => readHistoryImport(payload)),
  "analyse-recording": job("analyse-recording", (payload) => analyseStoredRecording(payload)),
  "check-microphones": job("check-microphones", (payload) => checkMicrophones(payload)),
  "solve-timetable": job("solve-timetable", (payload) => searchTimetable(payload)),
  "look-after": job("look-after", () => lookAfter()),
};

const runner = await run({
  connectionString: config.DATABASE_URL,
  concurrency: 2,
  pollInterval: 1000,
  noHandleSignals: true,
  taskList,
  parsedCronItems: parseCronItems([
    {
      task: "look-after",
      match: "* * * * *",
      identifier: "look-after",
      options: { jobKey: "look-after" },
    },
  ]),
  logger: new Logger(() => (level, message) => {
    if (level === "error")
      log.error(
        { process: "work" },
        message.startsWith("Failed task") ? "a job failed" : "the queue reports an error",
      );
  }),
});
log.info({ process: "work" }, "working");

/** Seals the trail every second or so; a second process waits for its turn inside the database. */
async function seal(): Promise<void> {
  while (!isStopping) {
    try {
      for (const organizationId of await organizationIds()) {
        while (
          !isStopping &&
          (await inTransaction({ organizationId }, () => sealTrail(organizationId))) === 5000
        );
      }
    } catch (error) {
      log.warn(
        { process: "work", ...describeError(error) },
        "the trail could not be sealed just now",
      );
    }
    await sleep(1000);
  }
}
const sealing = seal();

for (const signal of ["SIGTERM", "SIGINT"] as const) {
  process.once(signal, async () => {
    isStopping = true;
    log.info({ process: "work", signal }, "releasing jobs");
    setTimeout(() => process.exit(1), 25_000).unref();
    await runner.stop();
    await sealing;
    mailer.close();
    await sequelize().close();
    process.exit(0);
  });
}
