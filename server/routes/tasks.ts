import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import {
  NewTaskInput,
  TaskDetail,
  TaskInput,
  TaskLevelInput,
  TaskList,
} from "../../shared/schemas/task";
import { addTaskLevel } from "../commands/add-task-level";
import { changeTask } from "../commands/change-task";
import { createTask } from "../commands/create-task";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { Task } from "../models/task";
import { may, programmePolicy, sitePolicy } from "../policies";
import { presentTask, presentTaskLevel } from "../presenters/task";
import { countShiftsWithTask, listTaskLevels, listTasks } from "../queries/tasks";

async function view(actor: Actor, id: string) {
  const task = only(await listTasks(actor, { id }));
  const levels = await listTaskLevels([id], "all");
  return {
    ...presentTask(
      actor,
      task,
      levels.find(({ isInForce }) => isInForce),
    ),
    levels: levels.map(presentTaskLevel),
    shiftsCount: await countShiftsWithTask(id),
  };
}

/** The task, locked, where this actor may change it. */
async function taskToChange(actor: Actor, id: string): Promise<Task> {
  const task = await findVisible(Task, programmePolicy, id, actor, { lock: true });
  authorize(programmePolicy, actor, "change", task);
  return task;
}

export function defineTaskRoutes(): void {
  endpoint.get(
    "/tasks",
    {
      summary: "Tasks with the level in force today",
      may: may.readProgramme,
      query: AtSiteQuery,
      reply: TaskList,
    },
    async ({ actor, query }) => {
      const tasks = await listTasks(actor, query);
      const levels = await listTaskLevels(
        tasks.map(({ id }) => id),
        "in-force",
      );
      const levelOf = new Map(levels.map((level) => [level.taskId, level]));
      return { rows: tasks.map((task) => presentTask(actor, task, levelOf.get(task.id))) };
    },
  );

  endpoint.get(
    "/tasks/:id",
    {
      summary: "One task with all its levels",
      may: may.readProgramme,
      params: IdParams,
      reply: TaskDetail,
    },
    async ({ actor, params }) => view(actor, params.id),
  );

  endpoint.post(
    "/tasks",
    {
      summary: "Add a task, with its level where it is known",
      may: may.officer,
      body: NewTaskInput,
      reply: TaskDetail,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(programmePolicy, actor, "change", { siteId: site.id });
      const task = await createTask(actor, body);
      return view(actor, task.id);
    },
  );

  endpoint.put(
    "/tasks/:id",
    {
      summary: "Change a task's name or area, or archive it",
      may: may.officer,
      params: IdParams,
      body: TaskInput,
      reply: TaskDetail,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const task = await taskToChange(actor, params.id);
      await requireRevision(task, ifMatch, () => view(actor, task.id));
      const site = await findVisible(Site, sitePolicy, task.siteId, actor);
      await changeTask(actor, task, site, body);
      return view(actor, task.id);
    },
  );

  endpoint.post(
    "/tasks/:id/levels",
    {
      summary: "A task's noise from a date on, or a correction of it",
      may: may.officer,
      params: IdParams,
      body: TaskLevelInput,
      reply: TaskDetail,
    },
    async ({ actor, params, body }) => {
      const task = await taskToChange(actor, params.id);
      await addTaskLevel(actor, task, body);
      return view(actor, task.id);
    },
  );
}
