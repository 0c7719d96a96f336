import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useMemo } from "react";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { bandBelow } from "../../shared/acoustics/protection/adequacy";
import { levelBasis } from "../../shared/findings/basis";
import { formatLevel, formatLimit } from "../../shared/format/level";
import type { Locale } from "../../shared/i18n/index";
import { actionValueDb, levelOf, mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { DayFigures } from "../../shared/schemas/finding";
import {
  decidedBy,
  figureCriteria,
  gravestOutside,
  isBoundReason,
  judgedOutside,
  otherOutside,
  outsideBases,
  outsideVerdict,
  outsideWords,
  verdictOf,
} from "../../shared/words/day-words";
import { useLocale } from "../lib/i18n";
import { DropStrip, type DropStripProps, StripGround, StripScale } from "./drop-strip";
import { LevelFigure } from "./level-figure";
import { type StripFrame, stripOfDay } from "./strip-of-day";
import { Verdict } from "./verdict";

export { gravestOutside, isBoundReason, outsideBases, outsideVerdict, outsideWords };

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

/** The task and level that decide the protector's word, or why there is none. */
export function useDecidedBy(figures: DayFigures): string | undefined {
  const { i18n } = useLingui();
  const locale = useLocale();
  return decidedBy(i18n, locale, figures);
}
