import { agreeEmployerDuties } from "../../server/commands/agree-employer-duties";
import { letVisitorIn } from "../../server/commands/let-visitor-in";
import { shareWithEmployer } from "../../server/commands/share-with-employer";
import { PEOPLE } from "../demo/people";
import { AUDITED_DAYS_AGO } from "../demo/records";
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
    await letGuestsIn(demo);
  });
}

/** Somebody of that agency reads its people's results, and a visitor a year of the site. */
async function letGuestsIn(demo: Demo): Promise<void> {
  for (const { name, email, language, guest } of PEOPLE) {
    if (!guest) continue;
    const site = known(demo.sites, guest.site);
    const calendar = demo.calendar(guest.site);
    const input = { name, email, language, lastDay: calendar.daysAgo(-guest.days) };
    if (guest.as === "employer")
      await shareWithEmployer(demo.officer(guest.site), site, {
        ...input,
        employer: guest.employer,
      });
    else
      await letVisitorIn(known(demo.actors, "i.vandermolen"), site, {
        ...input,
        siteId: site.id,
        year: Number(calendar.daysAgo(AUDITED_DAYS_AGO).slice(0, 4)),
      });
  }
}
