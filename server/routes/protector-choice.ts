import {
  ChoiceQuery,
  IssueSlips,
  ProtectorChoiceView,
  SlipsQuery,
} from "../../shared/schemas/choice";
import { endpoint } from "../lib/endpoint";
import { type Actor, findVisible } from "../lib/policy";
import { Job, Task } from "../models/task";
import { may, programmePolicy } from "../policies";
import { issueSlips } from "../queries/issue-slips";
import { type ChoiceSubject, protectorChoice } from "../queries/protector-choice";

async function subjectOf(actor: Actor, { taskId, jobId }: ChoiceQuery): Promise<ChoiceSubject> {
  const { id, name, siteId } =
    taskId === undefined
      ? await findVisible(Job, programmePolicy, jobId ?? "", actor)
      : await findVisible(Task, programmePolicy, taskId, actor);
  return { kind: taskId === undefined ? "job" : "task", id, name, siteId };
}

export function defineProtectorChoiceRoutes(): void {
  endpoint.get(
    "/protector-choice",
    {
      summary: "The register in the order in which it suits a task or a job, and who would wear it",
      may: may.readFitting,
      query: ChoiceQuery,
      reply: ProtectorChoiceView,
    },
    async ({ actor, query }) => protectorChoice(actor, await subjectOf(actor, query)),
  );

  endpoint.get(
    "/issue-slips",
    {
      summary: "What each of these workers has to wear where, and the level under it",
      may: may.readFitting,
      query: SlipsQuery,
      reply: IssueSlips,
    },
    async ({ actor, query }) => ({ rows: await issueSlips(actor, query.workerIds) }),
  );
}
