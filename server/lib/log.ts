import { pino } from "pino";

/** Only these members of a log line are written: what is not listed can't leak. */
const allowed = new Set([
  "level",
  "time",
  "msg",
  "requestId",
  "method",
  "route",
  "status",
  "durationMs",
  "code",
  "job",
  "jobId",
  "attempt",
  "noticeId",
  "organizationId",
  "count",
  "port",
  "signal",
  "errorName",
  "errorCode",
  "stack",
  "process",
  "migration",
]);

export function redact(line: Record<string, unknown>): Record<string, unknown> {
  return Object.fromEntries(Object.entries(line).filter(([name]) => allowed.has(name)));
}

export function createLog(level: string) {
  return pino({
    level,
    base: null,
    formatters: { log: redact },
    timestamp: pino.stdTimeFunctions.isoTime,
  });
}
export type Log = ReturnType<typeof createLog>;

/** What of an error may be logged: its name, code and stack frames, never its message, which may quote a person's data. */
export function describeError(error: unknown) {
  if (!(error instanceof Error)) return { errorName: typeof error };
  const frames = error.stack
    ?.split("\n")
    .filter((line) => line.startsWith("    at "))
    .slice(0, 8)
    .join("\n");
  const original = (error as { original?: { code?: string } }).original;
  return {
    errorName: error.name,
    errorCode: original?.code ?? (error as { code?: string }).code,
    stack: frames,
  };
}
