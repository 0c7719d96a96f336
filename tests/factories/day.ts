import { insert } from "./insert";
import type { Worker } from "./worker";

interface DayOverrides {
  atEarDb?: number;
  outsideDb?: number;
  crewId?: string;
  decidingTaskId?: string;
  grade?: string;
  governingRuleSet?: string;
  /** Results of the governing rule set's criteria. */
  criteria?: readonly object[];
  /** Imported ones have no inputs. */
  origin?: "computed" | "imported";
  /** What it rests on. */
  refs?: object;
}

/** A judged day of a worker with its current result, without the shift it would rest on. */
export async function buildDay(
  worker: Worker,
  date: string,
  overrides: DayOverrides = {},
): Promise<string> {
  const { organizationId, id: workerId, siteId } = worker;
  const { outsideDb = 91.3, atEarDb = 78.2, crewId, decidingTaskId } = overrides;
  const resultId = await insert("day_results", {
    organizationId,
    siteId,
    workerId,
    date,
    origin: overrides.origin ?? "computed",
    governingRuleSet: overrides.governingRuleSet ?? "eu-2003-10-ec",
    governingVersion: 1,
    methodVersion: 1,
    inputsHash: Buffer.from(`${workerId} ${date}`),
    shiftMin: 480,
    unaccountedMin: 0,
    grade: overrides.grade ?? "task-level",
    outsideDb,
    outsideBound: "exact",
    atEarDb,
    verdictOutside: "over",
    verdictAtEar: "under",
    word: "good",
    decidingTaskId,
    hasProtector: "yes",
    criteria: JSON.stringify({ governing: overrides.criteria ?? [] }),
    refs: JSON.stringify(
      overrides.origin === "imported"
        ? { governing: [overrides.governingRuleSet ?? "eu-2003-10-ec", 1], comparison: [] }
        : (overrides.refs ?? {}),
    ),
  });
  await insert("days", {
    organizationId,
    workerId,
    date,
    siteId,
    crewId,
    currentResultId: resultId,
    isStale: false,
  });
  return resultId;
}
