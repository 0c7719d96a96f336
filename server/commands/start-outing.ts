import type { OutingStart } from "../../shared/schemas/outing";
import { recordAudit } from "../lib/audit";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Instrument } from "../models/instrument";
import { whereabouts } from "../queries/outings";
import { checkInstants } from "./check-instants";
import { doubtsOf, insertRun, reasonFor, requireKeptReason } from "./record-run";

/**
 * An instrument goes out: a run that has neither length nor reading until it is back.
 *
 * @throws AppError already-out, with whom and since when.
 */
export async function startOuting(
  actor: Actor,
  site: { id: string; timeZone: string },
  instrument: Instrument,
  input: OutingStart,
): Promise<string> {
  if (instrument.isArchived || instrument.kind === "calibrator")
    throw unprocessable([issue(["instrumentId"], "instrument-not-for-runs")]);
  const out = await whereabouts(instrument.id);
  if (out) {
    const { withName, authorName, outAt } = out;
    throw new AppError("already-out", 409, { withName, authorName, outAt });
  }
  checkInstants(site, { date: input.date, from: input.outAt, fromField: "outAt" });
  const facts = {
    durationMin: null,
    checkBeforeDb: input.checkBeforeDb,
    checkAfterDb: null,
    covers: "part" as const,
  };
  const { workerId, date } = input;
  const doubts = await doubtsOf({ instrumentId: instrument.id, workerId, date }, facts);
  requireKeptReason(doubts, input.keptReason);
  const runId = await insertRun(
    actor,
    {
      siteId: site.id,
      instrumentId: instrument.id,
      workerId,
      areaId: input.areaId,
      surveyId: input.surveyId,
      date,
      isOut: true,
      span: { from: input.outAt, to: null },
    },
    {
      ...facts,
      keptReason: reasonFor(doubts, input.keptReason),
      unusual: null,
      doubts: doubts.map(({ code }) => code),
      readings: [],
    },
  );
  await recordAudit(actor, {
    action: "start-outing",
    subjectKind: "run",
    subjectId: runId,
    values: { ...input },
  });
  return runId;
}
