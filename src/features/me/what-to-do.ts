import type { I18n } from "@lingui/core";
import { protectorNames } from "../../../shared/findings/facts";
import { workerSentence } from "../../../shared/findings/worker-sentence";
import type { Locale } from "../../../shared/i18n/index";
import type { FindingKind } from "../../../shared/schemas/finding";
import { type OwnProtector, protectorOfDay } from "./own-protectors";
import type { OwnDay } from "./queries";

export const nameOf = (i18n: I18n, { innerName, outerName }: OwnProtector): string =>
  protectorNames(i18n, outerName === null ? [innerName] : [innerName, outerName]);

interface Known {
  lastDay: OwnDay | null;
  protectors: readonly OwnProtector[];
  assignments: readonly OwnProtector[];
}

/** What the last day says has to change, as the cause that a worker is told about; null where nothing has. */
function causeOf({
  lastDay,
  protectors,
  assignments,
}: Known): { kind: FindingKind; facts: Record<string, unknown> } | null {
  if (!lastDay || lastDay.origin === "imported") return null;
  const isPassed = ["over", "cant-tell-yet"].includes(lastDay.verdictOutside);
  if (lastDay.hasProtector === "no" && isPassed && protectors.length === 0)
    return { kind: "no-protector", facts: {} };
  // Somebody has acted since: what stands here is what is worn now.
  if (protectors.some(({ fromDate }) => fromDate > lastDay.date)) return null;

  const worn = protectorOfDay(assignments, lastDay);
  const facts = {
    taskName: lastDay.decidingTaskName,
    protector: worn && worn.outerName === null ? worn.innerName : null,
  };
  const isOver = (kinds: readonly string[]) =>
    lastDay.kindsOver.some((kind) => kinds.includes(kind));
  if (lastDay.word === "too-little") return { kind: "protects-too-little", facts };
  if (lastDay.verdictAtEar === "over")
    return { kind: "over-limit-at-ear", facts: { levelDb: lastDay.atEarDb } };
  if (isOver(["dual-protection"]) && worn?.outerName === null)
    return { kind: "dual-protection", facts: {} };
  if (isOver(["peak", "ceiling"])) return { kind: "peak-or-ceiling", facts: {} };
  if (lastDay.word === "too-much") return { kind: "protects-too-much", facts };
  if (lastDay.reason === "wearing-unknown") return { kind: "wearing-unknown", facts };
  if (lastDay.reason === "time-unknown") return { kind: "time-not-accounted", facts };
  return null;
}

function wear(i18n: I18n, one: OwnProtector): string {
  const protector = nameOf(i18n, one);
  return one.useName === null
    ? i18n.t("Wear your {protector} in noise.", { protector })
    : i18n.t("In {use} wear your {protector}.", { use: one.useName, protector });
}

/** What to do, in the order of its weight: the first sentence is the page's title. */
export function whatToDo(i18n: I18n, locale: Locale, known: Known): [string, ...string[]] {
  const { lastDay, protectors } = known;
  const cause = causeOf(known);
  if (cause) return [workerSentence(i18n, locale, cause.kind, cause.facts)];
  const [main, ...others] = protectors;
  if (main) {
    const more = others.map((one) =>
      one.useName === null
        ? i18n.t("In any other noise it is your {protector}.", { protector: nameOf(i18n, one) })
        : i18n.t("In {use} change to your {protector}.", {
            use: one.useName,
            protector: nameOf(i18n, one),
          }),
    );
    return [wear(i18n, main), ...more];
  }
  if (!lastDay)
    return [
      i18n.t("Nothing to do yet."),
      i18n.t("No shift of yours is recorded, and no protector is assigned to you."),
    ];
  return [i18n.t("You need no protector for your work so far.")];
}
