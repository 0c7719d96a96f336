import { daysFromToday } from "./days";
import { insert, select } from "./insert";
import { buildAssignment, buildProtector, type Protector } from "./protector";
import { buildWorker, type Worker } from "./worker";

export interface FitTest {
  id: string;
  worker: Worker;
  model: Protector;
}

interface FitOverrides {
  worker?: Worker;
  model?: Protector;
  testedOn?: string;
  parDb?: number | null;
  needDb?: number | null;
  hasPassed?: boolean | null;
  activePassed?: boolean | null;
  /** Two microphones were at this ear alone. */
  checkedEar?: "left" | "right";
  size?: string;
}

const NO_BAND = Array.from({ length: 8 }, () => null);
const NOTHING_FOUND = { noiseReductionDb: NO_BAND, attenuationDb: NO_BAND, activeDb: null };

/** A fit of a worker that passed by 5 dB, unless told otherwise; nothing follows from it by itself. */
export async function buildFitTest(overrides: FitOverrides = {}): Promise<FitTest> {
  const worker = overrides.worker ?? (await buildWorker());
  const { organizationId, siteId, id: workerId } = worker;
  const model = overrides.model ?? (await buildProtector({ organizationId }));
  const { parDb = 25, needDb = 20, activePassed, size, testedOn = daysFromToday(-1) } = overrides;
  const { checkedEar } = overrides;
  const { hasPassed = parDb === null || needDb === null ? null : parDb >= needDb } = overrides;
  const id = await insert("fit_tests", {
    organizationId,
    siteId,
    workerId,
    modelId: model.id,
    testedOn,
  });
  const revisionId = await insert("fit_test_revisions", {
    organizationId,
    fitTestId: id,
    number: 1,
    method: "psychophysical",
    size,
    facts: JSON.stringify({
      leftDb: [parDb ?? 20],
      rightDb: [parDb ?? 20],
      methodSdDb: 0,
      bands: checkedEar ? { left: null, right: null, [checkedEar]: NOTHING_FOUND } : null,
    }),
    confidencePct: 84,
    leftDb: parDb,
    rightDb: parDb,
    parDb,
    needDb,
    hasPassed,
    activePassed,
  });
  await select("UPDATE fit_tests SET current_revision_id = $2 WHERE id = $1", [id, revisionId]);
  return { id, worker, model };
}

export interface Issue {
  id: string;
  worker: Worker;
  model: Protector;
}

interface IssueOverrides {
  worker?: Worker;
  model?: Protector;
  issuedOn?: string;
  fitTestId?: string;
  reason?: string;
}

/** A device handed out a week ago, with the assignment that goes with it; not acknowledged. */
export async function buildIssue(overrides: IssueOverrides = {}): Promise<Issue> {
  const worker = overrides.worker ?? (await buildWorker());
  const { organizationId, siteId, id: workerId } = worker;
  const model = overrides.model ?? (await buildProtector({ organizationId }));
  const { issuedOn = daysFromToday(-7), fitTestId, reason } = overrides;
  const assignment = await buildAssignment({ worker, inner: model, fromDate: issuedOn });
  const id = await insert("protector_issues", {
    organizationId,
    siteId,
    workerId,
    modelId: model.id,
    assignmentId: assignment.id,
    fitTestId,
    issuedOn,
    offeredModelIds: [model.id],
    wasInstructed: true,
    reason,
  });
  return { id, worker, model };
}
