import type { I18n } from "@lingui/core";
import type { Verdict } from "../../../shared/acoustics/types";
import { isAsked } from "../../../shared/findings/orders";
import { formatDay } from "../../../shared/format/date";
import { startsSentence } from "../../../shared/format/words";
import type { Locale } from "../../../shared/i18n/index";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { CrewSheetRow, CrewSheetView } from "../../../shared/schemas/crew";
import type { DayFigures, FindingKind } from "../../../shared/schemas/finding";
import { capital, numberWord } from "./number-words";

export type PartName = "expected" | "last";

export interface SheetPart {
  /** Somebody has to do something about these. */
  readonly flagged: readonly CrewSheetRow[];
  /** Recorded or expected, and nothing to do. */
  readonly quiet: readonly CrewSheetRow[];
  /** No figure, and why. */
  readonly open: readonly CrewSheetRow[];
  readonly absent: readonly CrewSheetRow[];
  /** With another crew that day. */
  readonly lent: readonly CrewSheetRow[];
}

/** Lent for the day, and no shift of that day is known here. */
const isAway = ({ isAbsent, lentTo, figures }: CrewSheetRow): boolean =>
  !isAbsent && lentTo !== null && figures === null;
const isHere = (row: CrewSheetRow): boolean => !row.isAbsent && !isAway(row);

/** Orders that are about what happened; the others are about the shift to come and stand on the sheet for it. */
const ABOUT_THE_PAST: ReadonlySet<FindingKind> = new Set([
  "not-worn-long-enough",
  "wearing-unknown",
  "peak-or-ceiling",
]);

/**
 * What the sheet says of a recorded day: its verdict at the ear. Where the rule has no limit there, its limits without
 * protection decide, and a protector that protects too little stands in for Over.
 */
export function sheetVerdict(figures: DayFigures, hasLimitAtEar: boolean): Verdict {
  if (hasLimitAtEar) return figures.verdictAtEar;
  if (figures.word === "too-little" || isOverLimitOutside(figures)) return "over";
  if (figures.hasProtector === "no") return figures.verdictOutside;
  if (figures.word !== null) return "under";
  return figures.reason === "only-upper-bound" || figures.reason === "only-lower-bound"
    ? "cant-tell-yet"
    : "not-assessed";
}

/** A limit of the governing rule, and not only its action value, is passed without protection. */
function isOverLimitOutside({
  ruleSetKey,
  ruleSetVersion: version,
  governingCriteria,
}: DayFigures): boolean {
  const limits =
    ruleSetVersion(ruleSetKey, version)?.criteria.filter(({ kind }) => kind === "limit") ?? [];
  return governingCriteria.some(
    ({ criterionId, verdict }) => verdict === "over" && limits.some(({ id }) => id === criterionId),
  );
}

/** Under the limit by luck, or unable to hear a warning: a protector at fault, the worse first. */
const FAULTS: readonly string[] = ["too-little", "too-much"];
const hasFault = ({ word }: DayFigures): boolean => word !== null && FAULTS.includes(word);
const hasWordFault = ({ figures }: CrewSheetRow): boolean => figures !== null && hasFault(figures);

/** An order that asks about the day itself is what its row is headed by, or the two would contradict each other. */
export const asksAboutDay = ({ order }: CrewSheetRow): boolean =>
  order !== null && order.state !== "done" && ABOUT_THE_PAST.has(order.kind);

export const isOpenOrder = ({ order, ahead }: CrewSheetRow): boolean =>
  Boolean(ahead) || (order !== null && order.state !== "done");

/**
 * What a row of the sheet for the shift to come is headed by: the fault that its day has, or else, where the order is of
 * an earlier day, what that day itself comes to (null).
 */
export function expectedFault({ figures, order, ahead }: CrewSheetRow): FindingKind | null {
  if (ahead) return ahead.kind;
  if (!order || !figures) return order?.kind ?? null;
  switch (order.kind) {
    case "over-limit-at-ear":
      return figures.word === null || figures.verdictAtEar === "over" || hasFault(figures)
        ? order.kind
        : null;
    case "protects-too-little":
    case "protects-too-much":
      return figures.word === null || hasFault(figures) ? order.kind : null;
    case "no-protector":
      return figures.hasProtector === "no" || figures.word === null ? order.kind : null;
    default:
      return order.kind;
  }
}

export function splitExpected(rows: readonly CrewSheetRow[]): SheetPart {
  const present = rows.filter(isHere);
  const rest = present.filter((row) => !isAsked(row));
  return {
    flagged: present.filter(isAsked),
    quiet: rest.filter(({ figures }) => figures !== null),
    open: rest.filter(({ figures }) => figures === null),
    absent: rows.filter(({ isAbsent }) => isAbsent),
    lent: rows.filter(isAway),
  };
}

export function splitLast(rows: readonly CrewSheetRow[], hasLimitAtEar: boolean): SheetPart {
  const present = rows.filter(isHere);
  const verdictOf = ({ figures }: CrewSheetRow) =>
    figures ? sheetVerdict(figures, hasLimitAtEar) : null;
  const isFlagged = (row: CrewSheetRow) => {
    const verdict = verdictOf(row);
    return (
      verdict === "over" ||
      verdict === "cant-tell-yet" ||
      hasWordFault(row) ||
      (row.figures !== null && row.order !== null && ABOUT_THE_PAST.has(row.order.kind))
    );
  };
  const rest = present.filter((row) => !isFlagged(row));
  const place = (row: CrewSheetRow) => {
    if (verdictOf(row) === "over") return 0;
    if (verdictOf(row) === "cant-tell-yet") return 1;
    return hasWordFault(row) ? FAULTS.indexOf(row.figures?.word ?? "") + 2 : 4;
  };
  return {
    flagged: present.filter(isFlagged).sort((a, b) => place(a) - place(b)),
    quiet: rest.filter((row) => verdictOf(row) === "under"),
    open: rest.filter((row) => verdictOf(row) === "not-assessed" || verdictOf(row) === null),
    absent: rows.filter(({ isAbsent }) => isAbsent),
    lent: rows.filter(isAway),
  };
}

/** Whether the order is dealt with on the sheet for today and only looked at here. */
export function isForToday(row: CrewSheetRow, expected: readonly CrewSheetRow[]): boolean {
  return (
    row.order !== null &&
    !ABOUT_THE_PAST.has(row.order.kind) &&
    expected.some((one) => one.worker.id === row.worker.id && isHere(one))
  );
}

export function expectedTitle(i18n: I18n, part: SheetPart, hasStarted: boolean): string {
  const count = part.flagged.filter(isOpenOrder).length;
  const values = { count, number: capital(i18n, numberWord(i18n, count)) };
  if (hasStarted)
    return i18n.t(
      "{count, plural, =0 {Nothing to do today} one {{number} order for today} other {{number} orders for today}}",
      values,
    );
  return i18n.t(
    "{count, plural, =0 {Nothing to do before they start} one {{number} order before they start} other {{number} orders before they start}}",
    values,
  );
}

/** "One was over, one we can’t tell yet". */
export function lastTitle(
  i18n: I18n,
  rows: readonly CrewSheetRow[],
  hasLimitAtEar: boolean,
): string {
  const verdicts = rows.flatMap(({ figures, isAbsent }) =>
    figures && !isAbsent ? [sheetVerdict(figures, hasLimitAtEar)] : [],
  );
  const countOf = (verdict: Verdict) => verdicts.filter((one) => one === verdict).length;
  const over = countOf("over");
  // A limit without protection may be passed with a protector that is enough: then nobody was protected too little.
  const isOver =
    hasLimitAtEar ||
    rows.some(
      ({ figures, isAbsent }) =>
        figures &&
        !isAbsent &&
        figures.word !== "too-little" &&
        sheetVerdict(figures, hasLimitAtEar) === "over",
    );
  const open = countOf("cant-tell-yet");
  const values = {
    over,
    open,
    overNumber: numberWord(i18n, over),
    openNumber: numberWord(i18n, open),
  };
  if (verdicts.length === 0) return i18n.t("No shift recorded yet");
  if (over === 0 && open === 0) return i18n.t("Nobody was over");
  const text =
    open === 0
      ? isOver
        ? i18n.t(
            "{over, plural, one {{overNumber} was over} other {{overNumber} were over}}",
            values,
          )
        : i18n.t(
            "{over, plural, one {{overNumber} was protected too little} other {{overNumber} were protected too little}}",
            values,
          )
      : over === 0
        ? i18n.t("{openNumber} we can’t tell yet", values)
        : i18n.t(
            "{over, plural, one {{overNumber} was over} other {{overNumber} were over}}, {openNumber} we can’t tell yet",
            values,
          );
  return capital(i18n, text);
}

const absentWords = (i18n: I18n, count: number) =>
  i18n.t("{number} absent", { number: numberWord(i18n, count) });

/** "Tuesday 1 December, 06:00. Eleven in noise." */
export function expectedLead(i18n: I18n, locale: Locale, sheet: CrewSheetView): string {
  const { rows, date } = sheet.expected;
  const present = rows.filter(isHere);
  const inNoise = present.filter(
    ({ figures }) => figures && ["over", "cant-tell-yet"].includes(figures.verdictOutside),
  ).length;
  const absent = rows.filter(({ isAbsent }) => isAbsent).length;
  const who = [
    i18n.t("{number} in noise", { number: numberWord(i18n, inNoise) }),
    ...(absent > 0 ? [absentWords(i18n, absent)] : []),
  ].join(", ");
  return i18n.t("{day}, {start}. {who}.", {
    day: startsSentence(formatDay(date, locale), locale),
    start: sheet.crew.usualStart,
    who: capital(i18n, who),
  });
}

/** "Monday 30 November. Ten recorded, one absent." */
export function lastLead(i18n: I18n, locale: Locale, last: CrewSheetView["last"]): string {
  if (last.date === null) return i18n.t("The last shift stands here once it is entered.");
  const recorded = last.rows.filter(({ figures, isAbsent }) => figures && !isAbsent).length;
  const absent = last.rows.filter(({ isAbsent }) => isAbsent).length;
  const missing = last.rows.length - recorded - absent - last.rows.filter(isAway).length;
  const who = [
    i18n.t("{number} recorded", { number: numberWord(i18n, recorded) }),
    ...(absent > 0 ? [absentWords(i18n, absent)] : []),
    ...(missing > 0
      ? [i18n.t("{number} not recorded", { number: numberWord(i18n, missing) })]
      : []),
  ].join(", ");
  return i18n.t("{day}. {who}.", {
    day: startsSentence(formatDay(last.date, locale), locale),
    who: capital(i18n, who),
  });
}
