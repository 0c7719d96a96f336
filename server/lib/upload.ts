import { createHash } from "node:crypto";
import type { Request, Response } from "express";
import multer, { MulterError, type StorageEngine } from "multer";
import { AppError, issue, unprocessable } from "./errors";
import { dropStaged, fileStore, type StagedFile } from "./file-store";

/** Streams a file into the store's staging, past no one's memory. */
function stagingStorage(limitBytes: number): { storage: StorageEngine; staged: StagedFile[] } {
  const staged: StagedFile[] = [];
  return {
    staged,
    storage: {
      _handleFile(_request, file, done) {
        fileStore()
          .stage(file.stream, limitBytes)
          .then((one) => {
            staged.push(one);
            done(null, { size: one.sizeBytes });
          }, done);
      },
      _removeFile(_request, _file, done) {
        Promise.all(staged.map(dropStaged)).then(() => done(null), done);
      },
    },
  };
}

/**
 * Reads a form with one file: into memory, its bytes then in `request.file`; or into the file store's staging. What is to
 * be said of it goes into the body, so that its digest is part of what an Idempotency-Key stands for.
 *
 * @throws AppError too-large
 */
export async function readUpload(
  request: Request,
  response: Response,
  { limitBytes, toStore = false }: { limitBytes: number; toStore?: boolean },
): Promise<StagedFile | null> {
  const limits = { fileSize: limitBytes, files: 1, fields: 10, fieldSize: 10_000, parts: 12 };
  const staging = toStore ? stagingStorage(limitBytes) : null;
  const storage = staging?.storage ?? multer.memoryStorage();
  const read = multer({ storage, limits, defParamCharset: "utf8" }).single("file");
  try {
    await new Promise<void>((resolve, reject) =>
      read(request, response, (error?: unknown) => (error ? reject(error) : resolve())),
    );
  } catch (error) {
    await Promise.all((staging?.staged ?? []).map(dropStaged));
    if (error instanceof AppError) throw error;
    if (!(error instanceof MulterError)) throw new AppError("invalid", 400);
    if (error.code === "LIMIT_FILE_SIZE") throw new AppError("too-large", 413, { limitBytes });
    throw unprocessable([issue(["file"], "form-unreadable", { detail: error.code })]);
  }
  const { file } = request;
  if (!file) throw unprocessable([issue(["file"], "file-missing")]);
  const staged = staging?.staged[0] ?? null;
  const sha256 = staged?.sha256 ?? createHash("sha256").update(file.buffer).digest("hex");
  request.body = {
    ...request.body,
    file: { name: file.originalname, sizeBytes: file.size, sha256 },
  };
  return staged;
}
