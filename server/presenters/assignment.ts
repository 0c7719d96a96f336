import type { AssignmentView } from "../../shared/schemas/worker";
import type { AssignmentRow } from "../queries/assignments";

export function presentAssignment(row: AssignmentRow): AssignmentView {
  return {
    id: row.id,
    workerId: row.workerId,
    use: row.use,
    taskId: row.taskId,
    areaId: row.areaId,
    useName: row.useName,
    innerModelId: row.innerModelId,
    innerName: row.innerName,
    outerModelId: row.outerModelId,
    outerName: row.outerName,
    size: row.size,
    audioDb: row.audioDb,
    fromDate: row.fromDate,
    toDate: row.toDate,
    revision: row.revision,
  };
}
