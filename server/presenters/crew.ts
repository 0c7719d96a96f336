import type { CrewDetail, CrewView } from "../../shared/schemas/crew";
import { type Actor, abilities } from "../lib/policy";
import { crewPolicy } from "../policies";
import type { CrewRow, MembershipRow, SupervisorRow } from "../queries/crews";

export function presentCrew(actor: Actor, row: CrewRow): CrewView {
  return {
    id: row.id,
    siteId: row.siteId,
    siteName: row.siteName,
    name: row.name,
    usualStart: row.usualStart,
    usualLengthMin: row.usualLengthMin,
    isArchived: row.isArchived,
    membersToday: row.membersToday,
    supervisorNames: row.supervisorNames,
    revision: row.revision,
    can: abilities(crewPolicy, actor, row),
  };
}

export function presentCrewDetail(
  actor: Actor,
  row: CrewRow,
  memberships: readonly MembershipRow[],
  supervisors: readonly SupervisorRow[],
): CrewDetail {
  return {
    ...presentCrew(actor, row),
    memberships: memberships.map(
      ({ id, workerId, workerName, employeeNumber, isLoan, fromDate, toDate }) => ({
        id,
        workerId,
        workerName,
        employeeNumber,
        isLoan,
        fromDate,
        toDate,
      }),
    ),
    supervisors: supervisors.map(({ id, userId, userName, fromDate, toDate }) => ({
      id,
      userId,
      userName,
      fromDate,
      toDate,
    })),
  };
}
