import { recordMeasure } from "../../server/commands/record-measure";
import { recordTraining } from "../../server/commands/record-training";
import { setEscalation } from "../../server/commands/set-escalation";
import { rows } from "../../server/lib/db";
import { only } from "../../server/lib/only";
import { Finding } from "../../server/models/finding";
import { listEscalations } from "../../server/queries/follow-up";
import { MEASURES, TRAININGS } from "../demo/training";
import { type Demo, known } from "./programme";

/** Trainings that were held, a measure of each site, and whom overdue findings go up to. */
export async function layOutTraining(demo: Demo): Promise<void> {
  for (const { site, daysAgo, title, durationMin, missedBy } of TRAININGS) {
    if (daysAgo >= demo.spanDays) continue;
    const calendar = demo.calendar(site);
    const heldOn = calendar.daysAgo(daysAgo);
    await demo.at(calendar.instant(heldOn, "15:20"), async () => {
      const present = await rows<{ employeeNumber: string }>(
        `SELECT w.employee_number AS "employeeNumber" FROM workers w
         WHERE w.site_id = :siteId AND w.hired_on <= :heldOn AND (w.left_on IS NULL OR w.left_on >= :heldOn)`,
        { siteId: known(demo.sites, site).id, heldOn },
      );
      await recordTraining(demo.officer(site), known(demo.sites, site), {
        siteId: known(demo.sites, site).id,
        heldOn,
        title,
        durationMin,
        fileId: null,
        employeeNumbers: present
          .map(({ employeeNumber }) => employeeNumber)
          .filter((number) => !missedBy.includes(number)),
      });
    });
  }
  for (const { site, control, what, daysAgo, isDone } of MEASURES) {
    const calendar = demo.calendar(site);
    const on = calendar.daysAgo(Math.min(daysAgo, demo.spanDays - 1));
    await demo.at(calendar.instant(on, "10:10"), async () => {
      const finding = await Finding.findOne({
        where: {
          siteId: known(demo.sites, site).id,
          kind: ["over-limit-outside", "peak-or-ceiling"],
        },
        order: [
          ["firstDate", "ASC"],
          ["id", "ASC"],
        ],
      });
      if (!finding) return;
      await recordMeasure(demo.officer(site), finding, {
        control,
        what,
        ownerId: demo.officer(site).userId,
        plannedOn: isDone ? null : calendar.daysAgo(-daysAgo),
        doneOn: isDone ? on : null,
      });
    });
  }
  // At one site overdue findings go up; at the other nobody is named yet.
  const officer = demo.officer("kettle-bend");
  const calendar = demo.calendar("kettle-bend");
  await demo.at(calendar.instant(calendar.today, "00:10"), async () =>
    setEscalation(
      officer,
      only(await listEscalations(officer, known(demo.sites, "kettle-bend").id)),
      officer.userId,
    ),
  );
}
