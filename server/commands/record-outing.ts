import type { OutingReturn, OutingStart } from "../../shared/schemas/outing";
import { isEmptyReading } from "../../shared/schemas/run";
import { recordAudit } from "../lib/audit";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Instrument } from "../models/instrument";
import { leastRunMin } from "../queries/outings";
import { checkInstants } from "./check-instants";
import { doubtsOf, insertRun, reasonFor, requireKeptReason } from "./record-run";

/** @throws AppError invalid at a reading under which nothing was read. */
export function requireReadings(path: readonly string[], readings: OutingReturn["readings"]): void {
  const empty = readings.findIndex(isEmptyReading);
  if (empty >= 0)
    throw unprocessable([issue([...path, "readings", empty, "averageDb"], "reading-empty")]);
}

/**
 * An outing that is over, as a field sheet of another day has it: out and back in one run. What the instrument did since
 * is in nobody's way.
 *
 * @throws AppError invalid with every doubt that nobody has given a reason for; instruments-overlap.
 */
export async function recordOuting(
  actor: Actor,
  site: { id: string; timeZone: string },
  instrument: Instrument,
  { back, ...input }: OutingStart & { back: NonNullable<OutingStart["back"]> },
  entryId: string,
): Promise<string> {
  if (instrument.isArchived || instrument.kind === "calibrator")
    throw unprocessable([issue(["instrumentId"], "instrument-not-for-runs")]);
  const { workerId, areaId, surveyId, date, outAt, checkBeforeDb } = input;
  checkInstants(site, { date, from: outAt, fromField: "outAt", to: back.backAt });
  requireReadings(["back"], back.readings);
  const span = { from: outAt, to: back.backAt };
  const facts = {
    checkBeforeDb,
    checkAfterDb: back.checkAfterDb,
    durationMin: (Date.parse(back.backAt) - Date.parse(outAt)) / 60_000,
    covers: back.covers,
  };
  const doubts = await doubtsOf({ instrumentId: instrument.id, workerId, date, span }, facts, {
    leastMin: await leastRunMin({ surveyId }),
    shown: back.doubts,
    needsChecks: true,
  });
  const keptReason = back.keptReason ?? input.keptReason;
  requireKeptReason(doubts, keptReason);
  const runId = await insertRun(
    actor,
    { siteId: site.id, instrumentId: instrument.id, workerId, areaId, surveyId, date, span },
    {
      ...facts,
      keptReason: reasonFor(doubts, keptReason),
      unusual: back.unusual,
      doubts: doubts.map(({ code }) => code),
      readings: back.readings,
    },
    entryId,
  );
  await recordAudit(actor, {
    action: "record-run",
    subjectKind: "run",
    subjectId: runId,
    values: { ...input, ...back },
  });
  return runId;
}
