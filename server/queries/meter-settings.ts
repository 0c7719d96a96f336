import type { Criterion, RuleSetVersion } from "../../shared/acoustics/types";
import { ruleSetInForce } from "../../shared/rule-sets";
import type { ReadingFacts } from "../../shared/schemas/evaluation";
import { row } from "../lib/db";

type MeterSettings = ReadingFacts["settings"];

/** Settings that a history is evaluated under, with the names of what they serve. */
export interface LabelledSettings {
  settings: MeterSettings;
  /** Labels of criteria, keys of the catalogue; empty where an instrument's preset asks. */
  labels: string[];
}

/** What an energy level is read under: every rule in decibels of LEX needs it. */
const LAEQ: MeterSettings = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "slow",
};
/** As many readings as a run may have. */
const MOST = 12;

const isExchangeRate = (value: number | null): value is MeterSettings["exchangeRateDb"] =>
  value === 3 || value === 4 || value === 5;

const keyOf = ({ criterionLevelDb, exchangeRateDb, thresholdDb }: MeterSettings) =>
  exchangeRateDb === 3 && thresholdDb === null
    ? `3 ${criterionLevelDb}`
    : `${criterionLevelDb} ${exchangeRateDb} ${thresholdDb}`;

/** Of the noise outside: the limit, else the highest action value. The rest in the order of the rules. */
function mainFirst({ criteria }: RuleSetVersion): Criterion[] {
  const judged = criteria.filter(
    ({ judged: how, quantity }) =>
      how === "without-protection" && quantity !== "peak" && quantity !== "slow-maximum",
  );
  const levelDbOf = ({ levelDb, value }: Criterion) => levelDb ?? value;
  const main =
    judged.find(({ kind }) => kind === "limit") ??
    judged
      .filter(({ kind }) => kind === "action")
      .toSorted((a, b) => levelDbOf(b) - levelDbOf(a))[0];
  return main ? [main, ...criteria.filter((one) => one !== main)] : [...criteria];
}

/**
 * The settings of a site's criteria on a date, governing before comparison, and of an instrument's presets. The first
 * is that of the governing rules' main value for noise without protection.
 */
export async function settingsToEvaluate(
  siteId: string,
  instrumentId: string,
  date: string,
): Promise<{ settings: LabelledSettings[]; governingRuleSet: string | null }> {
  const found = await row<{
    governing: string | null;
    comparison: string[] | null;
    presets: MeterSettings[];
  }>(
    `SELECT t.governing_rule_set AS governing, t.comparison_rule_sets AS comparison, i.presets FROM instruments i
     LEFT JOIN LATERAL (SELECT * FROM site_settings t WHERE t.site_id = :siteId AND t.effective_from <= :date
       ORDER BY t.effective_from DESC, t.number DESC LIMIT 1) t ON TRUE WHERE i.id = :instrumentId`,
    { siteId, instrumentId, date },
  );
  const ruleSets = [found?.governing, ...(found?.comparison ?? [])].flatMap((key) => {
    const ruleSet = key ? ruleSetInForce(key, date) : undefined;
    return ruleSet ? [ruleSet] : [];
  });
  const byKey = new Map<string, LabelledSettings>();
  const add = (settings: MeterSettings, label: string | null) => {
    const known = byKey.get(keyOf(settings));
    if (known) {
      if (label !== null && !known.labels.includes(label)) known.labels.push(label);
    } else byKey.set(keyOf(settings), { settings, labels: label === null ? [] : [label] });
  };
  for (const ruleSet of ruleSets)
    for (const {
      label,
      quantity,
      exchangeRateDb,
      criterionLevelDb,
      thresholdDb,
      levelDb,
      value,
    } of mainFirst(ruleSet)) {
      if (quantity === "peak" || quantity === "slow-maximum") continue;
      const isEnergy = quantity === "lex-8h" || quantity === "lex-weekly";
      const rate = isEnergy ? 3 : exchangeRateDb;
      if (!isExchangeRate(rate)) continue;
      // An energy limit's own level, 80 or 87, is what its dose is counted against.
      const level = isEnergy ? (levelDb ?? value) : criterionLevelDb;
      if (level === null || level < 70 || level > 100) continue;
      add(
        {
          criterionLevelDb: level,
          exchangeRateDb: rate,
          thresholdDb: isEnergy ? null : thresholdDb,
          weighting: "A",
          response: "slow",
        },
        label,
      );
    }
  if (
    ![...byKey.values()].some(
      ({ settings }) => settings.exchangeRateDb === 3 && settings.thresholdDb === null,
    )
  )
    add(LAEQ, null);
  for (const preset of found?.presets ?? [])
    if (preset.weighting === "A") add({ ...preset, response: "slow" }, null);
  return {
    settings: [...byKey.values()].slice(0, MOST),
    governingRuleSet: ruleSets[0]?.key ?? null,
  };
}
