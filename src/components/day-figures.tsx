import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useMemo } from "react";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import type {
  Criterion,
  RuleSetVersion,
  Verdict as VerdictCode,
} from "../../shared/acoustics/types";
import { criterionValue, levelBasis } from "../../shared/findings/basis";
import { asReason, reasonText } from "../../shared/findings/reasons";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { withinSentence } from "../../shared/format/words";
import type { Locale } from "../../shared/i18n/index";
import { actionValueDb, levelOf, mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { DayFigures } from "../../shared/schemas/finding";
import { useLocale } from "../lib/i18n";
import { DropStrip, type DropStripProps, StripGround, StripScale } from "./drop-strip";
import type { TargetBand } from "./drop-strip-geometry";
import { LevelFigure } from "./level-figure";
import { type StripFrame, stripOfDay } from "./strip-of-day";
import { Verdict, verdictWord } from "./verdict";

export function stripFrame(i18n: I18n, locale: Locale, key: string, version: number): StripFrame {
  const ruleSet = ruleSetVersion(key, version);
  if (!ruleSet)
    return { key: `${key} ${version}`, limits: [], targetBand: null, hasLimitAtEar: false };
  const limit = mainLimit(ruleSet);
  const limitDb = levelOf(limit);
  const actionDb = actionValueDb(ruleSet);
  return {
    key: `${key} ${version}`,
    limits: [
      { levelDb: limitDb, label: i18n.t("limit {limit}", { limit: formatLimit(limitDb, locale) }) },
    ],
    targetBand: actionDb === null ? null : bandBelow(actionDb),
    hasLimitAtEar: limit.judged === "at-the-ear",
  };
}

/** EN 458: from 15 dB under the action value up to it; its good part 10 to 5 dB under. */
function bandBelow(actionDb: number): TargetBand {
  return {
    lowDb: actionDb - 15,
    goodLowDb: actionDb - 10,
    goodHighDb: actionDb - 5,
    highDb: actionDb,
  };
}

export function useStripFrame(
  figures: Pick<DayFigures, "ruleSetKey" | "ruleSetVersion"> | null,
): StripFrame | null {
  const { i18n } = useLingui();
  const locale = useLocale();
  const key = figures?.ruleSetKey;
  const version = figures?.ruleSetVersion;
  return useMemo(
    () =>
      key === undefined || version === undefined ? null : stripFrame(i18n, locale, key, version),
    [i18n, locale, key, version],
  );
}

/** The one frame of a table's strips, where all its days are under one rule set: only then has its head a limit. */
export function useTableFrame(days: readonly (DayFigures | null)[]): StripFrame | null {
  const { i18n } = useLingui();
  const locale = useLocale();
  return useMemo(() => {
    const frames = new Map(
      days.flatMap((day) =>
        day ? [[`${day.ruleSetKey} ${day.ruleSetVersion}`, day] as const] : [],
      ),
    );
    const [only] = frames.values();
    return frames.size === 1 && only
      ? stripFrame(i18n, locale, only.ruleSetKey, only.ruleSetVersion)
      : null;
  }, [days, i18n, locale]);
}

export function TableStripScale({
  frame,
  widthPx,
}: {
  frame: StripFrame | null;
  widthPx?: number;
}) {
  return (
    <StripScale
      limits={frame?.limits ?? []}
      targetBand={frame?.targetBand ?? null}
      widthPx={widthPx}
    />
  );
}

export function TableStripGround({
  frame,
  widthPx,
}: {
  frame: StripFrame | null;
  widthPx?: number;
}) {
  return (
    <StripGround
      limits={frame?.limits ?? []}
      targetBand={frame?.targetBand ?? null}
      widthPx={widthPx}
    />
  );
}

export function DayStrip({
  figures,
  variant = "row",
  widthPx,
  k,
  isHidden,
}: { figures: DayFigures } & Pick<DropStripProps, "variant" | "widthPx" | "k" | "isHidden">) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const frame = useStripFrame(figures);
  if (!frame) return null;
  return (
    <DropStrip
      {...stripOfDay(figures, frame)}
      variant={variant}
      widthPx={widthPx}
      k={k}
      isHidden={isHidden}
      outsideWords={withinSentence(outsideVerdict(i18n, locale, figures).words, locale)}
    />
  );
}

interface Judged {
  readonly verdict: VerdictCode;
  readonly isClear: boolean;
  readonly levelDb: number;
  readonly criterion: Criterion;
}

const LEVEL_QUANTITIES: ReadonlySet<string> = new Set(["lex-8h", "dose", "table-dose"]);

/** Level criteria without protection, by value; of several at one value the one that says most. */
function judgedOutside(figures: DayFigures, ruleSet: RuleSetVersion): Judged[] {
  const byValue = new Map<number, Judged>();
  for (const result of figures.governingCriteria) {
    const criterion = ruleSet.criteria.find(({ id }) => id === result.criterionId);
    if (criterion?.judged !== "without-protection" || !LEVEL_QUANTITIES.has(criterion.quantity))
      continue;
    const levelDb = levelOf(criterion);
    const before = byValue.get(levelDb);
    const says = (verdict: VerdictCode) =>
      ["not-assessed", "under", "cant-tell-yet", "over"].indexOf(verdict);
    if (before && says(before.verdict) >= says(result.verdict)) continue;
    byValue.set(levelDb, { verdict: result.verdict, isClear: result.isClear, levelDb, criterion });
  }
  return [...byValue.values()].sort((a, b) => a.levelDb - b.levelDb);
}

/** The verdict without protection with the value that it is about: "Over 85", "Over 80, 85 open", "Under 80". */
export function outsideVerdict(
  i18n: I18n,
  locale: Locale,
  figures: DayFigures,
): { verdict: VerdictCode; words: string; isClear: boolean } {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const judged = ruleSet ? judgedOutside(figures, ruleSet) : [];
  const over = judged.findLast(({ verdict }) => verdict === "over");
  const open = judged.find(({ verdict }) => verdict === "cant-tell-yet");
  const show = ({ criterion }: Judged) => criterionValue(locale, criterion);
  if (over && open && open.levelDb > over.levelDb)
    return {
      verdict: "cant-tell-yet",
      words: i18n.t("Over {value}, {next} open", { value: show(over), next: show(open) }),
      isClear: false,
    };
  if (over)
    return {
      verdict: "over",
      words: i18n.t("Over {value}", { value: show(over) }),
      isClear: over.isClear,
    };
  if (open)
    return {
      verdict: "cant-tell-yet",
      words: i18n.t("{value} open", { value: show(open) }),
      isClear: false,
    };
  const lowest = judged.find(({ verdict }) => verdict === "under");
  if (lowest && judged.every(({ verdict }) => verdict === "under"))
    return {
      verdict: "under",
      words: i18n.t("Under {value}", { value: show(lowest) }),
      isClear: false,
    };
  return {
    verdict: figures.verdictOutside,
    words: verdictWord(i18n, figures.verdictOutside),
    isClear: false,
  };
}

/** At the ear ± U, its verdict beneath; where the rule has no limit there, it says so. */
export function AtEarFigure({ figures }: { figures: DayFigures }) {
  const { i18n } = useLingui();
  const frame = useStripFrame(figures);
  return (
    <LevelFigure
      levelDb={figures.atEarDb}
      uncertaintyDb={figures.uncertaintyDb}
      isStrong={figures.atEarDb !== null}
    >
      {frame?.hasLimitAtEar === false && figures.atEarDb !== null ? (
        <span className="beneath">{i18n.t("no limit at the ear")}</span>
      ) : (
        <Verdict verdict={figures.verdictAtEar} />
      )}
    </LevelFigure>
  );
}

/** Without protection ± U, small and quiet: Over is usual here, a duty and no alarm. */
export function OutsideFigure({ figures }: { figures: DayFigures }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { verdict, words } = outsideVerdict(i18n, locale, figures);
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const basis = ruleSet && levelBasis(i18n, locale, outsideCriterion(ruleSet));
  return (
    <LevelFigure
      levelDb={figures.outsideDb}
      uncertaintyDb={figures.outsideBound === "exact" ? figures.uncertaintyDb : null}
      bound={figures.outsideBound}
    >
      <Verdict verdict={verdict} isQuiet>
        {words}
      </Verdict>
      {basis && figures.outsideDb !== null && <span className="beneath">{basis}</span>}
    </LevelFigure>
  );
}

/** The task and level that decide the protector's word, or why there is none. */
export function useDecidedBy(figures: DayFigures): string | undefined {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (figures.hasProtector === "no") return undefined;
  if (figures.word === null) {
    const reason = asReason(figures.reason);
    return reason ? reasonText(i18n, reason) : undefined;
  }
  if (figures.whileWornDb === null) return figures.decidingTaskName ?? undefined;
  const level = formatLevel(figures.whileWornDb, locale);
  return figures.decidingTaskName ? `${figures.decidingTaskName} ${level}` : level;
}
