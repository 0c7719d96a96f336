import type { z } from "zod";
import type { RegisterData as RegisterSchema } from "../../shared/schemas/protector";
import { daysRange } from "./days";
import { insert, next } from "./insert";
import { buildOrganization } from "./organization";
import { buildWorker, type Worker } from "./worker";

export interface Protector {
  id: string;
  organizationId: string;
  name: string;
}

const noData = {
  usRatingDb: null,
  snrDb: null,
  hDb: null,
  mDb: null,
  lDb: null,
  slc80Db: null,
  bands: null,
  active: null,
};

type RegisterData = z.infer<typeof RegisterSchema>;

interface ProtectorOverrides {
  organizationId?: string;
  name?: string;
  kind?: string;
  isArchived?: boolean;
  effectiveFrom?: string;
  data?: Partial<Record<keyof RegisterData, unknown>>;
}

/** A model on the register with its first data. */
export async function buildProtector(overrides: ProtectorOverrides = {}): Promise<Protector> {
  const organizationId = overrides.organizationId ?? (await buildOrganization()).id;
  const {
    name = `Protector ${next()}`,
    kind = "earmuff",
    isArchived,
    effectiveFrom = "2020-01-01",
  } = overrides;
  const id = await insert("protector_models", { organizationId, name, kind, isArchived });
  const data = JSON.stringify({ ...noData, snrDb: 28, usRatingDb: 23, ...overrides.data });
  await insert("protector_model_revisions", {
    organizationId,
    modelId: id,
    number: 1,
    effectiveFrom,
    data,
  });
  return { id, organizationId, name };
}

export interface Assignment {
  id: string;
  organizationId: string;
  workerId: string;
}

interface AssignmentOverrides {
  worker?: Worker;
  inner?: Protector;
  outer?: Protector;
  taskId?: string;
  areaId?: string;
  fromDate?: string;
  toDate?: string | null;
}

/** A protector worn everywhere from 2021 on, unless told otherwise. */
export async function buildAssignment(overrides: AssignmentOverrides = {}): Promise<Assignment> {
  const worker = overrides.worker ?? (await buildWorker());
  const { organizationId, id: workerId } = worker;
  const inner = overrides.inner ?? (await buildProtector({ organizationId }));
  const { taskId, areaId, outer, fromDate = "2021-01-01", toDate = null } = overrides;
  const worn = { innerModelId: inner.id, outerModelId: outer?.id, taskId, areaId };
  const id = await insert("assignments", {
    organizationId,
    workerId,
    ...worn,
    valid: daysRange(fromDate, toDate),
  });
  return { id, organizationId, workerId };
}
