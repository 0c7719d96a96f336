import { once } from "node:events";
import { pipeline } from "node:stream/promises";
import type { Response } from "express";
import { inTransaction } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Report } from "./blocks";
import { layOut } from "./lay-out";

/** A file name that every system takes. */
export const plainName = (...parts: readonly string[]): string =>
  parts
    .join("-")
    .normalize("NFKD")
    .replace(/[^A-Za-z0-9]+/g, "-")
    .replace(/^-+|-+$/g, "")
    .toLowerCase() || "report";

/** What was read in one state of the database, as pages; the connection is free again before they are made. */
export async function answerPdf(
  actor: Actor,
  response: Response,
  collect: () => Promise<{ report: Report; name: string }>,
): Promise<void> {
  const { report, name } = await inTransaction(
    { organizationId: actor.organizationId, isolation: "repeatable-read" },
    collect,
  );
  const pages = await layOut(report);
  response.attachment(`${name}.pdf`).type("application/pdf");
  await pipeline(pages as unknown as NodeJS.ReadableStream, response);
}

/** The bytes of a report, for whoever puts them elsewhere than into an answer. */
export async function pdfOf(report: Report): Promise<Buffer> {
  const pages = await layOut(report);
  const pieces: Buffer[] = [];
  pages.on("data", (piece: Buffer) => pieces.push(piece));
  await once(pages, "end");
  return Buffer.concat(pieces);
}
