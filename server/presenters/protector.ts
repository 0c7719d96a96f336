import type { z } from "zod";
import {
  type CombinationView,
  type ProtectorDetail,
  type ProtectorFileView,
  type ProtectorView,
  RegisterData,
} from "../../shared/schemas/protector";
import { type Actor, abilities } from "../lib/policy";
import { protectorPolicy } from "../policies";
import type { CombinationRow } from "../queries/protector-combinations";
import type { ProtectorFileRow } from "../queries/protector-files";
import type { ProtectorRevisionRow, ProtectorRow } from "../queries/protectors";

function presentFacts({ id, number, effectiveFrom, data }: ProtectorRevisionRow) {
  return {
    id,
    number,
    effectiveFrom,
    // Data of an earlier day name less.
    ...RegisterData.parse(data),
  };
}

export function presentProtector(
  actor: Actor,
  row: ProtectorRow,
  revision: ProtectorRevisionRow | undefined,
): ProtectorView {
  if (!revision) throw new Error("a protector has data from its first day on");
  return {
    id: row.id,
    name: row.name,
    kind: row.kind,
    isArchived: row.isArchived,
    revision: row.revision,
    data: presentFacts(revision),
    wearersToday: row.wearersToday,
    can: abilities(protectorPolicy, actor, row),
  };
}

export function presentProtectorDetail(
  actor: Actor,
  row: ProtectorRow,
  revisions: readonly ProtectorRevisionRow[],
): z.infer<typeof ProtectorDetail> {
  return {
    ...presentProtector(
      actor,
      row,
      revisions.find(({ isInForce }) => isInForce),
    ),
    history: revisions.map((revision) => ({
      ...presentFacts(revision),
      reason: revision.reason,
      authorName: revision.authorName,
      createdAt: revision.createdAt.toISOString(),
    })),
  };
}

export function presentProtectorFile(row: ProtectorFileRow): ProtectorFileView {
  return {
    id: row.id,
    fileId: row.fileId,
    title: row.title,
    fileName: row.fileName,
    sizeBytes: row.sizeBytes,
    authorName: row.authorName,
    createdAt: row.createdAt.toISOString(),
  };
}

export function presentCombination(row: CombinationRow): CombinationView {
  return {
    id: row.id,
    innerModelId: row.innerModelId,
    innerName: row.innerName,
    outerModelId: row.outerModelId,
    outerName: row.outerName,
    number: row.number,
    effectiveFrom: row.effectiveFrom,
    bands: row.bands,
    reason: row.reason,
    authorName: row.authorName,
    createdAt: row.createdAt.toISOString(),
    isInForce: row.isInForce,
  };
}
