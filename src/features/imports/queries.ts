import { useMutation } from "@tanstack/react-query";
import { type ImportKind, ImportReport } from "../../../shared/schemas/import";
import { RosterReport } from "../../../shared/schemas/roster";
import { ApiError, api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";

export interface ImportOrder {
  readonly kind: ImportKind;
  readonly siteId: string;
  readonly file: File;
  readonly reason: string;
}

/** The browser can no longer read the file that was chosen: it was saved again, moved or deleted. */
export class FileChanged extends Error {
  override readonly name = "FileChanged";
}

async function checkReadable(file: File): Promise<void> {
  await file
    .slice(0, 1)
    .arrayBuffer()
    .catch(() => {
      throw new FileChanged();
    });
}

async function send({ kind, siteId, file, reason }: ImportOrder, isDryRun: boolean, key?: string) {
  await checkReadable(file);
  const body = new FormData();
  body.set("file", file);
  if (reason.trim() !== "") body.set("reason", reason.trim());
  return api.post(`/imports/${kind}`, {
    query: { siteId, dryRun: isDryRun },
    body,
    schema: ImportReport,
    idempotencyKey: key,
  });
}

/** Says line by line what stands in the way and what would come of it; stores nothing. */
export function useDryRun() {
  return useMutation({ mutationFn: (order: ImportOrder) => send(order, true) });
}

/** All of the file, or nothing of it. */
export function useImport(onImported: (report: ImportReport) => void) {
  const changeKey = useChangeKey();
  return useMutation({
    mutationFn: (order: ImportOrder) => {
      const { kind, siteId, file, reason } = order;
      const facts = [kind, siteId, file.name, file.size, file.lastModified, reason];
      return send(order, false, changeKey.keyFor(facts));
    },
    onSuccess: (report) => {
      changeKey.forget();
      onImported(report);
    },
  });
}

/** A refused import brings its report: something changed between look and import. */
export function reportOf(error: unknown): ImportReport | null {
  if (!(error instanceof ApiError) || error.code !== "import-refused") return null;
  const parsed = ImportReport.safeParse((error.body as { report?: unknown }).report);
  return parsed.success ? parsed.data : null;
}

export interface RosterOrder {
  readonly siteId: string;
  readonly file: File;
  /** The file is the whole roster: whoever is missing left on this date. */
  readonly missingLeftOn: string | null;
  readonly confirmedLeavers: number | null;
}

async function sendRoster(
  { siteId, file, missingLeftOn, confirmedLeavers }: RosterOrder,
  isDryRun: boolean,
  key?: string,
) {
  await checkReadable(file);
  const body = new FormData();
  body.set("file", file);
  if (missingLeftOn !== null) body.set("missingLeftOn", missingLeftOn);
  if (confirmedLeavers !== null) body.set("confirmedLeavers", String(confirmedLeavers));
  return api.post("/roster-imports", {
    query: { siteId, dryRun: isDryRun },
    body,
    schema: RosterReport,
    idempotencyKey: key,
  });
}

/** Who would join, change and leave; stores nothing. */
export function useRosterDryRun() {
  return useMutation({ mutationFn: (order: RosterOrder) => sendRoster(order, true) });
}

/** All of the roster, or nothing of it. */
export function useRosterImport(onImported: (report: RosterReport) => void) {
  const changeKey = useChangeKey();
  return useMutation({
    mutationFn: (order: RosterOrder) => {
      const { siteId, file, missingLeftOn, confirmedLeavers } = order;
      const facts = [
        siteId,
        file.name,
        file.size,
        file.lastModified,
        missingLeftOn,
        confirmedLeavers,
      ];
      return sendRoster(order, false, changeKey.keyFor(facts));
    },
    onSuccess: (report) => {
      changeKey.forget();
      onImported(report);
    },
  });
}

/** A refused roster brings its report: something changed between look and import. */
export function rosterReportOf(error: unknown): RosterReport | null {
  if (!(error instanceof ApiError)) return null;
  const parsed = RosterReport.safeParse((error.body as { report?: unknown } | null)?.report);
  return parsed.success ? parsed.data : null;
}
