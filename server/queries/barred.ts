import { type Bar, barToIssue, barToTrial } from "../../shared/acoustics/protection/barred";
import type { Offer } from "../../shared/acoustics/protection/choose-protector";
import type { AssignmentInput } from "../../shared/schemas/worker";
import { todayAt } from "../lib/calendar";
import { groupBy } from "../lib/group-by";
import type { Actor } from "../lib/policy";
import { Site } from "../models/site";
import type { Worker } from "../models/worker";
import { cannotWear } from "./cannot-wear";
import { deskChoice } from "./fitting-desk";
import { type ChoiceSubject, choiceFor } from "./protector-choice";
import { fitsOf, offersAt, pairsOf } from "./register-offers";
import { rulesOn } from "./site-settings";
import { workerNoise } from "./worker-noise";

/** What stands against trying a device on a worker, and against handing it out, by the worker's own noise. */
export async function barsAtDesk(
  actor: Actor,
  worker: Worker,
  modelId: string,
): Promise<{ trial: Bar | null; issue: Bar | null }> {
  const date = await todayOf(worker.siteId);
  if (!(await rulesOn(worker.siteId, date))) return { trial: null, issue: null };
  const noise = await workerNoise(worker, date);
  const { singles } = await deskChoice(actor, worker, noise, date);
  const device = singles.find((one) => one.modelId === modelId);
  if (!device) return { trial: null, issue: null };
  return { trial: barToTrial(device), issue: barToIssue(device, singles) };
}

type Given = Pick<AssignmentInput, "taskId" | "areaId" | "innerModelId" | "outerModelId">;

/**
 * By worker what stands against giving them a device, or two, for a use: judged as it is chosen, by the task or by the
 * nominal day of each one's job. For an area only what is worn beside it counts.
 */
export async function barsToGiving(
  actor: Actor,
  workers: readonly Worker[],
  given: Given,
): Promise<Map<string, Bar>> {
  const bars = new Map<string, Bar>();
  const { taskId, areaId } = given;
  const groups = groupBy(workers, ({ siteId, jobId }) => `${siteId} ${taskId ?? jobId ?? ""}`);
  for (const people of groups.values()) {
    const { siteId, jobId } = people[0]!;
    const subject: Subject | null =
      taskId !== null
        ? { kind: "task", id: taskId, siteId }
        : areaId === null && jobId !== null
          ? { kind: "job", id: jobId, siteId }
          : null;
    for (const [id, bar] of await barsOfGroup(actor, people, subject, given)) bars.set(id, bar);
  }
  return bars;
}

type Subject = Pick<ChoiceSubject, "kind" | "id" | "siteId">;

async function barsOfGroup(
  actor: Actor,
  people: readonly Worker[],
  subject: Subject | null,
  given: Given,
): Promise<[string, Bar][]> {
  const { siteId } = people[0]!;
  const date = await todayOf(siteId);
  const settings = await rulesOn(siteId, date);
  const singles = await offersAt(actor, siteId, date);
  const offer = await offered(singles, given, date);
  if (!offer) return [];
  const barred = await cannotWear(
    people.map(({ id }) => id),
    date,
  );
  if (!subject || !settings)
    return people.flatMap(({ id, wornGear }): [string, Bar][] => {
      const gear = wornGear.find((worn) => offer.worksWith[worn] === false);
      if (gear) return [[id, { code: "gear", gear }]];
      const isBarred = [offer.inner, offer.outer].some(
        (one) => one && barred.get(id)?.has(one.modelId),
      );
      return isBarred ? [[id, { code: "cannot-wear", gear: null }]] : [];
    });
  const choice = await choiceFor(actor, subject, date, settings);
  const all = choice.rank(singles, { wornGear: [], fits: new Map() });
  const fits = await fitsOf(
    people.map(({ id }) => id),
    date,
    settings.governing.protection,
  );
  return people.flatMap(({ id, wornGear }): [string, Bar][] => {
    const [device] = choice.rank([offer], {
      wornGear: [...choice.gear, ...wornGear],
      fits: fits.get(id) ?? new Map(),
      barredModelIds: barred.get(id),
    });
    const bar = device ? barToIssue(device, all) : null;
    return bar ? [[id, bar]] : [];
  });
}

/** One of the register's, or two of them worn together; undefined: not in use at this site. */
async function offered(
  singles: readonly Offer[],
  { innerModelId, outerModelId }: Given,
  date: string,
): Promise<Offer | undefined> {
  const isInner = ({ inner }: Offer) => inner.modelId === innerModelId;
  if (outerModelId === null) return singles.find(isInner);
  const two = singles.filter((one) => isInner(one) || one.inner.modelId === outerModelId);
  return (await pairsOf(two, date)).find(
    (one) => isInner(one) && one.outer?.modelId === outerModelId,
  );
}

const todayOf = async (siteId: string): Promise<string> =>
  todayAt((await Site.findByPk(siteId))?.timeZone ?? "UTC");
