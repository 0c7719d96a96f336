import { IdParams } from "../../shared/schemas/common";
import {
  IssueEnd,
  IssueFilter,
  IssueInput,
  IssuePage,
  IssueSaved,
  IssueView,
  RefusalInput,
  RefusalList,
  RefusalSaved,
} from "../../shared/schemas/fit";
import { acknowledgeIssue } from "../commands/acknowledge-issue";
import { endIssue } from "../commands/end-issue";
import { issueProtector } from "../commands/issue-protector";
import { recordRefusal } from "../commands/record-refusal";
import { endpoint } from "../lib/endpoint";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { ProtectorIssue } from "../models/issue";
import { Site } from "../models/site";
import { Worker } from "../models/worker";
import { fitPolicy, issuePolicy, may, refusalPolicy, sitePolicy, workerPolicy } from "../policies";
import { issuesById, listIssues } from "../queries/issues";
import { listRefusals } from "../queries/refusals";

const view = async (actor: Actor, id: string) => only(await issuesById(actor, id));

/** One that is still out, locked, as the caller saw it. */
async function openIssue(
  actor: Actor,
  id: string,
  action: keyof typeof issuePolicy.can,
  seen: number,
): Promise<ProtectorIssue> {
  const found = await findVisible(ProtectorIssue, issuePolicy, id, actor, { lock: true });
  authorize(issuePolicy, actor, action, found);
  await requireRevision(found, seen, () => view(actor, id));
  if (found.endedOn !== null) throw new AppError("wrong-state", 409);
  return found;
}

export function defineIssueRoutes(): void {
  endpoint.get(
    "/issues",
    {
      summary: "Devices handed out, the latest first",
      may: may.readDays,
      query: IssueFilter,
      reply: IssuePage,
      reads: { kind: "fits", worker: ({ query }) => query.workerId },
    },
    ({ actor, query }) => listIssues(actor, query),
  );

  endpoint.post(
    "/workers/:id/issues",
    {
      summary: "Hand a device out: assignment, stock and acknowledgement in one",
      may: may.officer,
      params: IdParams,
      body: IssueInput,
      reply: IssueSaved,
    },
    async ({ actor, params, body }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor, { lock: true });
      authorize(fitPolicy, actor, "issue", worker);
      const site = await findVisible(Site, sitePolicy, worker.siteId, actor);
      const { id, replacedName } = await issueProtector(actor, worker, site, body);
      // This answer is kept for a repeated key; the reason stands in its own row and nowhere else.
      return { ...(await view(actor, id)), reason: null, replacedName };
    },
  );

  endpoint.post(
    "/issues/:id/end",
    {
      summary: "A device is back, lost, broken or replaced",
      may: may.officer,
      params: IdParams,
      body: IssueEnd,
      reply: IssueView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const issued = await openIssue(actor, params.id, "end", ifMatch);
      const site = await findVisible(Site, sitePolicy, issued.siteId, actor);
      await endIssue(actor, issued, site, body);
      return { ...(await view(actor, issued.id)), reason: null };
    },
  );

  endpoint.post(
    "/issues/:id/acknowledge",
    {
      summary: "The device was received: said by the worker, or in person before an officer",
      may: may.acknowledge,
      params: IdParams,
      reply: IssueView,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const issued = await openIssue(actor, params.id, "acknowledge", ifMatch);
      if (issued.acknowledgedHow !== null) throw new AppError("nothing-to-do", 409);
      await acknowledgeIssue(actor, issued);
      return { ...(await view(actor, issued.id)), reason: null };
    },
  );

  endpoint.get(
    "/workers/:id/refusals",
    {
      summary: "What a worker would not or cannot wear, with the reasons",
      may: may.officer,
      params: IdParams,
      reply: RefusalList,
      reads: { kind: "fits", worker: ({ params }) => params.id },
    },
    async ({ actor, params }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      return { rows: await listRefusals(actor, worker.id) };
    },
  );

  endpoint.post(
    "/workers/:id/refusals",
    {
      summary: "A worker would not, did not or cannot wear a protector",
      may: may.officer,
      params: IdParams,
      body: RefusalInput,
      reply: RefusalSaved,
    },
    async ({ actor, params, body }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      authorize(refusalPolicy, actor, "change", worker);
      const site = await findVisible(Site, sitePolicy, worker.siteId, actor);
      return { id: await recordRefusal(actor, worker, site, body) };
    },
  );
}
