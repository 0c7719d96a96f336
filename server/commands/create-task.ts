import type { z } from "zod";
import type { NewTaskInput } from "../../shared/schemas/task";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { Task } from "../models/task";
import { addTaskLevel } from "./add-task-level";
import { checkAreaOfTask } from "./check-task";

export async function createTask(actor: Actor, input: z.infer<typeof NewTaskInput>): Promise<Task> {
  const { level, ...facts } = input;
  await checkAreaOfTask(actor, facts.siteId, facts.areaId);
  const task = await Task.create({ organizationId: actor.organizationId, ...facts });
  await recordAudit(actor, {
    action: "create-task",
    subjectKind: "task",
    subjectId: task.id,
    values: facts,
  });
  if (level) await addTaskLevel(actor, task, level, ["level"]);
  return task;
}
