import type { WorkerRow, WorkerView } from "../../shared/schemas/worker";
import { type Actor, abilities } from "../lib/policy";
import { workerPolicy } from "../policies";
import type { WorkerDetailRow, WorkerListRow } from "../queries/workers";
import { presentAssignment } from "./assignment";
import { presentDayFiguresIfAny } from "./day-figures";

export function presentWorkerRow(row: WorkerListRow): WorkerRow {
  return {
    id: row.id,
    siteId: row.siteId,
    siteName: row.siteName,
    employeeNumber: row.employeeNumber,
    name: row.name,
    employer: row.employer,
    employerName: row.employerName,
    jobName: row.jobName,
    crewName: row.crewName,
    leftOn: row.leftOn,
    lastDay: presentDayFiguresIfAny(row),
    openFindings: row.openFindings,
  };
}

export function presentWorker(actor: Actor, row: WorkerDetailRow): WorkerView {
  return {
    id: row.id,
    siteId: row.siteId,
    siteName: row.siteName,
    jobId: row.jobId,
    jobName: row.jobName,
    employeeNumber: row.employeeNumber,
    name: row.name,
    employer: row.employer,
    employerName: row.employerName,
    language: row.language,
    hiredOn: row.hiredOn,
    leftOn: row.leftOn,
    mustWear: row.mustWear,
    personalTargetDb: row.personalTargetDb,
    wornGear: row.wornGear,
    requirementReason: row.requirementReason,
    crews: row.crews,
    assignments: row.assignments.map(presentAssignment),
    hasSignIn: row.hasSignIn,
    revision: row.revision,
    can: abilities(workerPolicy, actor, row),
  };
}
