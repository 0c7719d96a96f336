import { LAEQ_SETTINGS, type SampleInput } from "../../shared/schemas/outing";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Instrument } from "../models/instrument";
import { leastRunMin } from "../queries/outings";
import { checkInstants } from "./check-instants";
import { doubtsOf, insertRun, reasonFor, requireKeptReason } from "./record-run";

/** A sample taken by hand at a task: a run with one reading of LAeq, and the photographs taken beside it. */
export async function recordSample(
  actor: Actor,
  site: { id: string; timeZone: string },
  instrument: Instrument,
  input: SampleInput,
): Promise<string> {
  if (instrument.isArchived || instrument.kind === "calibrator")
    throw unprocessable([issue(["instrumentId"], "instrument-not-for-runs")]);
  const { startedAt, durationMin, date, taskId, surveyId } = input;
  checkInstants(site, { date, from: startedAt, fromField: "startedAt" });
  const { workerId, checkBeforeDb, checkAfterDb } = input;
  const doubts = await doubtsOf(
    { instrumentId: instrument.id, workerId, date },
    { checkBeforeDb, checkAfterDb, durationMin, covers: "part" },
    { leastMin: await leastRunMin({ surveyId, taskId }), shown: input.doubts, needsChecks: true },
  );
  requireKeptReason(doubts, input.keptReason);
  const runId = await insertRun(
    actor,
    {
      siteId: site.id,
      instrumentId: instrument.id,
      workerId,
      surveyId,
      taskId,
      place: input.place,
      date,
      span: {
        from: startedAt,
        to: new Date(Date.parse(startedAt) + durationMin * 60_000).toISOString(),
      },
    },
    {
      durationMin,
      checkBeforeDb,
      checkAfterDb,
      covers: "part",
      keptReason: reasonFor(doubts, input.keptReason),
      unusual: input.unusual,
      doubts: doubts.map(({ code }) => code),
      readings: [
        {
          settings: LAEQ_SETTINGS,
          dosePct: null,
          averageDb: input.levelDb,
          lceqDb: input.lceqDb,
          lasMaxDb: input.lasMaxDb,
          peak: input.peak,
          octaveBandsDb: input.octaveBandsDb,
        },
      ],
    },
  );
  await execute(
    `INSERT INTO run_files (organization_id, run_id, file_id) SELECT $1, $2, id FROM unnest($3::uuid[]) AS id GROUP BY id`,
    [actor.organizationId, runId, input.fileIds],
  );
  await recordAudit(actor, {
    action: "record-sample",
    subjectKind: "run",
    subjectId: runId,
    values: { ...input },
  });
  return runId;
}
