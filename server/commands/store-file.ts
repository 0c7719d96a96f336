import { execute, row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import { fileStore, type StagedFile, sniffMediaType } from "../lib/file-store";
import type { Actor } from "../lib/policy";

/** What an organization may keep, bytes as they came: a year of 250,000 time histories in text and as much again. */
const QUOTA_BYTES = 500 * 1024 ** 3;

const KINDS_BY_ENDING: Readonly<Record<string, string>> = {
  pdf: "application/pdf",
  png: "image/png",
  jpg: "image/jpeg",
  jpeg: "image/jpeg",
  webp: "image/webp",
};

/** By its name it would be taken. */
function isNamedAs(name: string, mediaTypes: readonly string[]): boolean {
  const kind = KINDS_BY_ENDING[name.split(".").at(-1)?.toLowerCase() ?? ""];
  return kind !== undefined && mediaTypes.includes(kind);
}

/**
 * Keeps a file under its content and returns its id; the same content again is the same file.
 *
 * @throws AppError 422 where its content is of no kind in `mediaTypes`, 413 past the organization's quota.
 */
export async function storeFile(
  actor: Pick<Actor, "organizationId" | "userId">,
  staged: StagedFile,
  name: string,
  mediaTypes: readonly string[],
): Promise<{ id: string; isNew: boolean }> {
  const mediaType = await sniffMediaType(staged.path);
  if (!mediaTypes.includes(mediaType))
    throw unprocessable([
      isNamedAs(name, mediaTypes)
        ? issue(["file"], "file-not-as-named", { name, found: mediaType })
        : issue(["file"], "file-kind", { found: mediaType }),
    ]);
  const used = await row<{ bytes: number }>(
    "SELECT coalesce(sum(size_bytes), 0)::float8 AS bytes FROM files",
  );
  if ((used?.bytes ?? 0) + staged.sizeBytes > QUOTA_BYTES)
    throw new AppError("quota-exceeded", 413, { limitBytes: QUOTA_BYTES });
  const inserted = await execute(
    `INSERT INTO files (organization_id, sha256, size_bytes, media_type, name, uploaded_by)
     VALUES ($1, decode($2, 'hex'), $3, $4, $5, $6) ON CONFLICT (organization_id, sha256)
     DO UPDATE SET name = excluded.name, uploaded_by = excluded.uploaded_by, uploaded_at = now(), erased_at = NULL WHERE files.erased_at IS NOT NULL`,
    [
      actor.organizationId,
      staged.sha256,
      staged.sizeBytes,
      mediaType,
      name.slice(-255),
      actor.userId,
    ],
  );
  // Before the commit: a row never names a file that is not there, and a file without a row is swept up later.
  await fileStore().keep(actor.organizationId, staged);
  const found = await row<{ id: string }>(
    "SELECT id FROM files WHERE sha256 = decode(:sha256, 'hex')",
    {
      sha256: staged.sha256,
    },
  );
  if (!found) throw new Error("a file just stored has a row");
  return { id: found.id, isNew: inserted === 1 };
}
