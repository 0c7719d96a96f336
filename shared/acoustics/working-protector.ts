import type { CreditedPeak } from "./maximum";
import { activeAttenuationDb } from "./protection/active";
import { DERATINGS, lcMinusLaDb } from "./protection/attenuation";
import { combinationAttenuationDb } from "./protection/bone-conduction";
import { SECOND_PROTECTOR_DB } from "./protection/double";
import {
  A_WEIGHTING_DB,
  assumedAttenuationDb,
  hmlOfBandsDb,
  levelBehindBandsDb,
  mapBands,
  snrOfBandsDb,
  weightedSumDb,
} from "./protection/octave-band";
import { derateType, hmlReductionDb, SPECTRAL_CORRECTION_DB } from "./protection/single-number";
import {
  type BandAttenuation,
  type MethodResult,
  OCTAVE_BANDS_HZ,
  type OctaveBandValues,
  type Protection,
  type ProtectorData,
  type RuleSetVersion,
  type TaskAtEar,
  type TaskLevel,
} from "./types";
import {
  column,
  difference,
  level,
  type MathPart,
  number,
  power,
  row,
  SUM,
  sign,
  symbol,
  symbolColumn,
  table,
  text,
  value,
  type WorkingTable,
  words,
} from "./working-parts";

type Rule = RuleSetVersion["protection"];
type Parts = readonly MathPart[];

const LA: MathPart = symbol("L", "A");
const WHILE_WORN: MathPart = symbol("L", "A,m", true);
/** Behind the protector, of a level on record that does not count as it stands. */
const ON_RECORD: MathPart = symbol("L", "A", true);
const WHILE_WORN_ON: MathPart = symbol("L", "A,m,on", true);
/** What is left of the noise where a programme is added to it. */
const NOISE_LEFT: MathPart = symbol("L", "N", true);
const NOISE_LEFT_ON: MathPart = symbol("L", "N,on", true);
const LC_MINUS_LA: Parts = [symbol("L", "C"), sign("−"), LA];

/** A formula in letters and the same with its numbers. */
interface Formula {
  readonly letters: Parts;
  readonly numbers: Parts;
}

/** One method on one task, active part off: the formula and then its numbers. */
export function methodLines(
  taskLevel: TaskLevel,
  protection: Protection,
  rule: Rule,
  { method, atEarDb, wasClamped }: MethodResult,
): Parts[] {
  if (atEarDb === null) return [];
  const lines: Parts[] = [];
  const formula = methodFormula(taskLevel, protection, rule, method, lines);
  const hasAllowance = rule.allowanceDb > 0 && method !== "own-fit";
  const allowed = (parts: Parts): Parts =>
    hasAllowance ? [...parts, sign("+"), value(number(rule.allowanceDb))] : parts;
  // A method that would have raised the level leaves the bare one.
  const leastOf = (bare: MathPart, parts: Parts): Parts =>
    wasClamped ? [sign("min ("), bare, sign(","), ...parts, sign(")")] : parts;
  lines.push([
    protection.audioDb == null ? WHILE_WORN : NOISE_LEFT,
    sign("="),
    ...leastOf(LA, allowed(formula.letters)),
    sign("="),
    ...leastOf(value(level(taskLevel.levelDb)), allowed(formula.numbers)),
    sign("="),
    value(level(atEarDb), true),
  ]);
  return lines;
}

function methodFormula(
  taskLevel: TaskLevel,
  protection: Protection,
  rule: Rule,
  method: MethodResult["method"],
  before: Parts[],
): Formula {
  const { inner, combinationBands, outer } = protection;
  const bands = outer ? combinationBands : inner.bands;
  switch (method) {
    case "octave-band": {
      const assumedDb = (outer ? combinationAttenuationDb : assumedAttenuationDb)(
        bands!,
        rule.alpha,
      );
      const reductionDb = bandReductionLine(taskLevel, assumedDb, before);
      return off(taskLevel, symbol("D", "A"), reductionDb);
    }
    case "hml":
      return hmlFormula(taskLevel, inner, outer && bands, rule, before);
    case "snr":
      return offC(
        taskLevel,
        lcMinusLaDb(taskLevel)!,
        [symbol("SNR")],
        outer ? snrOfBandsDb(combinationAttenuationDb(bands!, rule.alpha)) : inner.snrDb!,
      );
    case "slc80":
      return offC(taskLevel, lcMinusLaDb(taskLevel)!, [symbol("SLC", "80")], inner.slc80Db!);
    case "percentile":
      return off(taskLevel, symbol("NRS", "A80"), inner.percentile!.mostDb);
    case "own-fit":
      return off(taskLevel, symbol("PAR"), protection.ownFitDb!);
    case "us-single-number":
      return usFormula(taskLevel, protection, rule);
  }
}

/** What comes off the A-weighted level. */
function off(taskLevel: TaskLevel, what: MathPart, byDb: number): Formula {
  return {
    letters: [LA, sign("−"), what],
    numbers: [value(level(taskLevel.levelDb)), sign("−"), value(difference(byDb))],
  };
}

/** What comes off the C-weighted level, which is the A-weighted one and LC − LA. */
function offC(taskLevel: TaskLevel, lcLaDb: number, what: Parts, byDb: number): Formula {
  return {
    letters: [LA, sign("+ ("), ...LC_MINUS_LA, sign(") −"), ...what],
    numbers: [
      value(level(taskLevel.levelDb)),
      sign("+"),
      value(difference(lcLaDb)),
      sign("−"),
      value(number(byDb)),
    ],
  };
}

function hmlFormula(
  taskLevel: TaskLevel,
  data: ProtectorData,
  combination: BandAttenuation | null,
  rule: Rule,
  before: Parts[],
): Formula {
  const lcLaDb = lcMinusLaDb(taskLevel)!;
  const { hDb, mDb, lDb } = combination
    ? hmlOfBandsDb(combinationAttenuationDb(combination, rule.alpha))
    : { hDb: data.hDb!, mDb: data.mDb!, lDb: data.lDb! };
  const reductionDb = hmlReductionDb(hDb, mDb, lDb, lcLaDb)!;
  const isHigh = lcLaDb <= 2;
  const [from, to] = isHigh ? ([symbol("H"), symbol("M")] as const) : [symbol("M"), symbol("L")];
  const [fromDb, toDb] = isHigh ? [hDb, mDb] : [mDb, lDb];
  const over = isHigh ? "4" : "8";
  before.push([
    symbol("PNR"),
    sign("="),
    symbol("M"),
    sign("− ("),
    from,
    sign("−"),
    to,
    sign(`)/${over} · (`),
    ...LC_MINUS_LA,
    sign("− 2)"),
    sign("="),
    value(number(mDb)),
    sign("− ("),
    value(number(fromDb)),
    sign("−"),
    value(number(toDb)),
    sign(`)/${over} · (`),
    value(difference(lcLaDb)),
    sign("− 2)"),
    sign("="),
    value(difference(reductionDb), true),
  ]);
  return off(taskLevel, symbol("PNR"), reductionDb);
}

/** The US single number: 7 dB against an A-weighted level, the rule's derating, two protectors. */
function usFormula(taskLevel: TaskLevel, protection: Protection, rule: Rule): Formula {
  const { inner, outer } = protection;
  const lcLaDb = rule.derating === "none" ? taskLevel.lcMinusLaDb : null;
  const bare = value(level(taskLevel.levelDb));
  if (!outer) {
    if (lcLaDb !== null) return offC(taskLevel, lcLaDb, [symbol("R")], inner.usRatingDb!);
    const { letters, numbers } = deratedFormula(inner, rule, "");
    return {
      letters: [LA, sign("−"), ...letters],
      numbers: [bare, sign("−"), ...numbers],
    };
  }
  const each = [
    ratingFormula(inner, rule, lcLaDb, "1"),
    ratingFormula(outer, rule, lcLaDb, "2"),
  ] as const;
  const better = (part: "letters" | "numbers"): Parts => [
    sign("− (max ("),
    ...each[0][part],
    sign(","),
    ...each[1][part],
    sign(`) + ${SECOND_PROTECTOR_DB})`),
  ];
  return { letters: [LA, ...better("letters")], numbers: [bare, ...better("numbers")] };
}

function ratingFormula(
  data: ProtectorData,
  rule: Rule,
  lcLaDb: number | null,
  index: string,
): Formula {
  if (lcLaDb === null) return deratedFormula(data, rule, index);
  return {
    letters: [symbol("R", index), sign("− ("), ...LC_MINUS_LA, sign(")")],
    numbers: [value(number(data.usRatingDb!)), sign("−"), value(difference(lcLaDb))],
  };
}

function deratedFormula(data: ProtectorData, rule: Rule, index: string): Formula {
  const derating = DERATINGS[rule.derating];
  const factor = derating.factors[derateType(data.kind)];
  const minus = sign(`− ${SPECTRAL_CORRECTION_DB})`);
  const shape = (rating: MathPart, factorPart: MathPart): Parts => {
    if (factor === 1) return [sign("("), rating, minus];
    return derating.order === "factor-first"
      ? [sign("("), factorPart, sign("·"), rating, minus]
      : [factorPart, sign("· ("), rating, minus];
  };
  return {
    letters: shape(symbol("R", index || undefined), symbol("d")),
    numbers: shape(value(number(data.usRatingDb!)), value(number(factor))),
  };
}

/** What the bands take off an A-weighted level: the spectrum without them less the spectrum behind them. */
function bandReductionLine(
  taskLevel: TaskLevel,
  assumedDb: OctaveBandValues,
  before: Parts[],
): number {
  const spectrumDb = taskLevel.octaveBandsDb!;
  const bareDb = weightedSumDb(spectrumDb, A_WEIGHTING_DB, assumedDb);
  const behindDb = levelBehindBandsDb(spectrumDb, assumedDb);
  const exposed = [symbol("L", "f"), sign("+"), symbol("A", "f")];
  before.push([
    symbol("D", "A"),
    sign("= 10 lg"),
    SUM,
    power("10", [sign("("), ...exposed, sign(")/10")]),
    sign("− 10 lg"),
    SUM,
    power("10", [sign("("), ...exposed, sign("−"), symbol("APV", "f"), sign(")/10")]),
    sign("="),
    value(level(bareDb)),
    sign("−"),
    value(level(behindDb)),
    sign("="),
    value(difference(bareDb - behindDb), true),
  ]);
  return bareDb - behindDb;
}

/** The method's level is behind the protector on the level on record, where another counts. */
export function onRecord(parts: Parts): Parts {
  const [first, ...rest] = parts;
  return first === WHILE_WORN || first === NOISE_LEFT ? [ON_RECORD, ...rest] : parts;
}

/** As much off the bound that counts as comes off the level on record: L′ ≤ Lm − (LA − L′A). */
export function boundedLine(
  recordDb: number,
  behindDb: number,
  countedDb: number,
  { wornDb, audio }: TaskAtEar,
): Parts {
  return [
    audio ? NOISE_LEFT : WHILE_WORN,
    sign("="),
    symbol("L", "m"),
    sign("− ("),
    LA,
    sign("−"),
    ON_RECORD,
    sign(")"),
    sign("="),
    value(level(countedDb)),
    sign("− ("),
    value(level(recordDb)),
    sign("−"),
    value(level(behindDb)),
    sign(")"),
    sign("="),
    value(level(audio?.noiseDb ?? wornDb!), true),
  ];
}

/** What the active part does on top, and the level with it; empty where there is none to tell. */
export function activeLines(
  taskLevel: TaskLevel,
  protection: Protection,
  rule: Rule,
  { wornDb, wornActiveDb, reason, audio }: TaskAtEar,
): Parts[] {
  if (wornDb === null || wornActiveDb === null) return [];
  const end = (gainDb: number): Parts => [
    audio ? NOISE_LEFT_ON : WHILE_WORN_ON,
    sign("="),
    audio ? NOISE_LEFT : WHILE_WORN,
    sign("−"),
    symbol("G"),
    sign("="),
    value(level(audio?.noiseDb ?? wornDb)),
    sign("−"),
    value(difference(gainDb)),
    sign("="),
    value(level(audio?.noiseActiveDb ?? wornActiveDb), true),
  ];
  if (reason === "saturated") return [end(0)];
  const passiveDb = assumedAttenuationDb(protection.inner.bands!, rule.alpha);
  const offDb = levelBehindBandsDb(taskLevel.octaveBandsDb!, passiveDb);
  const onDb = levelBehindBandsDb(taskLevel.octaveBandsDb!, withActive(protection, passiveDb));
  return [
    [
      symbol("G"),
      sign("= 10 lg"),
      SUM,
      power("10", [symbol("L", "f", true), sign("/10")]),
      sign("− 10 lg"),
      SUM,
      power("10", [symbol("L", "f,on", true), sign("/10")]),
      sign("="),
      value(level(offDb)),
      sign("−"),
      value(level(onDb)),
      sign("="),
      value(difference(offDb - onDb), true),
    ],
    end(offDb - onDb),
  ];
}

/** Programme audio added to what is left of the noise, active part off and on; k as for `audioSum`. */
export function programmeLines({ wornDb, wornActiveDb, audio }: TaskAtEar, k: MathPart): Parts[] {
  if (!audio || wornDb === null) return [];
  const lines = [audioSum(audio.noiseDb, audio.levelDb, wornDb, "A,m", k)];
  if (audio.noiseActiveDb !== null && wornActiveDb !== null)
    lines.push(audioSum(audio.noiseActiveDb, audio.levelDb, wornActiveDb, "A,m,on", k));
  return lines;
}

/** L′ = k lg(10^(L′N/k) + 10^(LP/k)) with its numbers, k = 10 by energy. */
export function audioSum(
  noiseDb: number,
  audioDb: number,
  sumDb: number,
  sub: string,
  k: MathPart,
): Parts {
  const noise = sub.endsWith(",on") ? NOISE_LEFT_ON : NOISE_LEFT;
  const asPower = (exponent: MathPart): MathPart => power("10", [exponent, sign("/"), k]);
  return [
    symbol("L", sub, true),
    sign("="),
    k,
    sign("lg ("),
    asPower(noise),
    sign("+"),
    asPower(symbol("L", "P")),
    sign(")"),
    sign("="),
    k,
    sign("lg ("),
    asPower(value(level(noiseDb))),
    sign("+"),
    asPower(value(level(audioDb))),
    sign(")"),
    sign("="),
    value(level(sumDb), true),
  ];
}

/** A peak under a protector by the type of its noise, with the numbers put in. */
export function peakLine({ statedDb, atEarDb, by }: CreditedPeak): Parts {
  const { type, ratingDb, lessDb, allowanceDb } = by;
  const rating = symbol((["L", "M", "H"] as const)[type - 1]!);
  const allowance = (part: MathPart): Parts => (allowanceDb > 0 ? [sign("+"), part] : []);
  const shape = (peak: MathPart, of: MathPart, allowed: MathPart): Parts => {
    const reduced: Parts =
      lessDb > 0
        ? [peak, sign("− ("), of, sign(`− ${lessDb})`), ...allowance(allowed)]
        : [peak, sign("−"), of, ...allowance(allowed)];
    return by.wasClamped ? [sign("min ("), peak, sign(","), ...reduced, sign(")")] : reduced;
  };
  const allowanceValue = value(number(allowanceDb));
  return [
    symbol("L", "C,peak", true),
    sign("="),
    ...shape(symbol("L", "C,peak"), rating, allowanceValue),
    sign("="),
    ...shape(value(level(statedDb)), value(number(ratingDb)), allowanceValue),
    sign("="),
    value(level(atEarDb), true),
  ];
}

function withActive(protection: Protection, passiveDb: ReturnType<typeof assumedAttenuationDb>) {
  const activeDb = activeAttenuationDb(protection.inner.active!)!;
  return mapBands((band) => {
    const bandDb = passiveDb[band] ?? null;
    return bandDb === null ? null : bandDb + (activeDb[band] ?? 0);
  });
}

/** The bands of a task behind its protector; null where the data lack them. */
export function bandTable(
  taskLevel: TaskLevel,
  protection: Protection,
  rule: Rule,
  { wornActiveDb, reason }: TaskAtEar,
): WorkingTable | null {
  const bands = protection.outer ? protection.combinationBands : protection.inner.bands;
  const spectrumDb = taskLevel.octaveBandsDb;
  if (bands === null || spectrumDb === null) return null;
  const assumedDb = assumedAttenuationDb(bands, rule.alpha);
  const creditedDb = protection.outer ? combinationAttenuationDb(bands, rule.alpha) : assumedDb;
  const isCapped = creditedDb.some((bandDb, band) => bandDb !== assumedDb[band]);
  const hasActive = wornActiveDb !== null && reason !== "saturated";
  const activeDb = hasActive ? activeAttenuationDb(protection.inner.active!) : null;
  const bothDb = hasActive ? withActive(protection, assumedDb) : null;
  const rows = OCTAVE_BANDS_HZ.flatMap((bandHz, band) => {
    const levelDb = spectrumDb[band];
    const lossDb = assumedDb[band];
    const takenOffDb = creditedDb[band];
    if (levelDb == null || lossDb == null || takenOffDb == null) return [];
    const exposedDb = levelDb + A_WEIGHTING_DB[band]!;
    return [
      row(`band-${bandHz}`, [
        words(text(/*i18n*/ "{band} Hz", { band: number(bandHz) })),
        level(levelDb),
        difference(A_WEIGHTING_DB[band]!),
        level(exposedDb),
        difference(bands.meanDb[band]!),
        difference(bands.sdDb[band]!),
        difference(lossDb),
        ...(isCapped ? [difference(takenOffDb)] : []),
        level(exposedDb - takenOffDb),
        ...(bothDb ? [difference(activeDb?.[band] ?? 0), level(exposedDb - bothDb[band]!)] : []),
      ]),
    ];
  });
  return table(
    [
      column("band", text(/*i18n*/ "Band"), false),
      symbolColumn("level", null, [symbol("L", "f")]),
      symbolColumn("weighting", null, [symbol("A", "f")]),
      symbolColumn("exposed", null, [symbol("L", "f"), sign("+"), symbol("A", "f")]),
      symbolColumn("mean", null, [symbol("m", "f")]),
      symbolColumn("deviation", null, [symbol("s", "f")]),
      symbolColumn("assumed", null, [
        symbol("APV", "f"),
        sign("="),
        symbol("m", "f"),
        sign("−"),
        ...(rule.alpha === 1 ? [] : [value(number(rule.alpha))]),
        symbol("s", "f"),
      ]),
      ...(isCapped
        ? [column("credited", text(/*i18n*/ "No more than by bone conduction"), true)]
        : []),
      symbolColumn("behind", null, [symbol("L", "f", true)]),
      ...(bothDb
        ? [
            symbolColumn("active", null, [symbol("a", "f")]),
            symbolColumn("behind-on", null, [symbol("L", "f,on", true)]),
          ]
        : []),
    ],
    [
      ...rows,
      {
        ...row("sum", [
          words(text(/*i18n*/ "All bands, by energy")),
          null,
          null,
          level(weightedSumDb(spectrumDb, A_WEIGHTING_DB, assumedDb)),
          null,
          null,
          null,
          ...(isCapped ? [null] : []),
          level(levelBehindBandsDb(spectrumDb, creditedDb)),
          ...(bothDb ? [null, level(levelBehindBandsDb(spectrumDb, bothDb))] : []),
        ]),
        isTotal: true,
      },
    ],
  );
}
