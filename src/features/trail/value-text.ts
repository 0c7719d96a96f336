import type { I18n } from "@lingui/core";
import type { LevelMetric, MeterSettings, Unaccounted } from "../../../shared/acoustics/types";
import { findingStateWord, findingWord } from "../../../shared/findings/words";
import { formatDate, formatInstant, formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { editNumber, fieldNumber, NO_FIGURE } from "../../../shared/format/number";
import { isLocale, LOCALE_NAMES, type Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import { DUTY_BEARERS } from "../../../shared/rule-sets/employer-duties";
import { RULE_SETS } from "../../../shared/rule-sets/index";
import type { AuditEventView, NamedThing } from "../../../shared/schemas/audit-event";
import { FINDING_KINDS, FindingState } from "../../../shared/schemas/finding";
import type { HistoryStretch } from "../../../shared/schemas/history";
import {
  gearWord,
  gradeWord,
  instrumentClassWord,
  instrumentKindWord,
  metricWord,
  protectorKindWord,
  settingsWords,
  zoneWord,
} from "../../../shared/words/register-words";
import { bearerWord } from "../../lib/employer-words";
import { roleWord } from "../../lib/role-word";
import { fieldWord } from "./field-words";

export type Names = ReadonlyMap<string, NamedThing>;

export interface ValueWords {
  readonly i18n: I18n;
  readonly locale: Locale;
  readonly names: Names;
  readonly timeZone: string;
  readonly subjectKind: string;
}

const isId = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;
const isDate = /^\d{4}-\d\d-\d\d$/;
const isInstant = /^\d{4}-\d\d-\d\dT[\d:.]+(Z|[+-]\d\d:\d\d)$/;

/** More than this is counted, and stands folded. */
const MOST_IN_A_LINE = 3;
const HOUR_S = 3600;

/** Time from the beginning of a history: 01:10, and 01:10:05 where it has seconds. */
function offsetText(atS: number): string {
  const two = (value: number) => String(Math.floor(value)).padStart(2, "0");
  const seconds = Math.round(atS % 60);
  const text = `${two(atS / HOUR_S)}:${two((atS % HOUR_S) / 60)}`;
  return seconds === 0 ? text : `${text}:${two(seconds)}`;
}

/** "00:00 to 01:10 Plate hammering": a stretch of a time history. */
function stretchText(words: ValueWords, { fromS, toS, ...rest }: HistoryStretch): string {
  const what =
    rest.kind === "task"
      ? nameText(words, rest.taskId)
      : words.i18n.t("left out, {reason}", { reason: rest.reason });
  return words.i18n.t("{from} to {to} {what}", {
    from: offsetText(fromS),
    to: offsetText(toS),
    what,
  });
}

/** A member of an event's values as a person reads it: named, in words, exact, with its unit. */
export function valueText(words: ValueWords, field: string, value: unknown): string {
  const { i18n, locale } = words;
  if (value === null || value === undefined || value === "") return NO_FIGURE;
  if (typeof value === "boolean") return value ? i18n.t("yes") : i18n.t("no");
  if (typeof value === "number") return numberText(field, value, locale);
  if (typeof value === "string") return stringText(words, field, value);
  if (Array.isArray(value)) return listText(words, field, value);
  return objectText(words, field, value as Record<string, unknown>);
}

/** A trail rounds nothing: all stored digits. */
function numberText(field: string, value: number, locale: Locale): string {
  // The only time that screens show in µs.
  if (field === "delayS") return `${fieldNumber(value * 1e6, locale)}\u00a0µs`;
  const figure = field === "year" ? String(value) : editNumber(value, locale);
  if (field.endsWith("Db")) return `${figure}\u00a0dB`;
  if (field.endsWith("Pct")) return `${figure}\u00a0%`;
  if (field.endsWith("Hz")) return `${figure}\u00a0Hz`;
  if (/[a-z]S$/.test(field)) return `${figure}\u00a0s`;
  if (field.endsWith("Min"))
    return Number.isInteger(value) ? formatDuration(value, locale) : `${figure}\u00a0min`;
  return figure;
}

function stringText(words: ValueWords, field: string, value: string): string {
  const { i18n, locale, timeZone } = words;
  if (isId.test(value)) return nameText(words, value);
  if (isDate.test(value)) return formatDate(value, locale);
  if (isInstant.test(value)) return formatInstant(value, timeZone, locale);
  return (
    codeText(words, field, value) ??
    (field === "class" ? i18n.t("class {value}", { value }) : value)
  );
}

/** What an id stands for: "D. Tavernor", "D. Tavernor, 1 Dec 2026". */
export function nameText({ i18n, locale, names }: ValueWords, id: string): string {
  const thing = names.get(id);
  if (!thing) return i18n.t("not shown to you");
  const { name, date, code } = thing;
  return [
    code && isFindingKind(code) ? findingWord(i18n, code) : null,
    name && isolate(name),
    date && formatShortDate(date, locale),
  ]
    .filter(Boolean)
    .join(", ");
}

const isFindingKind = (code: string): code is (typeof FINDING_KINDS)[number] =>
  FINDING_KINDS.some((kind) => kind === code);

type Coded = (words: ValueWords, code: never) => string | undefined;

/** Codes by the field that they stand in, in the words that other screens use for them. */
const CODED: Readonly<Record<string, Coded>> = {
  zone: ({ i18n }, code) => zoneWord(i18n, code),
  grade: ({ i18n }, code) => gradeWord(i18n, code),
  instrument: ({ i18n }, code) => instrumentClassWord(i18n, code),
  role: ({ i18n }, code) => roleWord(i18n, code),
  language: (_words, code) => (isLocale(code) ? LOCALE_NAMES[code] : undefined),
  governingRuleSet: ({ i18n }, code) => ruleSetTitle(i18n, code),
  comparisonRuleSets: ({ i18n }, code) => ruleSetTitle(i18n, code),
  criterion: ({ i18n }, code) => criterionTitle(i18n, code),
  kind: ({ i18n, subjectKind }, code) => kindText(i18n, subjectKind, code),
  from: ({ i18n }, code) => stateText(i18n, code),
  to: ({ i18n }, code) => stateText(i18n, code),
  employer: ({ i18n }, code: string) =>
    ({ own: i18n.t("own"), agency: i18n.t("agency"), contractor: i18n.t("contractor") })[code],
  covers: ({ i18n }, code: string) =>
    ({
      shift: i18n.t("the shift"),
      projected: i18n.t("a part; the rest was like it"),
      part: i18n.t("a part; only evidence"),
    })[code],
  whichHour: ({ i18n }, code: string) =>
    ({ first: i18n.t("the first"), second: i18n.t("the second") })[code],
  method: ({ i18n }, code: string) =>
    ({
      psychophysical: i18n.t("Heard thresholds"),
      "real-ear-microphones": i18n.t("Microphones in the real ear"),
      "two-microphones": i18n.t("Two microphones"),
    })[code],
  ear: ({ i18n }, code: string) => ({ left: i18n.t("left"), right: i18n.t("right") })[code],
  how: ({ i18n }, code: string) =>
    ({
      returned: i18n.t("brought back"),
      lost: i18n.t("lost"),
      damaged: i18n.t("broken"),
      replaced: i18n.t("replaced"),
    })[code],
  acknowledgedHow: ({ i18n }, code: string) =>
    ({ "in-person": i18n.t("in person"), "own-page": i18n.t("on the own page") })[code],
  source: ({ i18n }, code: string) =>
    ({ round: i18n.t("a round"), "own-report": i18n.t("own report") })[code],
  wornGear: ({ i18n }, code) => gearWord(i18n, code),
  requiredGear: ({ i18n }, code) => gearWord(i18n, code),
  measuresFor: ({ i18n }, code: string) => bearerText(i18n, code),
  protectsFor: ({ i18n }, code: string) => bearerText(i18n, code),
  trainsFor: ({ i18n }, code: string) => bearerText(i18n, code),
  keepsFor: ({ i18n }, code: string) => bearerText(i18n, code),
  tellsFor: ({ i18n }, code: string) => bearerText(i18n, code),
  workers: ({ i18n }, code: string) =>
    ({ number: i18n.t("employee number"), name: i18n.t("name") })[code],
};

const codeText = (words: ValueWords, field: string, value: string): string | undefined =>
  CODED[field]?.(words, value as never);

const bearerText = (i18n: I18n, code: string): string | undefined => {
  const bearer = DUTY_BEARERS.find((one) => one === code);
  return bearer && bearerWord(i18n, bearer);
};

const ruleSetTitle = (i18n: I18n, key: string): string | undefined => {
  const found = RULE_SETS.find((ruleSet) => ruleSet.key === key);
  return found && i18n._(found.title);
};

function criterionTitle(i18n: I18n, code: string): string | undefined {
  const [key, id] = code.split(":");
  const ruleSet = RULE_SETS.find((one) => one.key === key);
  const criterion = ruleSet?.criteria.find((one) => one.id === id);
  return ruleSet && criterion && `${i18n._(ruleSet.title)}: ${i18n._(criterion.label)}`;
}

function kindText(i18n: I18n, subjectKind: string, code: string): string | undefined {
  if (isFindingKind(code)) return findingWord(i18n, code);
  if (subjectKind === "protector") return protectorKindWord(i18n, code as never);
  if (subjectKind === "instrument") return instrumentKindWord(i18n, code as never);
  return undefined;
}

function stateText(i18n: I18n, code: string): string | undefined {
  const state = FindingState.options.find((one) => one === code);
  return state && findingStateWord(i18n, state);
}

/** Levels of one kind stand behind each other with one unit; other members each for itself. */
function listText(words: ValueWords, field: string, values: readonly unknown[]): string {
  if (values.length === 0) return NO_FIGURE;
  const isFigures = values.every((value) => value === null || typeof value === "number");
  if (field === "stretches")
    return values.map((value) => stretchText(words, value as HistoryStretch)).join("; ");
  if (!isFigures) return values.map((value) => valueText(words, field, value)).join("; ");
  const figures = values.map(
    (value) => editNumber(value as number | null, words.locale) || NO_FIGURE,
  );
  return `${figures.join(" ")}${field.endsWith("Db") ? "\u00a0dB" : ""}`;
}

function objectText(words: ValueWords, field: string, value: Record<string, unknown>): string {
  const { i18n, locale } = words;
  const { taskId, role, how } = value;
  if (field === "metric") return metricWord(i18n, value as unknown as LevelMetric);
  if ((field === "settings" && "exchangeRateDb" in value) || field === "presets")
    return settingsWords(i18n, value as unknown as MeterSettings, locale);
  if (field === "unaccounted" && typeof how === "string")
    return unaccountedText(words, value as unknown as Unaccounted);
  if (field === "peak" && "weighting" in value)
    return `${valueText(words, "levelDb", value.levelDb)} (${String(value.weighting)})`;
  if (
    ["grants", "granted", "revoked", "keptAsLastAdministrator"].includes(field) &&
    typeof role === "string"
  ) {
    const values = {
      role: roleWord(i18n, role as never),
      site: valueText(words, "siteId", value.siteId),
    };
    return value.siteId === null
      ? i18n.t("{role}, all sites", values)
      : i18n.t("{role}, {site}", values);
  }
  if (typeof taskId === "string" && "durationMin" in value) {
    const task = `${nameText(words, taskId)} ${valueText(words, "durationMin", value.durationMin)}`;
    return typeof value.wornPct === "number"
      ? i18n.t("{task}, worn {share}", {
          task,
          share: valueText(words, "wornPct", value.wornPct),
        })
      : task;
  }
  return Object.entries(value)
    .filter(([, member]) => member !== null && member !== "")
    .map(([name, member]) => `${fieldWord(i18n, name)} ${valueText(words, name, member)}`)
    .join(", ");
}

function unaccountedText(words: ValueWords, unaccounted: Unaccounted): string {
  const { i18n } = words;
  switch (unaccounted.how) {
    case "unknown":
      return i18n.t("not known");
    case "like-the-rest":
      return i18n.t("like the rest");
    case "quiet":
      return i18n.t("quiet, {level}", { level: valueText(words, "levelDb", unaccounted.levelDb) });
  }
}

/** Ids of the record-keeping itself, which stand for nothing that anybody would look for. */
const OWN_IDS: ReadonlySet<string> = new Set(["entryId", "assignmentId", "fileId"]);

export interface ValueLine {
  readonly field: string;
  readonly text: string;
  /** What the text only counts. */
  readonly parts?: readonly string[];
  /** What stood there before, where it is a change. */
  readonly before: string | null;
}

const isChange = (value: unknown): value is { from: unknown; to: unknown } =>
  typeof value === "object" && value !== null && Object.keys(value).sort().join() === "from,to";

/** An event's values, one line each: what was said, or what it was before and what it is. */
export function valueLines(
  words: ValueWords,
  values: NonNullable<AuditEventView["values"]>,
): ValueLine[] {
  const { from, to, ...others } = values;
  // A finding's step says its states side by side with the rest.
  const given: [string, unknown][] =
    from === undefined && to === undefined
      ? Object.entries(values)
      : [["state", { from, to }], ...Object.entries(others)];
  return given
    .filter(([name, value]) => value !== null && value !== "" && !OWN_IDS.has(name))
    .map(([name, value]) => {
      const field = name === "state" ? words.i18n.t("State") : fieldWord(words.i18n, name);
      if (name === "stretches" && Array.isArray(value) && value.length > MOST_IN_A_LINE)
        return {
          field,
          text: words.i18n.t("{count, plural, one {# stretch} other {# stretches}}", {
            count: value.length,
          }),
          parts: value.map((stretch) => stretchText(words, stretch)),
          before: null,
        };
      if (!isChange(value)) return { field, text: valueText(words, name, value), before: null };
      const code = name === "state" ? "to" : name;
      return {
        field,
        text: valueText(words, code, value.to),
        before: valueText(words, code, value.from),
      };
    });
}
