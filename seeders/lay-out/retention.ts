import { createWorker } from "../../server/commands/create-worker";
import { placeHold } from "../../server/commands/hold-records";
import { nameTrailKeeper } from "../../server/commands/name-trail-keeper";
import { FORMER_WORKERS, HEAD_KEEPER, HELD, OFFICERS } from "../demo/retention";
import { type Demo, known } from "./programme";

/**
 * People whose term is over, one whose records are held, and somebody outside who keeps the trail's head.
 *
 * @returns the ids of those people by employee number
 */
export async function layOutRetention(demo: Demo, now: Date): Promise<Map<string, string>> {
  const ids = new Map<string, string>();
  await demo.at(now, async () => {
    for (const { site, number, name, hiredDaysAgo, leftDaysAgo } of FORMER_WORKERS) {
      const calendar = demo.calendar(site);
      const officer = known(demo.actors, OFFICERS[site]);
      const { id, siteId } = await createWorker(officer, {
        siteId: known(demo.sites, site).id,
        jobId: null,
        employeeNumber: number,
        name,
        employer: "own",
        employerName: null,
        language: "en",
        hiredOn: calendar.daysAgo(hiredDaysAgo),
        leftOn: calendar.daysAgo(leftDaysAgo),
        mustWear: false,
        personalTargetDb: null,
        wornGear: [],
        requirementReason: null,
      });
      ids.set(number, id);
      if (number === HELD.number)
        await placeHold(officer, { siteId, workerId: id, reason: HELD.reason });
    }
    const administrator = known(demo.actors, "i.vandermolen");
    const keeper = { ...HEAD_KEEPER, timeZone: demo.calendar("ostmere").timeZone };
    await nameTrailKeeper(administrator, { keeper }, 0);
  });
  return ids;
}
