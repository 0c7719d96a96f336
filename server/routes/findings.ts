import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import {
  FindingFilter,
  FindingPage,
  FindingStepInput,
  FindingView,
  ProblemReportInput,
} from "../../shared/schemas/finding";
import { handleFinding } from "../commands/handle-finding";
import { reportProblem } from "../commands/report-problem";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { Finding } from "../models/finding";
import { Worker } from "../models/worker";
import { findingPolicy, may, workerPolicy } from "../policies";
import { findingView, listFindings } from "../queries/finding-view";

export function defineFindingRoutes(): void {
  endpoint.get(
    "/findings",
    {
      summary: "Findings, soonest due first",
      may: may.readDays,
      query: FindingFilter,
      reply: FindingPage,
    },
    ({ actor, query }) => listFindings(actor, query),
  );

  endpoint.get(
    "/findings/:id",
    {
      summary: "A finding with its evidence and steps",
      may: may.readDays,
      params: IdParams,
      reply: FindingView,
      reads: { kind: "finding", worker: (_, { worker }) => worker?.id },
    },
    async ({ actor, params }) =>
      findingView(actor, await findVisible(Finding, findingPolicy, params.id, actor)),
  );

  endpoint.post(
    "/findings/:id/steps",
    {
      summary: "Take a step in a finding's life",
      may: may.followUp,
      params: IdParams,
      body: FindingStepInput,
      reply: FindingView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const finding = await findVisible(Finding, findingPolicy, params.id, actor, { lock: true });
      const action =
        body.kind === "mark-done" || body.kind === "cannot" || body.kind === "undo"
          ? "markDone"
          : body.kind === "comment"
            ? "comment"
            : "handle";
      authorize(findingPolicy, actor, action, finding);
      await handleFinding(actor, finding, body, ifMatch);
      return findingView(actor, await finding.reload());
    },
  );

  endpoint.post(
    "/workers/:id/problems",
    {
      summary: "Report a problem to the safety officer",
      may: may.reportProblem,
      params: IdParams,
      body: ProblemReportInput,
      reply: z.object({ id: z.uuid() }),
    },
    async ({ actor, params, body }) => {
      const worker = await findVisible(Worker, workerPolicy, params.id, actor);
      authorize(workerPolicy, actor, "report", worker);
      return { id: await reportProblem(actor, worker, body.text) };
    },
  );
}
