import { literal, Op } from "sequelize";
import { GivingPreview } from "../../shared/schemas/choice";
import { IdParams } from "../../shared/schemas/common";
import {
  AssignmentEnd,
  AssignmentInput,
  AssignmentList,
  AssignmentView,
  ManyAssigned,
  ManyAssignmentsInput,
} from "../../shared/schemas/worker";
import { assignProtector, assignToMany, type Paths } from "../commands/assign-protector";
import { endAssignment } from "../commands/end-assignment";
import { previewGiving } from "../commands/preview-giving";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible, visible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Assignment } from "../models/protector";
import { Worker } from "../models/worker";
import { assignmentPolicy, may, workerPolicy } from "../policies";
import { presentAssignment } from "../presenters/assignment";
import { listAssignments } from "../queries/assignments";

const view = async (actor: Actor, id: string) =>
  presentAssignment(only(await listAssignments(actor, { ids: [id] })));

/** These workers, locked in one order whoever asks, in the order of the request. */
async function workersToAssign(actor: Actor, ids: readonly string[]): Promise<Worker[]> {
  const condition = literal(visible(workerPolicy, actor, `"${Worker.name}"`));
  const found = await Worker.findAll({
    where: { id: [...ids], [Op.and]: [condition] },
    order: [["id", "ASC"]],
    lock: true,
  });
  const byId = new Map(found.map((worker) => [worker.id, worker]));
  return ids.map((id) => {
    const worker = byId.get(id);
    if (!worker) throw notFound();
    authorize(workerPolicy, actor, "assign", worker);
    return worker;
  });
}

/** Where an issue of the assignment of many stands. */
const ofMany: Paths = {
  field: (name) => ["assignment", name],
  worker: (index) => ["workerIds", index],
};

export function defineAssignmentRoutes(): void {
  endpoint.get(
    "/workers/:id/assignments",
    {
      summary: "A worker's protectors by use and date",
      may: may.readDays,
      params: IdParams,
      reply: AssignmentList,
      reads: { kind: "page", worker: ({ params }) => params.id },
    },
    async ({ actor, params }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      return {
        rows: (await listAssignments(actor, { workerId: worker.id })).map(presentAssignment),
      };
    },
  );

  endpoint.post(
    "/workers/:id/assignments",
    {
      summary: "Assign a protector; an open assignment of the same use ends the day before",
      may: may.officer,
      params: IdParams,
      body: AssignmentInput,
      reply: AssignmentView,
    },
    async ({ actor, params, body }) => {
      const workers = await workersToAssign(actor, [params.id]);
      const ids = await assignProtector(actor, workers, body, {
        field: (name) => [name],
        worker: (_, name) => [name],
      });
      return view(actor, only(ids));
    },
  );

  endpoint.post(
    "/assignments/many",
    {
      summary:
        "The same assignment for many workers: all of them or none, but for those who have it already",
      may: may.officer,
      body: ManyAssignmentsInput,
      reply: ManyAssigned,
    },
    async ({ actor, body }) => {
      const workers = await workersToAssign(actor, body.workerIds);
      const { ids, alreadyHad } = await assignToMany(actor, workers, body.assignment, ofMany);
      const assigned = ids.length === 0 ? [] : await listAssignments(actor, { ids });
      return { rows: assigned.map(presentAssignment), alreadyHad };
    },
  );

  endpoint.post(
    "/assignments/many/preview",
    {
      summary: "Who would change verdict if these workers were given a protector, and the stock",
      may: may.officer,
      body: ManyAssignmentsInput,
      reply: GivingPreview,
      storesNothing: true,
    },
    async ({ actor, body }) =>
      previewGiving(actor, await workersToAssign(actor, body.workerIds), body.assignment, ofMany),
  );

  endpoint.patch(
    "/assignments/:id",
    {
      summary: "Last day of an assignment",
      may: may.officer,
      params: IdParams,
      body: AssignmentEnd,
      reply: AssignmentView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const assignment = await findVisible(Assignment, assignmentPolicy, params.id, actor, {
        lock: true,
      });
      const worker = await findVisible(Worker, workerPolicy, assignment.workerId, actor);
      authorize(assignmentPolicy, actor, "change", worker);
      await requireRevision(assignment, ifMatch, () => view(actor, assignment.id));
      await endAssignment(actor, await view(actor, assignment.id), body.toDate);
      return view(actor, assignment.id);
    },
  );
}
