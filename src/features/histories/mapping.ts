import { readDate, readElapsed, readTime, readValue } from "../../../shared/history-file/cells";
import type {
  HistoryChannel,
  HistoryHead,
  HistoryMapping,
  ProposedMapping,
} from "../../../shared/schemas/history";

/** What a column is: a part of the time, or levels of a kind. */
export type ColumnRole = "" | "date-time" | "date" | "time" | "elapsed" | HistoryChannel;
export type Unit = HistoryMapping["levels"][number]["unit"];

export interface MappingDraft {
  sheet: string | null;
  delimiter: HistoryMapping["delimiter"];
  skipLines: number | null;
  decimal: HistoryMapping["decimal"];
  dateOrder: HistoryMapping["dateOrder"];
  clock: HistoryMapping["clock"];
  startDate: string | null;
  startTime: string;
  elapsedUnit: "s" | "ms" | "hh:mm:ss";
  roles: ColumnRole[];
  units: Unit[];
  overRange: string;
  underRange: string;
}

export const columnCount = ({ lines }: Pick<HistoryHead, "lines">): number =>
  Math.max(1, ...lines.map(({ length }) => length));

/** The draft that a proposal makes; without one every column is left alone. */
export function draftOf(head: HistoryHead, mapping: ProposedMapping | null): MappingDraft {
  const count = columnCount(head);
  const roles: ColumnRole[] = Array.from({ length: count }, () => "");
  const units: Unit[] = Array.from({ length: count }, () => "dB");
  for (const { column, channel, unit } of mapping?.levels ?? []) {
    roles[column] = channel;
    units[column] = unit;
  }
  const time = mapping?.time;
  if (time?.kind === "date-time") roles[time.column] = "date-time";
  else if (time?.kind === "time-of-day") roles[time.column] = "time";
  else if (time?.kind === "elapsed") roles[time.column] = "elapsed";
  else if (time) {
    roles[time.dateColumn] = "date";
    roles[time.timeColumn] = "time";
  }
  const [startDate = null, startTime = ""] = mapping?.startsAt?.split(/[T ]/) ?? [];
  return {
    sheet: mapping?.sheet ?? null,
    delimiter: mapping?.delimiter ?? head.delimiter ?? ",",
    skipLines: mapping?.skipLines ?? 1,
    decimal: mapping?.decimal ?? ".",
    dateOrder: mapping?.dateOrder ?? "ymd",
    clock: mapping?.clock ?? "site",
    startDate,
    startTime,
    elapsedUnit: time?.kind === "elapsed" ? time.unit : "s",
    roles,
    units,
    overRange: mapping?.overRange.join(" ") ?? "",
    underRange: mapping?.underRange.join(" ") ?? "",
  };
}

export type DraftFault =
  | "no-time"
  | "time-twice-mapped"
  | "no-levels"
  | "channel-twice"
  | "start-missing"
  | "skip-missing";

const TIME_ROLES = new Set<ColumnRole>(["date-time", "date", "time", "elapsed"]);

function timeOf(draft: MappingDraft): HistoryMapping["time"] | DraftFault {
  const at = (role: ColumnRole) => draft.roles.indexOf(role);
  const used = draft.roles.filter((role) => TIME_ROLES.has(role));
  if (new Set(used).size < used.length) return "time-twice-mapped";
  if (at("date-time") >= 0)
    return used.length === 1 ? { kind: "date-time", column: at("date-time") } : "time-twice-mapped";
  if (at("elapsed") >= 0)
    return used.length === 1
      ? { kind: "elapsed", column: at("elapsed"), unit: draft.elapsedUnit }
      : "time-twice-mapped";
  if (at("time") < 0) return "no-time";
  return at("date") >= 0
    ? { kind: "date-and-time", dateColumn: at("date"), timeColumn: at("time") }
    : { kind: "time-of-day", column: at("time") };
}

const marks = (text: string) => text.split(/\s+/).filter((mark) => mark !== "");

/** Whether the file itself says no date. */
export const needsStart = (draft: MappingDraft): boolean => {
  const time = timeOf(draft);
  return typeof time !== "string" && (time.kind === "elapsed" || time.kind === "time-of-day");
};

/** The mapping that a draft is, or what it still lacks. */
export function toMapping(draft: MappingDraft): HistoryMapping | DraftFault {
  const time = timeOf(draft);
  if (typeof time === "string") return time;
  const levels = draft.roles.flatMap((role, column) =>
    role === "" || TIME_ROLES.has(role)
      ? []
      : [{ column, channel: role as HistoryChannel, unit: draft.units[column]! }],
  );
  if (levels.length === 0) return "no-levels";
  if (new Set(levels.map(({ channel }) => channel)).size < levels.length) return "channel-twice";
  if (draft.skipLines === null) return "skip-missing";
  const isStarted = draft.startDate !== null && /^\d{1,2}:\d{2}(:\d{2})?$/.test(draft.startTime);
  if (needsStart(draft) && !isStarted) return "start-missing";
  return {
    sheet: draft.sheet,
    delimiter: draft.delimiter,
    skipLines: draft.skipLines,
    decimal: draft.decimal,
    time,
    dateOrder: draft.dateOrder,
    startsAt: needsStart(draft) ? `${draft.startDate}T${draft.startTime}` : null,
    clock: draft.clock,
    levels,
    overRange: marks(draft.overRange),
    underRange: marks(draft.underRange),
  };
}

export interface ReadLine {
  line: number;
  /** Local date and time as "2026-03-02 06:00:00"; null where it can't be read. */
  time: string | null;
  /** In the unit of the column. */
  values: ReturnType<typeof readValue>[];
}

const wallText = (ms: number) =>
  new Date(ms)
    .toISOString()
    .slice(0, 23)
    .replace("T", " ")
    .replace(/\.000$/, "");

function timeText(cells: readonly string[], mapping: HistoryMapping): string | null {
  const { time } = mapping;
  const start = mapping.startsAt
    ? Date.parse(`${mapping.startsAt.replace(/^(.{16})$/, "$1:00")}Z`)
    : Number.NaN;
  switch (time.kind) {
    case "elapsed": {
      const elapsed = readElapsed(cells[time.column] ?? "", time.unit, mapping.decimal);
      return elapsed === null || Number.isNaN(start) ? null : wallText(start + elapsed);
    }
    case "time-of-day": {
      const found = readTime(cells[time.column] ?? "");
      return found && mapping.startsAt
        ? `${mapping.startsAt.slice(0, 10)} ${wallText(found.ms).slice(11)}`
        : null;
    }
    case "date-time": {
      const date = readDate(cells[time.column] ?? "", mapping.dateOrder);
      const found = date && readTime(date.rest === "" ? "00:00" : date.rest);
      return date && found ? wallText(date.dayMs + found.ms) : null;
    }
    case "date-and-time": {
      const date = readDate(cells[time.dateColumn] ?? "", mapping.dateOrder);
      const clock = cells[time.timeColumn] ?? "";
      const found = readTime(readDate(clock, "ymd")?.rest ?? clock);
      return date && found ? wallText(date.dayMs + found.ms) : null;
    }
  }
}

/** The first lines as this mapping reads them. */
export function readFirstLines(
  head: HistoryHead,
  mapping: HistoryMapping,
  count: number,
): ReadLine[] {
  return head.lines
    .map((cells, index) => ({ cells, line: index + 1 }))
    .slice(mapping.skipLines)
    .filter(({ cells }) => cells.some((cell) => cell !== ""))
    .slice(0, count)
    .map(({ cells, line }) => ({
      line,
      time: timeText(cells, mapping),
      values: mapping.levels.map(({ column }) => readValue(cells[column] ?? "", mapping)),
    }));
}
