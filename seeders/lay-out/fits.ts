import { recordFitTest } from "../../server/commands/record-fit-test";
import { setFitPolicy } from "../../server/commands/set-fit-policy";
import { rows } from "../../server/lib/db";
import { Site } from "../../server/models/site";
import { Worker } from "../../server/models/worker";
import { FitTestInput } from "../../shared/schemas/fit";
import type { Demo } from "./programme";

const SITE = "kettle-bend";
/** Tests are spread over this many days, a few a week. */
const SPREAD_DAYS = 200;
const LATEST_DAYS_AGO = 20;
/** One was left out of the year's round. */
const FORGOTTEN_DAYS_AGO = 400;
/** By the table of the psychophysical method, dB. */
const METHOD_SD_DB = 3;

interface Worn {
  workerId: string;
  modelId: string;
  hiredOn: string;
}

/**
 * A site that tests every fit once a year: nearly all fit well, one test is overdue, and one worker's plugs don't seal.
 * Where the rating on the label governs, a good fit changes no result.
 */
export async function layOutFits(demo: Demo): Promise<void> {
  const calendar = demo.calendar(SITE);
  const officer = demo.officer(SITE);
  const siteId = demo.sites.get(SITE)!.id;
  const worn = await demo.at(demo.now, () =>
    rows<Worn>(
      `SELECT DISTINCT w.id AS "workerId", a.inner_model_id AS "modelId", w.hired_on::text AS "hiredOn", w.employee_number, m.name
       FROM assignments a JOIN workers w ON w.id = a.worker_id JOIN protector_models m ON m.id = a.inner_model_id
       WHERE w.site_id = :siteId AND w.left_on IS NULL AND a.outer_model_id IS NULL AND a.valid @> CAST(:today AS date)
       ORDER BY w.employee_number, m.name`,
      { siteId, today: calendar.today },
    ),
  );
  const forgotten = worn.findIndex(
    ({ hiredOn }) => hiredOn <= calendar.daysAgo(FORGOTTEN_DAYS_AGO),
  );
  for (const [index, { workerId, modelId, hiredOn }] of worn.entries()) {
    const isLoose = index === worn.length - 1;
    const wanted = isLoose
      ? calendar.daysAgo(1)
      : calendar.daysAgo(
          index === forgotten ? FORGOTTEN_DAYS_AGO : LATEST_DAYS_AGO + ((index * 37) % SPREAD_DAYS),
        );
    const fitsDb = 29 + ((index * 5) % 9);
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
            leftDb: isLoose ? [13, 15] : [fitsDb, fitsDb + 1],
            rightDb: isLoose ? [21, 20] : [fitsDb + 1, fitsDb + 2],
            methodSdDb: METHOD_SD_DB,
          },
          confidencePct: 84,
          needDb: isLoose ? 15 : 12,
          note: isLoose ? "The left plug stays short of the second bend." : "",
        }),
      );
    });
  }
  await demo.at(calendar.instant(calendar.today, "00:10"), async () => {
    const site = (await Site.findByPk(siteId))!;
    await setFitPolicy(
      officer,
      site,
      { confidencePct: 84, everyMonths: null, afterFailDays: null },
      { confidencePct: 84, everyMonths: 12, afterFailDays: 30 },
    );
  });
}
