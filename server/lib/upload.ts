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
            done(null, { size: one.sizeBytes, path: one.path, filename: one.sha256 });
          }, done);
      },
      _removeFile(_request, _file, done) {
        Promise.all(staged.map(dropStaged)).then(() => done(null), done);
      },
    },
  };
}

export interface UploadSpec {
  /** Of each file. */
  limitBytes: number;
  toStore?: boolean;
  /** Several files, under `files`; absent: one, under `file`. */
  atMost?: number;
}

/**
 * Reads a form with one file or several: into memory, its bytes then in `request.file`; or into the file store's staging,
 * in the form's order. What is to be said of them goes into the body, so that their digests are part of what an
 * Idempotency-Key stands for.
 *
 * @throws AppError too-large
 */
export async function readUpload(
  request: Request,
  response: Response,
  { limitBytes, toStore = false, atMost }: UploadSpec,
): Promise<StagedFile[]> {
  const files = atMost ?? 1;
  const limits = {
    fileSize: limitBytes,
    files,
    fields: 10,
    fieldSize: 10_000,
    parts: 11 + files,
  };
  const staging = toStore ? stagingStorage(limitBytes) : null;
  const storage = staging?.storage ?? multer.memoryStorage();
  const form = multer({ storage, limits, defParamCharset: "utf8" });
  const read = atMost === undefined ? form.single("file") : form.array("files", atMost);
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
  const found = filesOf(request);
  if (found.length === 0)
    throw unprocessable([issue([atMost === undefined ? "file" : "files"], "file-missing")]);
  const said = found.map((file) => ({
    name: file.originalname,
    sizeBytes: file.size,
    sha256: toStore ? file.filename : createHash("sha256").update(file.buffer).digest("hex"),
  }));
  request.body = {
    ...request.body,
    ...(atMost === undefined ? { file: said[0] } : { files: said }),
  };
  return toStore
    ? found.map(({ path, size, filename }) => ({ path, sizeBytes: size, sha256: filename }))
    : [];
}

function filesOf({ file, files }: Request): Express.Multer.File[] {
  if (file) return [file];
  return Array.isArray(files) ? files : [];
}
