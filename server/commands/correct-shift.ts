import { randomUUID } from "node:crypto";
import type { z } from "zod";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { ShiftCorrection } from "../../shared/schemas/shift";
import { rows } from "../lib/db";
import { stale, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Shift } from "../models/shift";
import { shiftView } from "../queries/shift-view";
import { openEndIssues, startOf, unknownTaskIssues, wholeDayIssues } from "./check-shift";
import { recomputeDays } from "./recompute-days";

import { scheduleNotices } from "./schedule-notices";
import { storeShifts } from "./store-shifts";

type Correction =
  | (z.infer<typeof ShiftCorrection> & { isVoid: false })
  | { isVoid: true; reason: string };

/**
 * The next revision of one shift, its day computed anew.
 *
 * @throws AppError stale with the shift as it stands now, where somebody was faster.
 */
export async function correctShift(
  actor: Actor,
  shift: Shift,
  correction: Correction,
  seenRevision: number,
): Promise<void> {
  if (shift.revision !== seenRevision) throw stale(await shiftView(actor, shift));
  const entryId = randomUUID();
  const issues: ProblemIssue[] = [];
  const unchanged = {
    shiftId: shift.id,
    number: shift.revision + 1,
    siteId: shift.siteId,
    workerId: shift.workerId,
    crewId: shift.crewId,
    date: shift.date,
    timeZone: shift.timeZone,
  };
  if (correction.isVoid) {
    await storeShifts(actor, entryId, [
      {
        ...unchanged,
        localStart: shift.localStart.slice(0, 5),
        lengthMin: shift.lengthMin,
        startsAt: shift.startsAt,
        unaccounted: { how: "unknown" },
        tasks: [],
        note: null,
        reason: correction.reason,
        isVoid: true,
      },
    ]);
  } else {
    const { localStart, lengthMin, unaccounted, tasks, note, reason } = correction;
    const known = new Set(
      (
        await rows<{ id: string }>("SELECT id FROM tasks WHERE site_id = :siteId", {
          siteId: shift.siteId,
        })
      ).map(({ id }) => id),
    );
    issues.push(
      ...wholeDayIssues(lengthMin, correction.confirmsWholeDay),
      ...unknownTaskIssues(tasks, known),
    );
    const startsAt = startOf(shift.date, correction, shift.timeZone, issues);
    if (startsAt) {
      const span = { startsAt, lengthMin };
      issues.push(...openEndIssues(span, shift.timeZone, correction.confirmsOpenEnd));
    }
    if (!startsAt || issues.length > 0) throw unprocessable(issues);
    await storeShifts(actor, entryId, [
      { ...unchanged, localStart, lengthMin, startsAt, unaccounted, tasks, note, reason },
    ]);
  }
  const recomputed = await recomputeDays(actor.organizationId, [
    { workerId: shift.workerId, date: shift.date },
  ]);
  await scheduleNotices({
    organizationId: actor.organizationId,
    author: actor,
    entryId,
    siteId: shift.siteId,
    recomputed,
  });
}
