import { createHash } from "node:crypto";
import type { Request, Response } from "express";
import multer, { MulterError } from "multer";
import { AppError, issue, unprocessable } from "./errors";

/**
 * Reads a form with one file into memory: its bytes into `request.file`, what is to be said of it into the body. Its
 * digest is so part of what an Idempotency-Key stands for.
 *
 * @throws AppError too-large
 */
export async function readUpload(
  request: Request,
  response: Response,
  limitBytes: number,
): Promise<void> {
  const limits = { fileSize: limitBytes, files: 1, fields: 10, fieldSize: 10_000, parts: 12 };
  const storage = multer.memoryStorage();
  const read = multer({ storage, limits, defParamCharset: "utf8" }).single("file");
  try {
    await new Promise<void>((resolve, reject) =>
      read(request, response, (error?: unknown) => (error ? reject(error) : resolve())),
    );
  } catch (error) {
    if (!(error instanceof MulterError)) throw new AppError("invalid", 400);
    if (error.code === "LIMIT_FILE_SIZE") throw new AppError("too-large", 413, { limitBytes });
    throw unprocessable([issue(["file"], "form-unreadable", { detail: error.code })]);
  }
  const { file } = request;
  if (!file) throw unprocessable([issue(["file"], "file-missing")]);
  const sha256 = createHash("sha256").update(file.buffer).digest("hex");
  request.body = {
    ...request.body,
    file: { name: file.originalname, sizeBytes: file.size, sha256 },
  };
}
