import type { ImportKind } from "../../shared/schemas/import";

export interface ImportColumn {
  name: string;
  isRequired: boolean;
  kind: "text" | "number" | "date" | "time" | "choice";
  meaning: string;
  /** What the template shows. */
  example: string;
}

const column = (
  name: string,
  kind: ImportColumn["kind"],
  example: string,
  meaning: string,
): ImportColumn => ({ name, kind, example, meaning, isRequired: true });
const optional = (
  name: string,
  kind: ImportColumn["kind"],
  example: string,
  meaning: string,
): ImportColumn => ({ name, kind, example, meaning, isRequired: false });

const worker = column("employee_number", "text", "1041", "Employee number of the worker");
const date = column(
  "date",
  "date",
  "2026-03-02",
  "Local date on which the shift starts, YYYY-MM-DD",
);

/** The columns of each kind of file, in the order of its template. */
export const IMPORT_COLUMNS: Readonly<Record<ImportKind, readonly ImportColumn[]>> = {
  shifts: [
    worker,
    date,
    column("start", "time", "06:00", "Local start, HH:MM"),
    column("length_min", "number", "480", "Length of the shift, whole minutes"),
    column(
      "task",
      "text",
      "Grinding",
      "Name of a task of the site; one line per task; empty: a shift of which no task is known",
    ),
    column("minutes", "number", "200", "Minutes in the task"),
    optional(
      "worn_pct",
      "number",
      "90",
      "Share of the task for which the protector was worn, %; empty: not known",
    ),
    optional(
      "crew",
      "text",
      "Early fettlers",
      "Crew with which it was worked; empty: the worker's crew of that date",
    ),
    optional("which_hour", "choice", "", "first or second, where the clock showed the start twice"),
    optional("whole_day", "choice", "", "yes, to confirm a shift of exactly 24 hours"),
    optional("open_end", "choice", "", "yes, to confirm a shift whose end still lies ahead"),
    optional(
      "unaccounted",
      "choice",
      "unknown",
      "How the time in no task was: unknown, like-the-rest or quiet",
    ),
    optional("unaccounted_level_db", "number", "", "Level of that time where it was quiet, dB"),
    optional("note", "text", "", "Note on the shift"),
  ],
  readings: [
    worker,
    date,
    column("instrument_serial", "text", "40817", "Serial number of the instrument"),
    column("duration_min", "number", "455", "Run time of the instrument, minutes"),
    column(
      "covers",
      "choice",
      "shift",
      "shift, projected or part: what the run says about the day",
    ),
    optional(
      "start",
      "time",
      "06:00",
      "Start of the shift it belongs to, where the day has several",
    ),
    optional("check_before_db", "number", "114.0", "Field check before, dB"),
    optional("check_after_db", "number", "113.9", "Field check after, dB"),
    optional(
      "kept_reason",
      "text",
      "",
      "Why a run is kept whose field checks drifted by more than 0.5 dB",
    ),
    optional("unusual", "text", "", "What was unusual about the run"),
    column("criterion_level_db", "number", "85", "Settings: criterion level, dB"),
    column("exchange_rate_db", "number", "3", "Settings: exchange rate, 3, 4 or 5 dB"),
    optional("threshold_db", "number", "", "Settings: threshold, dB; empty: none"),
    column("weighting", "choice", "A", "Settings: A, C or Z"),
    column("response", "choice", "slow", "Settings: slow, fast or none"),
    optional("dose_pct", "number", "", "Dose under these settings, %"),
    optional("average_db", "number", "91.4", "LAVG under these settings, or LAeq, dB"),
    optional("lceq_db", "number", "", "LCeq, dB"),
    optional("las_max_db", "number", "", "Highest slow level, dB"),
    optional("peak_db", "number", "", "Peak, dB"),
    optional("peak_weighting", "choice", "", "Weighting of the peak: A, C or Z"),
  ],
  "past-results": [
    worker,
    date,
    optional(
      "level_db",
      "number",
      "91.4",
      "Daily level without protection, dB: LEX,8h, or TWA where the rule set judges a dose",
    ),
    optional("at_ear_db", "number", "78.2", "Daily level at the ear, dB"),
    column("rule_set", "text", "eu-2003-10-ec", "Key of the rule set by which the day was judged"),
    column("length_min", "number", "480", "Length of the day's shifts, minutes"),
    column(
      "grade",
      "choice",
      "task-level",
      "measured-worker, measured-group, task-level or estimate",
    ),
  ],
};
