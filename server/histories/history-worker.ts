import { type DoseSettings, evaluateHistory } from "../../shared/acoustics/history";
import type { HistoryHead, HistoryMapping, HistoryReport } from "../../shared/schemas/history";
import { type Served, serveWorker } from "../lib/serve-worker";
import { kindOf } from "./channels";
import { CHUNK_VALUES, packLevels } from "./level-codec";
import { FileWithoutValues, readHead } from "./read-head";
import { type HistoryToRead, readHistory } from "./read-history";
import { WorkbookRefused } from "./workbook";

export interface HeadTask {
  kind: "head";
  file: string;
  remembered: HistoryMapping | null;
  sheet: string | null;
}
export interface ReportTask extends HistoryToRead {
  kind: "report";
}
export interface LevelsTask extends HistoryToRead {
  kind: "levels";
  settings: readonly DoseSettings[];
}

export interface HeadReply {
  head: HistoryHead | null;
  /** Why the file can't be read at all. */
  refused: { code: string; params: Record<string, string | number> } | null;
}
export interface PackedChannel {
  channel: HistoryMapping["levels"][number]["channel"];
  chunks: { valuesCount: number; packed: Uint8Array }[];
}
export interface LevelsReply {
  report: HistoryReport;
  /** Null where the file is refused. */
  history: {
    startMs: number;
    intervalMs: number;
    valuesCount: number;
    channels: PackedChannel[];
    evaluation: ReturnType<typeof evaluateHistory>;
  } | null;
}

async function head({ file, remembered, sheet }: HeadTask): Promise<HeadReply> {
  try {
    return { head: await readHead(file, remembered, sheet ?? undefined), refused: null };
  } catch (error) {
    if (error instanceof FileWithoutValues)
      return { head: null, refused: { code: "file-without-values", params: {} } };
    if (!(error instanceof WorkbookRefused)) throw error;
    return { head: null, refused: { code: error.code, params: { ...error.params } } };
  }
}

async function levels(
  task: LevelsTask,
  onProgress: (progressPct: number) => void,
): Promise<Served<LevelsReply>> {
  const { report, grid } = await readHistory(task, onProgress);
  if (!grid) return { reply: { report, history: null } };
  const valuesCount = grid.levels[0]!.length;
  const channels = task.mapping.levels.map(({ channel }, index): PackedChannel => {
    const chunks: PackedChannel["chunks"] = [];
    for (let at = 0; at < valuesCount; at += CHUNK_VALUES) {
      const part = grid.levels[index]!.subarray(at, at + CHUNK_VALUES);
      chunks.push({ valuesCount: part.length, packed: packLevels(part) });
    }
    return { channel, chunks };
  });
  const evaluation = evaluateHistory(
    task.mapping.levels.map(({ channel }, index) => ({
      kind: kindOf(channel),
      levels: grid.levels[index]!,
    })),
    grid.intervalMs / 1000,
    [],
    task.settings,
  );
  const { startMs, intervalMs } = grid;
  return { reply: { report, history: { startMs, intervalMs, valuesCount, channels, evaluation } } };
}

serveWorker<HeadTask | ReportTask | LevelsTask, unknown>(async (task, onProgress) => {
  switch (task.kind) {
    case "head":
      return { reply: await head(task) };
    case "report":
      return { reply: { report: (await readHistory(task, onProgress)).report } };
    case "levels":
      return levels(task, onProgress);
  }
});
