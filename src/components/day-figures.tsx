import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useMemo } from "react";
import { isSameFigure, outsideCriterion } from "../../shared/acoustics/outside-criterion";
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
import { LevelFigure } from "./level-figure";
import { bandBelow, type StripFrame, stripOfDay } from "./strip-of-day";
import { Verdict, verdictWord } from "./verdict";

export function stripFrame(i18n: I18n, locale: Locale, key: string, version: number): StripFrame {
  const ruleSet = ruleSetVersion(key, version);
  if (!ruleSet)
    return {
      key: `${key} ${version}`,
      limits: [],
      targetBand: null,
      targetLabel: null,
      hasLimitAtEar: false,
    };
  const limit = mainLimit(ruleSet);
  const limitDb = levelOf(limit);
  const actionDb = actionValueDb(ruleSet);
  return {
    key: `${key} ${version}`,
    limits: [
      { levelDb: limitDb, label: i18n.t("limit {limit}", { limit: formatLimit(limitDb, locale) }) },
    ],
    targetBand: actionDb === null ? null : bandBelow(actionDb),
    targetLabel: (levelDb) => i18n.t("target {target}", { target: formatLimit(levelDb, locale) }),
    hasLimitAtEar: limit.judged === "at-the-ear",
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
      outsideWords={outsideWords(i18n, locale, figures)}
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
const SAYS: readonly VerdictCode[] = ["not-assessed", "under", "cant-tell-yet", "over"];

/** Criteria without protection that are about one figure, by value; of several at one value the one that says most. */
function judgedOutside(
  figures: DayFigures,
  ruleSet: RuleSetVersion,
  figure: Criterion = outsideCriterion(ruleSet),
): Judged[] {
  const byValue = new Map<number, Judged>();
  for (const result of figures.governingCriteria) {
    const criterion = ruleSet.criteria.find(({ id }) => id === result.criterionId);
    if (criterion?.judged !== "without-protection" || !isSameFigure(criterion, figure)) continue;
    const levelDb = levelOf(criterion);
    const before = byValue.get(levelDb);
    if (before && SAYS.indexOf(before.verdict) >= SAYS.indexOf(result.verdict)) continue;
    byValue.set(levelDb, { verdict: result.verdict, isClear: result.isClear, levelDb, criterion });
  }
  return [...byValue.values()].sort((a, b) => a.levelDb - b.levelDb);
}

/** Levels without protection that are not the main figure and are over or open, each with its own: "Over 90 dBA: 91.9 (TWA, threshold 90)". */
export function otherOutside(
  i18n: I18n,
  locale: Locale,
  figures: DayFigures,
): { id: string; words: string }[] {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  if (!ruleSet) return [];
  const main = outsideCriterion(ruleSet);
  return figures.governingCriteria.flatMap(({ criterionId, verdict, levelDb, bound }) => {
    const criterion = ruleSet.criteria.find(({ id }) => id === criterionId);
    if (criterion?.judged !== "without-protection" || !LEVEL_QUANTITIES.has(criterion.quantity))
      return [];
    if (isSameFigure(criterion, main) || levelDb === null) return [];
    const values = {
      value: criterionValue(locale, criterion),
      level: formatLevel(levelDb, locale, bound),
      basis: levelBasis(i18n, locale, criterion) ?? "",
    };
    if (verdict === "over")
      return [{ id: criterionId, words: i18n.t("Over {value}: {level} ({basis})", values) }];
    if (verdict === "cant-tell-yet")
      return [{ id: criterionId, words: i18n.t("{value} open: {level} ({basis})", values) }];
    return [];
  });
}

/** What is said of the noise without protection after its level, as the end of a sentence. */
export function outsideWords(i18n: I18n, locale: Locale, figures: DayFigures): string {
  return [outsideVerdict(i18n, locale, figures), ...otherOutside(i18n, locale, figures)]
    .map(({ words }) => withinSentence(words, locale))
    .join("; ");
}

/** The main figure's verdict without protection with the value that it is about: "Over 85", "Over 80, 85 open", "Under 80". */
export function outsideVerdict(i18n: I18n, locale: Locale, figures: DayFigures): OutsideVerdict {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const judged = ruleSet ? judgedOutside(figures, ruleSet) : [];
  return (
    verdictOf(i18n, judged, ({ criterion }) => criterionValue(locale, criterion)) ?? {
      verdict: figures.verdictOutside,
      words: verdictWord(i18n, figures.verdictOutside),
      isClear: false,
    }
  );
}

/** In one word, where there is room for no more: the highest value without protection that a figure is over. */
export function gravestOutside(i18n: I18n, locale: Locale, figures: DayFigures): OutsideVerdict {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const [highest] = figures.governingCriteria
    .flatMap(({ criterionId, verdict, isClear }) => {
      const criterion = ruleSet?.criteria.find(({ id }) => id === criterionId);
      return verdict === "over" &&
        criterion?.judged === "without-protection" &&
        LEVEL_QUANTITIES.has(criterion.quantity)
        ? [{ criterion, isClear }]
        : [];
    })
    .sort((a, b) => levelOf(b.criterion) - levelOf(a.criterion));
  if (!highest) return outsideVerdict(i18n, locale, figures);
  return {
    verdict: "over",
    words: i18n.t("Over {value}", { value: criterionValue(locale, highest.criterion) }),
    isClear: highest.isClear,
  };
}

interface OutsideVerdict {
  readonly verdict: VerdictCode;
  readonly words: string;
  readonly isClear: boolean;
}

/** One verdict on a figure that several criteria are about; null where they are not assessed. */
function verdictOf(
  i18n: I18n,
  judged: readonly Judged[],
  show: (one: Judged) => string,
): OutsideVerdict | null {
  const over = judged.findLast(({ verdict }) => verdict === "over");
  const open = judged.find(({ verdict }) => verdict === "cant-tell-yet");
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
  return null;
}

/** The criteria whose figures without protection a rule tells apart by their threshold, the main one first. */
function figureCriteria(ruleSet: RuleSetVersion): Criterion[] {
  const found = [outsideCriterion(ruleSet)];
  for (const criterion of ruleSet.criteria) {
    const isLevel =
      criterion.judged === "without-protection" && LEVEL_QUANTITIES.has(criterion.quantity);
    if (isLevel && !found.some((one) => isSameFigure(one, criterion))) found.push(criterion);
  }
  return found;
}

/** What each figure of `OutsideLines` is, one by one: "TWA, threshold 80", "TWA, threshold 90". Empty where it is a LEX. */
export function outsideBases(i18n: I18n, locale: Locale, ruleSet: RuleSetVersion): string[] {
  return figureCriteria(ruleSet).flatMap((criterion) => levelBasis(i18n, locale, criterion) ?? []);
}

/** Without protection, a line for each figure that the rule has: "≥92.4 Over 85". What each is stands in the column's head. */
export function OutsideLines({ figures }: { figures: DayFigures }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  if (!ruleSet) return null;
  return (
    <span className="outside-lines">
      {figureCriteria(ruleSet).map((criterion) => {
        const result = figures.governingCriteria.find(
          ({ criterionId }) => criterionId === criterion.id,
        );
        const said = verdictOf(i18n, judgedOutside(figures, ruleSet, criterion), (one) =>
          formatLimit(one.levelDb, locale),
        );
        return (
          <span key={criterion.id} className="outside-line">
            <span className="figure">
              {formatLevel(result?.levelDb ?? null, locale, result?.bound)}
            </span>
            <Verdict verdict={said?.verdict ?? "not-assessed"} isQuiet>
              {said?.words}
            </Verdict>
          </span>
        );
      })}
    </span>
  );
}

/** At the ear ± U, its verdict beneath; where the rule has no limit there, it says so. */
export function AtEarFigure({ figures }: { figures: DayFigures }) {
  const { i18n } = useLingui();
  const frame = useStripFrame(figures);
  return (
    <LevelFigure
      levelDb={figures.atEarDb}
      uncertaintyDb={figures.atEarBound === "exact" ? figures.uncertaintyDb : null}
      bound={figures.atEarBound}
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
      {otherOutside(i18n, locale, figures).map((other) => (
        <span key={other.id} className="beneath">
          {other.words}
        </span>
      ))}
    </LevelFigure>
  );
}

export const isBoundReason = (reason: string | null): boolean =>
  reason === "only-upper-bound" || reason === "only-lower-bound";

/** That only a bound of the level is known, and the reading that would settle it. */
function openByBound(i18n: I18n, locale: Locale, figures: DayFigures): string | undefined {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  if (!ruleSet) return undefined;
  const { quantity, exchangeRateDb, thresholdDb } = outsideCriterion(ruleSet);
  if (quantity === "lex-8h" || exchangeRateDb === null)
    return i18n.t("only a bound is known; an LAeq would settle it");
  const exchange = formatLimit(exchangeRateDb, locale);
  return thresholdDb === null
    ? i18n.t("only a bound is known; an average with exchange {exchange} would settle it", {
        exchange,
      })
    : i18n.t("only a bound is known; an average with threshold {threshold} would settle it", {
        threshold: formatLimit(thresholdDb, locale),
      });
}

/** The task and level that decide the protector's word, or why there is none. */
export function useDecidedBy(figures: DayFigures): string | undefined {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (figures.hasProtector === "no") return undefined;
  if (figures.word === null) {
    const reason = asReason(figures.reason);
    if (!reason) return undefined;
    return isBoundReason(reason) ? openByBound(i18n, locale, figures) : reasonText(i18n, reason);
  }
  if (figures.whileWornDb === null) return figures.decidingTaskName ?? undefined;
  const level = formatLevel(figures.whileWornDb, locale, figures.whileWornBound);
  return figures.decidingTaskName ? `${figures.decidingTaskName} ${level}` : level;
}
