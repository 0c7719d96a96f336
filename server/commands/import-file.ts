import { randomUUID } from "node:crypto";
import type { z } from "zod";
import {
  IMPORT_LINES_LIMIT,
  type ImportForm,
  type ImportIssue,
  type ImportKind,
  type ImportReport,
} from "../../shared/schemas/import";
import { IMPORT_COLUMNS } from "../imports/columns";
import { decodeText } from "../imports/decode-text";
import { draftPastResults } from "../imports/draft-past-results";
import { draftReadings } from "../imports/draft-readings";
import { draftShifts } from "../imports/draft-shifts";
import type { ImportDraft } from "../imports/import-draft";
import { type CsvFile, readCsv } from "../imports/read-csv";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import type { DayKey } from "../queries/day-inputs";
import { entryNotices } from "../queries/entry-notices";
import { queueRecompute } from "./mark-days-stale";
import { recomputeDays } from "./recompute-days";
import { scheduleNotices } from "./schedule-notices";

/** More days are computed by a job. */
const DAYS_AT_ONCE = 500;
const ISSUES_SHOWN = 500;

interface ImportOrder {
  kind: ImportKind;
  isDryRun: boolean;
  form: z.output<typeof ImportForm>;
  bytes: Buffer;
}

const drafts: Record<
  ImportKind,
  (actor: Actor, site: Site, file: CsvFile, reason: string | null) => Promise<ImportDraft>
> = {
  shifts: draftShifts,
  readings: draftReadings,
  "past-results": draftPastResults,
};

const nothing: ImportDraft = {
  fresh: 0,
  changed: 0,
  unchanged: 0,
  days: [],
  issues: [],
  store: async () => [],
};

/**
 * Imports a file, all of it or nothing. A dry run says line by line what stands in the way and what would come of it.
 *
 * @throws AppError import-refused with the report, where a line has a fault; nothing-to-do, where all is recorded already.
 */
export async function importFile(
  actor: Actor,
  site: Site,
  { kind, isDryRun, form, bytes }: ImportOrder,
): Promise<ImportReport> {
  const file = await readCsv(decodeText(bytes), IMPORT_COLUMNS[kind], IMPORT_LINES_LIMIT);
  // Where the columns are not those of this kind, the lines say nothing.
  const draft =
    file.lines.length > 0 ? await drafts[kind](actor, site, file, form.reason) : nothing;
  const issues = [...file.issues, ...draft.issues].sort((a, b) => a.line - b.line);
  const report = { ...summarize(kind, form.file.name, file, draft, issues), isDryRun };
  if (isDryRun) return report;
  if (issues.length > 0)
    throw new AppError("import-refused", 422, { issuesCount: issues.length }, [], { report });
  if (draft.fresh + draft.changed === 0)
    throw new AppError("nothing-to-do", 409, { unchanged: draft.unchanged });

  const entryId = randomUUID();
  const { file: facts, reason } = form;
  await recordAudit(actor, {
    action: `import-${kind}`,
    subjectKind: "site",
    subjectId: site.id,
    values: {
      entryId,
      fileName: facts.name,
      sha256: facts.sha256,
      fresh: draft.fresh,
      changed: draft.changed,
      reason,
    },
  });
  const toCompute = await draft.store(entryId);
  const { computedDays, queuedDays } = await computeSoon(actor, site.id, entryId, toCompute);
  return { ...report, entryId, computedDays, queuedDays, notices: await entryNotices(entryId) };
}

function summarize(
  kind: ImportKind,
  fileName: string,
  file: CsvFile,
  draft: ImportDraft,
  issues: readonly ImportIssue[],
): Omit<ImportReport, "isDryRun"> {
  const { fresh, changed, unchanged, days } = draft;
  const dates = days.map(({ date }) => date).sort();
  return {
    kind,
    fileName,
    lines: file.lines.length,
    fresh,
    changed,
    unchanged,
    workers: new Set(days.map(({ workerId }) => workerId)).size,
    firstDate: dates[0] ?? null,
    lastDate: dates.at(-1) ?? null,
    issues: issues.slice(0, ISSUES_SHOWN),
    issuesCount: issues.length,
    entryId: null,
    computedDays: 0,
    queuedDays: 0,
    notices: null,
  };
}

async function computeSoon(actor: Actor, siteId: string, entryId: string, keys: readonly DayKey[]) {
  const days = [...new Map(keys.map((key) => [`${key.workerId} ${key.date}`, key])).values()];
  const { organizationId } = actor;
  if (days.length <= DAYS_AT_ONCE) {
    const recomputed = await recomputeDays(organizationId, days);
    await scheduleNotices({ organizationId, author: actor, entryId, siteId, recomputed });
    return { computedDays: days.length, queuedDays: 0 };
  }
  await execute(
    `UPDATE days d SET is_stale = TRUE FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date) WHERE d.worker_id = x."workerId" AND d.date = x.date`,
    [JSON.stringify(days)],
  );
  await queueRecompute(organizationId);
  return { computedDays: 0, queuedDays: days.length };
}
