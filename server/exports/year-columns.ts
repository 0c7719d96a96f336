import { mainLimit, RULE_SETS } from "../../shared/rule-sets";

export interface YearColumn {
  name: string;
  /** SQL over `d` days, `r` results, `w` workers, `s` sites, `c` crews, `k` the deciding task. */
  sql: string;
  /** Free text passes the formula guard; codes and numbers leave as they are stored. */
  type: "text" | "code" | "number" | "integer" | "date" | "time" | "boolean" | "id";
  unit: string;
  /** As the catalogue knows it. */
  meaning: string;
}

const quoted = (keys: Iterable<string>) => [...new Set(keys)].map((key) => `'${key}'`).join(", ");

/** Rule sets whose day figure is an energy level (LEX,8h); that of the others is a TWA from a dose. */
const energyRuleSets = quoted(
  RULE_SETS.filter((ruleSet) => mainLimit(ruleSet).quantity === "lex-8h").map(({ key }) => key),
);
const isEnergy = `r.governing_rule_set IN (${energyRuleSets})`;

/** Every column of a year's file, in its order; the dictionary is drawn from the same table. */
export const YEAR_COLUMNS: readonly YearColumn[] = [
  {
    name: "result_id",
    sql: "r.id",
    type: "id",
    unit: "",
    meaning:
      /* i18n */ "The result this record states; it opens to its working. The last record says «rows» here and the number of days in the next field: a file without it is not whole",
  },
  {
    name: "site",
    sql: "s.name",
    type: "text",
    unit: "",
    meaning: /* i18n */ "Site that the day belongs to",
  },
  {
    name: "worker",
    sql: "w.employee_number",
    type: "text",
    unit: "",
    meaning:
      /* i18n */ "Employee number, or the worker's name where the file was asked for by name",
  },
  {
    name: "crew",
    sql: "c.name",
    type: "text",
    unit: "",
    meaning: /* i18n */ "Crew with which the day was worked; empty: none",
  },
  {
    name: "date",
    sql: "d.date",
    type: "date",
    unit: "",
    meaning: /* i18n */ "Local date on which the day's shifts start",
  },
  {
    name: "shift_min",
    sql: "r.shift_min",
    type: "number",
    unit: "min",
    meaning: /* i18n */ "Length of all shifts of the day",
  },
  {
    name: "unaccounted_min",
    sql: "r.unaccounted_min",
    type: "number",
    unit: "min",
    meaning: /* i18n */ "Part of the day for which no task is recorded",
  },
  {
    name: "rule_set",
    sql: "r.governing_rule_set",
    type: "code",
    unit: "",
    meaning: /* i18n */ "Governing rule set by which the day was judged",
  },
  {
    name: "rule_set_version",
    sql: "r.governing_version",
    type: "integer",
    unit: "",
    meaning: /* i18n */ "Version of the rule set",
  },
  {
    name: "method_version",
    sql: "r.method_version",
    type: "integer",
    unit: "",
    meaning: /* i18n */ "Version of the arithmetic; 0: imported, not computed here",
  },
  {
    name: "origin",
    sql: "r.origin",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "computed: from recorded shifts; imported: levels only, working not available",
  },
  {
    name: "lex_8h_db",
    sql: `CASE WHEN ${isEnergy} THEN r.outside_db END`,
    type: "number",
    unit: "dB",
    meaning:
      /* i18n */ "Daily exposure level LEX,8h without protection, ISO 9612; empty where the rule set judges a dose",
  },
  {
    name: "twa_db",
    sql: `CASE WHEN NOT ${isEnergy} THEN r.outside_db END`,
    type: "number",
    unit: "dB",
    meaning:
      /* i18n */ "Time-weighted average without protection, where the rule set judges a dose",
  },
  {
    name: "level_bound",
    sql: "r.outside_bound",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "exact, or whether the level without protection is only an upper or a lower bound of the true one",
  },
  {
    name: "dose_pct",
    sql: "r.dose_pct",
    type: "number",
    unit: "%",
    meaning:
      /* i18n */ "Dose without protection; 100 is the whole allowance; empty where the rule set has none",
  },
  {
    name: "dose_bound",
    sql: "r.dose_bound",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "exact, or whether the dose is only an upper or a lower bound of the true one; empty in results that did not keep it",
  },
  {
    name: "expanded_u_db",
    sql: "r.uncertainty_db",
    type: "number",
    unit: "dB",
    meaning:
      /* i18n */ "Expanded uncertainty of LEX,8h, one-sided 95 %; belongs to no dose and no TWA",
  },
  {
    name: "at_ear_off_db",
    sql: "r.at_ear_db",
    type: "number",
    unit: "dB",
    meaning: /* i18n */ "The day at the ear, wearing time counted, active part off",
  },
  {
    name: "at_ear_bound",
    sql: "r.at_ear_bound",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "exact, or whether the level at the ear is only an upper or a lower bound of the true one; empty in results that did not keep it",
  },
  {
    name: "at_ear_on_db",
    sql: "r.at_ear_active_db",
    type: "number",
    unit: "dB",
    meaning: /* i18n */ "The day at the ear with the active part on; empty without one",
  },
  {
    name: "at_ear_as_worked_db",
    sql: "r.at_ear_as_worked_db",
    type: "number",
    unit: "dB",
    meaning: /* i18n */ "The day at the ear, active part on while the battery lasts",
  },
  {
    name: "at_ear_counted_db",
    sql: "r.at_ear_counted_db",
    type: "number",
    unit: "dB",
    meaning:
      /* i18n */ "The day at the ear as it is judged, where the site credits an active part that passed its check; empty where the part off counts",
  },
  {
    name: "while_worn_db",
    sql: "r.while_worn_db",
    type: "number",
    unit: "dB",
    meaning:
      /* i18n */ "Level at the ear while the protector is worn, in the task that decides its word, active part on where it counts",
  },
  {
    name: "while_worn_bound",
    sql: "r.while_worn_bound",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "exact, or whether the level while worn is only an upper or a lower bound of the true one; empty in results that did not keep it",
  },
  {
    name: "verdict_without_protection",
    sql: "r.verdict_outside",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "under, over, cant-tell-yet or not-assessed, against the criteria judged without protection",
  },
  {
    name: "verdict_at_ear",
    sql: "r.verdict_at_ear",
    type: "code",
    unit: "",
    meaning: /* i18n */ "The same at the ear; not-assessed where the rule set judges nothing there",
  },
  {
    name: "criteria",
    sql: `(SELECT string_agg(x->>'criterionId' || '=' || (x->>'verdict'), ' ' ORDER BY place) FROM jsonb_array_elements(r.criteria->'governing') WITH ORDINALITY AS g(x, place))`,
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "Verdict on every criterion of the governing rule set, peak and ceiling included, as criterion=verdict",
  },
  {
    name: "protector",
    sql: "r.has_protector",
    type: "code",
    unit: "",
    meaning: /* i18n */ "Whether a protector counted as worn in some task: yes, no or unknown",
  },
  {
    name: "protector_word",
    sql: "r.word",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "too-little, just-enough, good, strong-side, too-much, or enough where the rule has no scale",
  },
  {
    name: "deciding_task",
    sql: "k.name",
    type: "text",
    unit: "",
    meaning: /* i18n */ "Task that decides the protector's word",
  },
  {
    name: "reason",
    sql: "r.reason",
    type: "code",
    unit: "",
    meaning: /* i18n */ "What stands between the day and a plain verdict",
  },
  {
    name: "grade",
    sql: "r.grade",
    type: "code",
    unit: "",
    meaning:
      /* i18n */ "How well the levels are known: measured-worker, measured-group, task-level or estimate",
  },
  {
    name: "is_projected",
    sql: "r.is_projected::text",
    type: "boolean",
    unit: "",
    meaning:
      /* i18n */ "A shorter reading was projected to the day because the officer said that the rest was like it",
  },
  {
    name: "is_kept",
    sql: "r.is_kept::text",
    type: "boolean",
    unit: "",
    meaning: /* i18n */ "It rests on a run kept with a reason in spite of its field checks",
  },
  {
    name: "is_corrected",
    sql: "EXISTS (SELECT 1 FROM shifts f WHERE f.worker_id = d.worker_id AND f.date = d.date AND f.revision > 1)::text",
    type: "boolean",
    unit: "",
    meaning: /* i18n */ "A shift of the day was corrected after it was first recorded",
  },
  {
    name: "is_out_of_date",
    sql: "d.is_stale::text",
    type: "boolean",
    unit: "",
    meaning: /* i18n */ "Its inputs have changed since and it is about to be computed again",
  },
  {
    name: "computed_at",
    sql: `to_char(r.computed_at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.US"Z"')`,
    type: "time",
    unit: "",
    meaning: /* i18n */ "When the result was stored, UTC",
  },
  {
    name: "inputs_sha256",
    sql: "encode(r.inputs_hash, 'hex')",
    type: "id",
    unit: "",
    meaning: /* i18n */ "Digest of the input revisions and versions that the result rests on",
  },
];

/** Begins the last record of a file that is whole. */
export const TRAILER = "rows";
