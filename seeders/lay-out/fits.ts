import { recordFitTest } from "../../server/commands/record-fit-test";
import { setFitPolicy } from "../../server/commands/set-fit-policy";
import { rows } from "../../server/lib/db";
import { Site } from "../../server/models/site";
import { Worker } from "../../server/models/worker";
import { workerNoise } from "../../server/queries/worker-noise";
import { assumedAttenuationDb, snrOfBandsDb } from "../../shared/acoustics/protection/octave-band";
import { FitTestInput } from "../../shared/schemas/fit";
import { PROTECTORS } from "../demo/protectors";
import type { Demo } from "./programme";

const SITE = "kettle-bend";
/** Tests are spread over this many days, a few a week. */
const SPREAD_DAYS = 200;
const LATEST_DAYS_AGO = 20;
/** One was left out of the year's round. */
const FORGOTTEN_DAYS_AGO = 400;
/** By the table of the psychophysical method, dB. */
const METHOD_SD_DB = 3;

/** A cup that stands off at the temple arm: the noise of this worker needs more than that takes off. */
const LOOSE = { number: "2880", leftDb: [9, 8], rightDb: [16, 17] };

interface Worn {
  workerId: string;
  employeeNumber: string;
  modelId: string;
  model: string;
  hiredOn: string;
}

/**
 * A site that tests every fit once a year: nearly all get about what the model's test subjects got, one test is overdue,
 * and one worker's muff doesn't seal. Where the rating on the label governs, a good fit changes no result; the loose one
 * does, from its day on.
 */
export async function layOutFits(demo: Demo): Promise<void> {
  const calendar = demo.calendar(SITE);
  const officer = demo.officer(SITE);
  const siteId = demo.sites.get(SITE)!.id;
  const worn = await demo.at(demo.now, () =>
    rows<Worn>(
      `SELECT DISTINCT w.id AS "workerId", a.inner_model_id AS "modelId", w.hired_on::text AS "hiredOn",
         w.employee_number AS "employeeNumber", m.name AS model
       FROM assignments a JOIN workers w ON w.id = a.worker_id JOIN protector_models m ON m.id = a.inner_model_id
       WHERE w.site_id = :siteId AND w.left_on IS NULL AND a.outer_model_id IS NULL AND a.valid @> CAST(:today AS date)
       ORDER BY "employeeNumber", model`,
      { siteId, today: calendar.today },
    ),
  );
  const forgotten = worn.findIndex(
    ({ hiredOn }) => hiredOn <= calendar.daysAgo(FORGOTTEN_DAYS_AGO),
  );
  for (const [index, { workerId, employeeNumber, modelId, model, hiredOn }] of worn.entries()) {
    const isLoose = employeeNumber === LOOSE.number;
    const wanted = isLoose
      ? calendar.daysAgo(1)
      : calendar.daysAgo(
          index === forgotten ? FORGOTTEN_DAYS_AGO : LATEST_DAYS_AGO + ((index * 37) % SPREAD_DAYS),
        );
    const fitsDb = fittedDb(model, (((index * 5) % 9) - 4) / 4);
    const testedOn = [wanted, hiredOn].toSorted()[1]!;
    await demo.at(calendar.instant(testedOn, "10:00"), async () => {
      const worker = (await Worker.findByPk(workerId))!;
      await recordFitTest(
        officer,
        worker,
        FitTestInput.parse({
          modelId,
          testedOn,
          method: "psychophysical",
          facts: {
            leftDb: isLoose ? LOOSE.leftDb : [fitsDb, fitsDb + 1],
            rightDb: isLoose ? LOOSE.rightDb : [fitsDb + 1, fitsDb + 2],
            methodSdDb: METHOD_SD_DB,
          },
          confidencePct: 84,
          // Before the demo begins no rules are in force that a need could come from.
          needDb:
            testedOn < calendar.first ? null : (await workerNoise(worker, testedOn)).need.needDb,
          note: isLoose ? "The left cup stands off at the temple arm of the glasses." : "",
        }),
      );
    });
  }
  await demo.at(calendar.instant(calendar.today, "00:10"), async () => {
    const site = (await Site.findByPk(siteId))!;
    await setFitPolicy(
      officer,
      site,
      { confidencePct: 84, everyMonths: null, afterFailDays: null, firstDays: 90 },
      { confidencePct: 84, everyMonths: 12, afterFailDays: 30, firstDays: 90 },
    );
  });
}

/** What somebody gets from a model, whole dB: its subjects' mean in pink noise, so many of their deviations off. */
function fittedDb(model: string, deviations: number): number {
  const bands = PROTECTORS.find(({ name }) => name === model)?.data.bands;
  if (!bands) throw new Error(`${model} has no test data to fit by`);
  const meanDb = snrOfBandsDb(assumedAttenuationDb(bands, 0));
  const sdDb = snrOfBandsDb(assumedAttenuationDb(bands, -1)) - meanDb;
  return Math.round(meanDb + deviations * sdDb);
}
