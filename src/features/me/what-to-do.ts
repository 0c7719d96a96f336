import type { I18n } from "@lingui/core";
import { factsToday, protectorNames, textOf } from "../../../shared/findings/facts";
import { foldOrders, ORDER_KINDS } from "../../../shared/findings/orders";
import { workerSentence } from "../../../shared/findings/worker-sentence";
import { formatDate } from "../../../shared/format/date";
import type { Locale } from "../../../shared/i18n/index";
import type { FindingKind } from "../../../shared/schemas/finding";
import type { OwnProtector } from "./own-protectors";
import type { OwnDay, OwnFinding } from "./queries";

export const nameOf = (i18n: I18n, { innerName, outerName }: OwnProtector): string =>
  protectorNames(i18n, outerName === null ? [innerName] : [innerName, outerName]);

interface Known {
  lastDay: OwnDay | null;
  protectors: readonly OwnProtector[];
  findings: readonly OwnFinding[];
  /** The last day of whoever has left; null: still there. */
  leftOn: string | null;
}

const ABOUT_PROTECTOR: ReadonlySet<FindingKind> = new Set<FindingKind>([
  "no-protector",
  "over-limit-at-ear",
  "dual-protection",
  "protects-too-little",
  "protects-too-much",
]);

/** Open findings that ask something of the worker; the others are the officer's own. */
const TOLD: ReadonlySet<FindingKind> = new Set<FindingKind>([
  ...ORDER_KINDS,
  "over-limit-outside",
  "time-not-accounted",
  "fit-failed",
  "fit-due",
]);
const ABOUT_FIT: ReadonlySet<FindingKind> = new Set<FindingKind>(["fit-failed", "fit-due"]);
/** What a worker can only wait for stands last. */
const placeOf = (kind: FindingKind) =>
  ORDER_KINDS.includes(kind) ? ORDER_KINDS.indexOf(kind) : ORDER_KINDS.length;

/** What may be worn in a task: one for the task itself, else whatever is for an area, which may be its own, or everywhere. */
function wornIn(protectors: readonly OwnProtector[], taskName: string): OwnProtector[] {
  const ofTask = protectors.filter(({ use, useName }) => use === "task" && useName === taskName);
  return ofTask.length > 0 ? ofTask : protectors.filter(({ use }) => use !== "task");
}

/**
 * What the open findings ask of the worker, most serious first, one for whatever is put right by what is worn. A finding
 * that others have done their part for asks for nothing, nor does one about a protector once another was given for the
 * task that it is about; where it is about the whole day, once nothing of before is worn any more, or once a day with what
 * was given since lay under the limit.
 */
function asked({ findings, protectors, lastDay }: Known): OwnFinding[] {
  const isAnswered = ({ kind, lastDate, facts, today }: OwnFinding) => {
    if (!ABOUT_PROTECTOR.has(kind)) return false;
    if (today?.is === "in-order") return true;
    const taskName = textOf(facts, "taskName");
    const concerned = taskName === null ? protectors : wornIn(protectors, taskName);
    const isGivenSince = ({ fromDate }: OwnProtector) => fromDate > lastDate;
    const isUnderSince =
      taskName === null &&
      lastDay?.verdictAtEar === "under" &&
      concerned.some((one) => isGivenSince(one) && one.fromDate <= lastDay.date);
    return concerned.length > 0 && (isUnderSince || concerned.every(isGivenSince));
  };
  // What was only tried, or is worn no longer, asks for nothing.
  const isWorn = ({ kind, useKey }: OwnFinding) =>
    !ABOUT_FIT.has(kind) || protectors.some(({ innerModelId }) => innerModelId === useKey);
  const hasNewRules = ({ rulesUntil }: OwnFinding) =>
    rulesUntil !== null && lastDay !== null && lastDay.date >= rulesUntil;
  return foldOrders(
    findings.filter(
      (one) => TOLD.has(one.kind) && !isAnswered(one) && isWorn(one) && !hasNewRules(one),
    ),
  )
    .map(({ lead }) => lead)
    .filter(({ state }) => state !== "done")
    .toSorted((one, other) => placeOf(one.kind) - placeOf(other.kind));
}

/** Where another protector was given since a finding about the whole day, while one of before is still worn elsewhere. */
function givenFor({ facts, lastDate }: OwnFinding, protectors: readonly OwnProtector[]): string[] {
  if (textOf(facts, "taskName") !== null) return [];
  return protectors.flatMap(({ useName, fromDate }) =>
    useName !== null && fromDate > lastDate ? [useName] : [],
  );
}

function wear(i18n: I18n, one: OwnProtector): string {
  const protector = nameOf(i18n, one);
  return one.useName === null
    ? i18n.t("Wear your {protector} in noise.", { protector })
    : i18n.t("In {use} wear your {protector}.", { use: one.useName, protector });
}

const isSame = (one: OwnProtector, other: OwnProtector): boolean =>
  one.innerModelId === other.innerModelId && one.outerName === other.outerName;

/** Nobody is told to change to what is worn everywhere anyway; in an area with another one the task's own stays said. */
function withoutRepeats(protectors: readonly OwnProtector[]): readonly OwnProtector[] {
  const everywhere = protectors.find(({ use }) => use === "everywhere");
  if (!everywhere) return protectors;
  const others = protectors.some((one) => one.use === "area" && !isSame(one, everywhere));
  return protectors.filter(
    (one) => one === everywhere || !isSame(one, everywhere) || (one.use === "task" && others),
  );
}

/** What is worn where, as long as nothing asks for a change. */
function whatToWear(i18n: I18n, protectors: readonly OwnProtector[]): string[] {
  const [main, ...others] = withoutRepeats(protectors);
  if (!main) return [];
  return [
    wear(i18n, main),
    ...others.map((one) =>
      one.useName === null
        ? i18n.t("In any other noise it is your {protector}.", { protector: nameOf(i18n, one) })
        : isSame(one, main)
          ? wear(i18n, one)
          : i18n.t("In {use} change to your {protector}.", {
              use: one.useName,
              protector: nameOf(i18n, one),
            }),
    ),
  ];
}

/** What to do, in the order of its weight: the first sentence is the page's title. */
export function whatToDo(i18n: I18n, locale: Locale, known: Known): [string, ...string[]] {
  const { lastDay, protectors, leftOn } = known;
  // Nothing is asked of whoever has left, and nothing is to be worn: the record stays theirs.
  if (leftOn !== null)
    return [
      i18n.t("You left on {date}. Your record stays here.", { date: formatDate(leftOn, locale) }),
    ];
  const open = asked(known);
  const isProtectorInDoubt = open.some(({ kind }) => ABOUT_PROTECTOR.has(kind));
  const sentences = [
    ...open.map((one) =>
      workerSentence(i18n, locale, one.kind, factsToday(one), givenFor(one, protectors)),
    ),
    ...(isProtectorInDoubt ? [] : whatToWear(i18n, protectors)),
  ];
  const [first, ...further] = new Set(sentences);
  if (first !== undefined) return [first, ...further];
  if (!lastDay)
    return [
      i18n.t("Nothing to do yet."),
      i18n.t("No shift of yours is recorded, and no protector is assigned to you."),
    ];
  return [i18n.t("You need no protector for your work so far.")];
}
