import { chooseDigest } from "../../server/commands/choose-digest";
import { giveHandOver, receiveHandOver } from "../../server/commands/give-hand-over";
import { lendWorker } from "../../server/commands/lend-worker";
import { markAbsent } from "../../server/commands/mark-absent";
import { handOverDraft } from "../../server/queries/hand-overs";
import { ABSENCES, DAILY_MAILS, HAND_OVERS, LOANS } from "../demo/shift-change";
import { type Demo, known, siteOfWorker } from "./programme";

/** What supervisors plan with: who is not in, who is lent, what one shift hands to the next, and who has a daily mail. */
export async function layOutShiftChange(demo: Demo, now: Date): Promise<void> {
  const daysOf = (worker: string, [from, to]: readonly [number, number]) => {
    const calendar = demo.calendar(siteOfWorker(worker));
    return { fromDate: calendar.daysAgo(-from), toDate: calendar.daysAgo(-to) };
  };
  await demo.at(now, async () => {
    for (const { by, crew, worker, inDays } of ABSENCES) {
      const { id } = known(demo.workers, worker);
      const span = { workerId: id, ...daysOf(worker, inDays) };
      await markAbsent(
        known(demo.actors, by),
        known(demo.crews, crew),
        known(demo.workers, worker),
        span,
      );
    }
    for (const { by, crew, worker, to, inDays } of LOANS) {
      const [from, other] = [known(demo.crews, crew), known(demo.crews, to)];
      const lent = known(demo.workers, worker);
      await lendWorker(known(demo.actors, by), from, lent, other, {
        workerId: lent.id,
        crewId: other.id,
        ...daysOf(worker, inDays),
      });
    }
    for (const { person, hour } of DAILY_MAILS)
      await chooseDigest(known(demo.actors, person), { hour }, 0);
  });
  for (const { by, to, crew, note, minutesAgo, isRead } of HAND_OVERS) {
    const at = new Date(now.getTime() - minutesAgo * 60_000);
    const [giver, reader] = [known(demo.actors, by), known(demo.actors, to)];
    const id = await demo.at(at, async () => {
      const of = known(demo.crews, crew);
      const { fingerprint } = await handOverDraft(giver, of);
      return giveHandOver(giver, of, { recipientId: reader.userId, note, fingerprint });
    });
    if (isRead) await demo.at(new Date(at.getTime() + 300_000), () => receiveHandOver(reader, id));
  }
}
