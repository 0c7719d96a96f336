import type { Response } from "express";

/**
 * Writes a file as the answer. One that fails in the middle is cut off, so that nobody takes it for whole; before its
 * first byte it becomes an ordinary error, which is no attachment.
 */
export async function cutOffOnError(response: Response, write: () => Promise<void>): Promise<void> {
  try {
    await write();
  } catch (error) {
    if (response.headersSent) response.destroy();
    else response.removeHeader("content-disposition");
    throw error;
  }
}
