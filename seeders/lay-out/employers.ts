import { agreeEmployerDuties } from "../../server/commands/agree-employer-duties";
import { OFFICERS } from "../demo/retention";
import { type Demo, known } from "./programme";

/** One agency with which it is agreed who does what; with the others nothing is agreed yet. */
export async function layOutEmployers(demo: Demo, now: Date): Promise<void> {
  await demo.at(now, async () => {
    await agreeEmployerDuties(
      known(demo.actors, OFFICERS.ostmere),
      known(demo.sites, "ostmere").id,
      {
        kind: "agency",
        name: "Tideway Staffing",
        measure: "host",
        protect: "host",
        train: "host",
        keep: "employer",
        tell: "host",
        basis: "Frame contract of the year, annex 3, in the personnel office",
      },
      0,
    );
  });
}
