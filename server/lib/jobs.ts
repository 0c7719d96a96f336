import { currentTransaction, sequelize } from "./db";

/** Every job there is and what it is told. Payloads hold ids only. */
export interface JobPayloads {
  "recompute-days": { organizationId: string };
  "send-notice": { organizationId: string; noticeId: string };
  "send-escalation": { organizationId: string; escalationId: string };
  "send-digest": { organizationId: string; digestId: string };
  "send-trail-mail": { organizationId: string; mailId: string };
  "erase-people": { organizationId: string; erasureId: string };
  "look-after": Record<string, never>;
  /** Reads a time history's file: a report, and once it is ordered the levels. */
  "read-history": { organizationId: string; importId: string };
  "analyse-recording": { organizationId: string; recordingId: string };
  "check-microphones": { organizationId: string; checkId: string };
  "solve-timetable": { organizationId: string; timetableId: string };
}
export type JobName = keyof JobPayloads;

interface JobOptions {
  /** One job per key: a retry or a second process never doubles it. */
  key: string;
  runAt?: Date;
  maxAttempts?: number;
  /** Jobs of one queue run one after the other. */
  queue?: string;
}

/** Adds a job in the command's own transaction: it exists if and only if the change does. */
export async function addJob<N extends JobName>(
  name: N,
  payload: JobPayloads[N],
  options: JobOptions,
): Promise<void> {
  await sequelize().query(
    `SELECT graphile_worker.add_job($1, payload => $2::json, queue_name => $3, run_at => $4::timestamptz,
       max_attempts => $5, job_key => $6, job_key_mode => 'replace')`,
    {
      bind: [
        name,
        JSON.stringify(payload),
        options.queue ?? null,
        (options.runAt ?? new Date()).toISOString(),
        options.maxAttempts ?? 25,
        options.key,
      ],
      transaction: currentTransaction(),
    },
  );
}
