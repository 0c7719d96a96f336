import {
  accountedMin,
  cutReading,
  governingReading,
  likenessFactor,
  missingTime,
  type Sum,
  sumReading,
  unaccountedMin,
} from "../day-sum";
import {
  type ExchangeLaw,
  isOwnSetting,
  leastWeight,
  levelFactor,
  levelOfWeight,
  mostWeight,
  weightOf,
} from "../exchange-law";
import type {
  AttenuationMethod,
  DayInput,
  MethodResult,
  ProtectorWord,
  Reason,
  RuleSetVersion,
  ShiftInput,
  TaskAtEar,
  TaskLevel,
  TimedTask,
} from "../types";
import { poweredShare } from "./active";
import { en458Word } from "./adequacy";
import {
  activeGainDb,
  isTooDeepForOwnFit,
  lcMinusLaDb,
  methodResult,
  ownFitReplaces,
  reductions,
} from "./attenuation";
import {
  type AudioLaw,
  audioLaw,
  withAudioAtEndDb,
  withAudioDb,
  withAudioWeight,
} from "./programme-audio";
import { wornShareLevelDb } from "./wearing-time";

/** A worker's day from under the protectors, minutes times weight under the rule's law without its threshold. */
export interface DayAtEar {
  readonly tasks: readonly TaskAtEar[];
  /** Active parts off. */
  readonly off: Sum;
  /** Active parts on throughout; null without one whose data are known. */
  readonly on: Sum | null;
  /** On while the batteries last; null where a battery is not stated. */
  readonly asWorked: Sum | null;
  /** What a limit is judged on: as worked where the site credits a checked active part, else off. */
  readonly judged: Sum;
  /** Protectors worn throughout the tasks in which they are worn at all. */
  readonly fullyWorn: Sum;
  /** Some protector counts as worn. */
  readonly isWorn: boolean;
  readonly isWearingUnknown: boolean;
  /** By timed task: the active part counts for the verdict. */
  readonly creditedTaskIds: ReadonlySet<string>;
}

/** What a minute weighs, between what is certain and what is possible. */
interface Range {
  readonly least: number;
  readonly most: number;
}

/** Weight factors of one task: bare is 1. Least and most differ where something about the protector is not known. */
interface Seen {
  readonly atEar: TaskAtEar;
  readonly task: TimedTask;
  /** Worn, active part off and on; null: not known. */
  readonly off: number | null;
  readonly on: number | null;
  /** Programme audio under the protector, dB; null: none. */
  readonly audioDb: number | null;
  readonly isCredited: boolean;
}

/**
 * The whole day at the ear. A protector counts in the tasks of its use that reach the site's wear-from level or lie in
 * a zone; all other time counts bare, as it does without protection. No threshold acts under a protector.
 *
 * Where no protector counts at all, the ear has what the workplace has, threshold and all.
 *
 * Where a reading governs the shift, it says how much there was, and the tasks only how it divides between them.
 *
 * @source osha-1910.95 App. B: the rating comes off the shift's TWA
 * @source wearing-time closed form of the exchange-rate mean
 */
export function evaluateAtEar(
  day: DayInput,
  ruleSet: RuleSetVersion,
  outsideLaw: ExchangeLaw,
  outside: Sum,
): DayAtEar {
  if (!day.shifts.some((shift) => shift.tasks.some((task) => countsAsWorn(task, day)))) {
    return bareDay(day, outside);
  }
  const bareLaw: ExchangeLaw = { ...outsideLaw, table: null };
  const law: ExchangeLaw = { ...bareLaw, thresholdDb: null };
  const tasks: TaskAtEar[] = [];
  const creditedTaskIds = new Set<string>();
  const off = new Adder();
  const on = new Adder();
  const asWorked = new Adder();
  const judged = new Adder();
  const fullyWorn = new Adder();
  let hasActive = false;
  let isBatteryUnknown = false;
  let isWearingUnknown = false;

  for (const shift of day.shifts) {
    const seen: Seen[] = [];
    let activeWornMin = 0;
    let batteryMin: number | null = Number.POSITIVE_INFINITY;
    for (const task of shift.tasks) {
      const one = seeTask(task, day, ruleSet, law, outsideLaw);
      seen.push(one);
      tasks.push(one.atEar);
      if (one.isCredited) creditedTaskIds.add(task.id);
      if (one.atEar.isWorn && task.wornPct === null) isWearingUnknown = true;
      if (one.on === null || !task.protection) continue;
      hasActive = true;
      activeWornMin += (task.durationMin * (task.wornPct ?? 100)) / 100;
      const own = task.protection.inner.active?.batteryMin ?? null;
      batteryMin = own === null || batteryMin === null ? null : Math.min(batteryMin, own);
    }
    const powered = poweredShare(batteryMin, activeWornMin);
    if (powered === null) isBatteryUnknown = true;

    const scale = scaleOf(shift, day, law, outsideLaw);
    for (const { task, off: offFactor, on: onFactor, audioDb, atEar, isCredited } of seen) {
      const { level } = task;
      if (level === null || task.durationMin === 0) continue;
      const minutes = task.durationMin * scale.factor;
      // Bare, the ear has what the workplace has, threshold and all.
      const lawHere = atEar.isWorn ? law : bareLaw;
      const least = scale.isByReading
        ? steadyWeight(level.levelDb, lawHere)
        : leastAtEar(level, lawHere, outsideLaw);
      const most = scale.isByReading ? least : mostAtEar(level, lawHere, outsideLaw);
      const worn = atEar.isWorn ? (task.wornPct === null ? null : task.wornPct / 100) : 0;
      const mixed =
        onFactor === null || offFactor === null || powered === null
          ? null
          : powered * onFactor + (1 - powered) * offFactor;
      if (audioDb !== null) {
        // The reading's factor is on the noise, not on the programme.
        const bare = { least: least * scale.ofReading, most: most * scale.ofReading };
        const under = wornUnderAudio(bare, audioLaw(audioDb, level, law, scale.isByReading));
        const offWeight = under(offFactor);
        const onWeight = under(onFactor ?? offFactor);
        const mixedWeight = powered === null ? offWeight : mixOf(powered, onWeight, offWeight);
        const minutesHere = task.durationMin * scale.likeness;
        const add = (adder: Adder, share: number | null, whileWorn: Range) =>
          adder.addWithAudio(minutesHere, bare, share, whileWorn, weightOf(audioDb, law));
        add(off, worn, offWeight);
        add(on, worn, onWeight);
        add(asWorked, worn, mixedWeight);
        add(judged, worn, isCredited ? mixedWeight : offWeight);
        add(fullyWorn, 1, offWeight);
        continue;
      }
      off.add(minutes, least, most, worn, offFactor);
      on.add(minutes, least, most, worn, onFactor ?? offFactor);
      asWorked.add(minutes, least, most, worn, mixed ?? offFactor);
      judged.add(minutes, least, most, worn, isCredited ? (mixed ?? offFactor) : offFactor);
      fullyWorn.add(minutes, least, most, atEar.isWorn ? 1 : 0, offFactor);
    }
    for (const adder of [off, on, asWorked, judged, fullyWorn]) {
      adder.closeShift(shift, scale, bareLaw);
    }
  }
  return {
    tasks,
    off: off.sum(),
    on: hasActive ? on.sum() : null,
    asWorked: hasActive && !isBatteryUnknown ? asWorked.sum() : null,
    judged: judged.sum(),
    fullyWorn: fullyWorn.sum(),
    isWorn: true,
    isWearingUnknown,
    creditedTaskIds,
  };
}

/** What a minute weighs while worn, by what the protector leaves of the noise (null: not known) and the programme. */
function wornUnderAudio(bare: Range, audio: AudioLaw): (factor: number | null) => Range {
  return (factor) => ({
    least: withAudioWeight(factor === null ? 0 : bare.least * factor, audio, "least"),
    most: withAudioWeight(bare.most * (factor ?? 1), audio, "most"),
  });
}

const mixOf = (share: number, a: Range, b: Range): Range => ({
  least: share * a.least + (1 - share) * b.least,
  most: share * a.most + (1 - share) * b.most,
});

function bareDay(day: DayInput, outside: Sum): DayAtEar {
  const tasks: TaskAtEar[] = [];
  for (const shift of day.shifts) {
    for (const task of shift.tasks) {
      const outsideDb = task.level?.levelDb ?? null;
      tasks.push(bareTask(task, false, outsideDb, outsideDb === null ? "level-missing" : null));
    }
  }
  return {
    tasks,
    off: outside,
    on: null,
    asWorked: null,
    judged: outside,
    fullyWorn: outside,
    isWorn: false,
    isWearingUnknown: false,
    creditedTaskIds: NOBODY,
  };
}

const NOBODY: ReadonlySet<string> = new Set();

/** How the tasks of a shift add up to it. */
interface Scale {
  readonly isByReading: boolean;
  /** What a governing reading adds up to. */
  readonly readingSum: number;
  /** On the tasks' minutes. */
  readonly factor: number;
  /** The part of it by which the tasks stand for more time than their own. */
  readonly likeness: number;
  /** The part of it that the reading makes of the tasks' noise; 1 without one. */
  readonly ofReading: number;
  readonly missing: Reason | null;
}

export function scaleOf(
  shift: ShiftInput,
  day: DayInput,
  law: ExchangeLaw,
  outsideLaw: ExchangeLaw,
): Scale {
  const missing =
    missingTime(shift) ??
    (cutReading(shift, outsideLaw) ? "time-unknown" : null) ??
    (shift.tasks.some(({ level, durationMin }) => level === null && durationMin > 0)
      ? "level-missing"
      : null);
  const likeness = likenessFactor(shift);
  const reading = shift.readings.length > 0 ? governingReading(shift, outsideLaw) : undefined;
  if (!reading)
    return { isByReading: false, readingSum: 0, factor: likeness, likeness, ofReading: 1, missing };
  const readingSum = sumReading(reading, shift, { ...law, table: null });
  const bareLaw: ExchangeLaw = { ...outsideLaw, table: null };
  let tasksSum = quietSum(shift, bareLaw);
  for (const task of shift.tasks) {
    const { level, durationMin } = task;
    const lawHere = countsAsWorn(task, day) ? law : bareLaw;
    if (level) tasksSum += durationMin * likeness * steadyWeight(level.levelDb, lawHere);
  }
  return {
    isByReading: true,
    readingSum,
    factor: tasksSum > 0 ? (likeness * readingSum) / tasksSum : 0,
    likeness,
    ofReading: tasksSum > 0 ? readingSum / tasksSum : 0,
    missing: missing ?? (accountedMin(shift) > 0 ? null : "no-tasks"),
  };
}

/** What a minute at a level weighs, as if it hardly moved. */
export function steadyWeight(levelDb: number, law: ExchangeLaw): number {
  return leastWeight({ kind: "steady" }, levelDb, law);
}

export function quietSum(shift: ShiftInput, law: ExchangeLaw): number {
  return shift.unaccounted.how === "quiet"
    ? unaccountedMin(shift) * steadyWeight(shift.unaccounted.levelDb, law)
    : 0;
}

/** Adds tasks up by shift and day, with what is certain and what is possible. */
class Adder {
  private least = 0;
  private most = 0;
  private shiftLeast = 0;
  private shiftMost = 0;
  /** The most that the programme alone adds to the shift. */
  private shiftAudio = 0;
  private missing: Reason | null = null;

  add(
    minutes: number,
    leastWeightPerMin: number,
    mostWeightPerMin: number,
    worn: number | null,
    factor: number | null,
  ): void {
    // Not knowing how long it was worn leaves everything between always and never; likewise what it takes off.
    const most = worn === null || factor === null ? 1 : 1 - worn + worn * factor;
    const least = worn === null ? (factor ?? 0) : 1 - worn + worn * (factor ?? 0);
    this.shiftLeast += minutes * leastWeightPerMin * Math.min(least, most);
    this.shiftMost += minutes * mostWeightPerMin * Math.max(least, most);
  }

  /** A task with programme audio: what it weighs while worn is no factor of the noise without it. */
  addWithAudio(
    minutes: number,
    bare: Range,
    worn: number | null,
    whileWorn: Range,
    audioWeight: number,
  ): void {
    this.shiftLeast +=
      minutes *
      (worn === null
        ? Math.min(bare.least, whileWorn.least)
        : (1 - worn) * bare.least + worn * whileWorn.least);
    this.shiftMost +=
      minutes *
      (worn === null
        ? Math.max(bare.most, whileWorn.most)
        : (1 - worn) * bare.most + worn * whileWorn.most);
    this.shiftAudio += minutes * audioWeight;
  }

  closeShift(shift: ShiftInput, scale: Scale, law: ExchangeLaw): void {
    const { isByReading, readingSum, missing } = scale;
    const factor = isByReading ? scale.factor : 1;
    const quiet = quietSum(shift, law) * factor;
    if (missing === null) {
      this.least += this.shiftLeast + quiet;
      this.most += this.shiftMost + quiet;
    } else if (isByReading) {
      this.most += readingSum + this.shiftAudio;
    } else {
      this.least += this.shiftLeast + quiet;
      this.most = Number.POSITIVE_INFINITY;
    }
    this.missing ??= missing;
    this.shiftLeast = 0;
    this.shiftMost = 0;
    this.shiftAudio = 0;
  }

  sum(): Sum {
    return { least: this.least, most: this.most, missing: this.missing };
  }
}

/**
 * Appendix B takes the rating off the rule's own TWA: an average under the rule's own settings serves as it stands, and
 * its threshold no longer acts. Any other average only bounds that TWA.
 */
function servesAsItStands({ metric }: TaskLevel, outsideLaw: ExchangeLaw): boolean {
  return (
    metric.kind === "lavg" && !outsideLaw.isEnergy && isOwnSetting(metric.settings, outsideLaw)
  );
}

export function leastAtEar(level: TaskLevel, law: ExchangeLaw, outsideLaw: ExchangeLaw): number {
  return servesAsItStands(level, outsideLaw)
    ? weightOf(level.levelDb, law)
    : leastWeight(level.metric, level.levelDb, law);
}

export function mostAtEar(level: TaskLevel, law: ExchangeLaw, outsideLaw: ExchangeLaw): number {
  return servesAsItStands(level, outsideLaw)
    ? weightOf(level.levelDb, law)
    : mostWeight(level.metric, level.levelDb, law);
}

/** The noise of a task calls for a protector: by its level, or by the zone it lies in. */
export function isInNoise(task: TimedTask, wearFromDb: number): boolean {
  return task.zone !== "none" || (task.level !== null && task.level.levelDb >= wearFromDb);
}

/** A protector is assigned for the task, and the noise, the zone or the worker's own requirement calls for it. */
export function countsAsWorn(task: TimedTask, day: DayInput): boolean {
  return task.protection !== null && (day.mustWear || isInNoise(task, day.site.wearFromDb));
}

function seeTask(
  task: TimedTask,
  day: DayInput,
  ruleSet: RuleSetVersion,
  law: ExchangeLaw,
  outsideLaw: ExchangeLaw,
): Seen {
  const { level, protection } = task;
  const isWorn = countsAsWorn(task, day);
  if (level === null) return { ...bare(task, isWorn, null, "level-missing"), off: null };
  if (!isWorn || protection === null) return bare(task, false, level.levelDb, null);

  const rule = ruleSet.protection;
  const outsideDb = level.levelDb;
  const methods = reductions(level, protection, rule).map((one) => methodResult(outsideDb, one));
  const governing = governingMethod(methods, rule, lcMinusLaDb(level));
  const audioDb = protection.audioDb ?? null;
  if (governing.atEarDb === null) {
    return {
      task,
      off: null,
      on: null,
      audioDb,
      isCredited: false,
      atEar: {
        ...bareTask(task, true, outsideDb, governing.reason),
        methods,
        inTaskDb: null,
      },
    };
  }
  const noiseDb = governing.atEarDb;
  const active = activeGainDb(level, protection, rule.alpha);
  const noiseActiveDb = active.gainDb === null ? null : noiseDb - active.gainDb;
  const wornDb = withAudioDb(noiseDb, audioDb);
  const wornActiveDb = noiseActiveDb === null ? null : withAudioDb(noiseActiveDb, audioDb);
  const isCredited =
    wornActiveDb !== null && day.site.creditsActivePart && protection.activeCheckPassed;
  const inTask = (whileWornDb: number): number | null =>
    task.wornPct === null
      ? null
      : wornShareLevelDb(outsideDb, whileWornDb, task.wornPct, levelFactor(law));
  // A worker who must wear one whatever the level is not told that it is too much for a quiet room.
  const actionDb = isInNoise(task, day.site.wearFromDb) ? en458ActionDb(day, rule) : null;
  const audio = audioDb === null ? null : audioLaw(audioDb, level, law, false);
  const aboveDb = (weight: number): number =>
    weight > 0 ? levelOfWeight(weight, law) - outsideDb : Number.NEGATIVE_INFINITY;
  const aboveLeastDb = aboveDb(leastAtEar(level, law, outsideLaw));
  const aboveMostDb = aboveDb(mostAtEar(level, law, outsideLaw));
  const rangeOf = (leftDb: number): { leastDb: number; mostDb: number } => {
    const range = { leastDb: leftDb + aboveLeastDb, mostDb: leftDb + aboveMostDb };
    return audio === null
      ? range
      : {
          leastDb: withAudioAtEndDb(range.leastDb, audio, "least"),
          mostDb: withAudioAtEndDb(range.mostDb, audio, "most"),
        };
  };
  const { leastDb, mostDb } = rangeOf(noiseDb);
  const isBounded = mostDb - leastDb > BINARY_NOISE_DB;
  // Where the level only bounds the rule's own, a word stands only if both ends have it.
  const word = (leftDb: number): ProtectorWord | null => {
    if (!isBounded) return wordOf(withAudioDb(leftDb, audioDb), actionDb);
    const range = rangeOf(leftDb);
    const atLeast = wordOf(range.leastDb, actionDb);
    return atLeast === wordOf(range.mostDb, actionDb) ? atLeast : null;
  };
  const wornWord = word(noiseDb);
  const isOpen = isBounded && actionDb !== null && wornWord === null;
  const bound = mostDb === Number.POSITIVE_INFINITY ? "only-lower-bound" : "only-upper-bound";
  return {
    task,
    off: weightOf(noiseDb - outsideDb, law),
    on: noiseActiveDb === null ? null : weightOf(noiseActiveDb - outsideDb, law),
    audioDb,
    isCredited,
    atEar: {
      timedTaskId: task.id,
      outsideDb,
      isWorn: true,
      wornPct: task.wornPct,
      methods,
      governingMethod: governing.method,
      wornDb,
      wornActiveDb,
      inTaskDb: inTask(wornDb),
      inTaskActiveDb: wornActiveDb === null ? null : inTask(wornActiveDb),
      word: wornWord,
      wordActive: noiseActiveDb === null ? null : word(noiseActiveDb),
      reason: task.wornPct === null ? "wearing-unknown" : isOpen ? bound : active.reason,
      ...(isBounded && {
        wornRangeDb: {
          leastDb: Number.isFinite(aboveLeastDb) ? leastDb : null,
          mostDb: Number.isFinite(aboveMostDb) ? mostDb : null,
        },
      }),
      ...(audioDb !== null && { audio: { levelDb: audioDb, noiseDb, noiseActiveDb } }),
    },
  };
}

/** Levels taken through weights and back differ by less than this. */
const BINARY_NOISE_DB = 1e-9;

function bare(
  task: TimedTask,
  isWorn: boolean,
  outsideDb: number | null,
  reason: Reason | null,
): Seen {
  const atEar = bareTask(task, isWorn, outsideDb, reason);
  return { task, off: 1, on: null, audioDb: null, isCredited: false, atEar };
}

function bareTask(
  task: TimedTask,
  isWorn: boolean,
  outsideDb: number | null,
  reason: Reason | null,
): TaskAtEar {
  return {
    timedTaskId: task.id,
    outsideDb,
    isWorn,
    wornPct: isWorn ? task.wornPct : null,
    methods: NO_METHODS,
    governingMethod: null,
    wornDb: null,
    wornActiveDb: null,
    inTaskDb: outsideDb,
    inTaskActiveDb: null,
    word: null,
    wordActive: null,
    reason,
  };
}

const NO_METHODS: readonly MethodResult[] = [];

/** The action value from which the words hang for this worker, dB; null where the rule has no such scale. */
function en458ActionDb(day: DayInput, rule: RuleSetVersion["protection"]): number | null {
  if (rule.adequacy !== "en-458" || rule.targetDb === null) return null;
  return Math.min(rule.targetDb, day.personalTargetDb ?? Number.POSITIVE_INFINITY);
}

function wordOf(wornDb: number, actionDb: number | null): ProtectorWord | null {
  return actionDb === null ? null : en458Word(wornDb, actionDb);
}

interface Governing {
  readonly method: AttenuationMethod | null;
  readonly atEarDb: number | null;
  readonly reason: Reason | null;
}

/**
 * The method that counts under a rule in a noise of that LC − LA, and the level by it; own fit replaces the label, or can
 * only lower it.
 */
export function governingMethod(
  methods: readonly MethodResult[],
  rule: RuleSetVersion["protection"],
  lcLaDb: number | null,
): Governing {
  if (rule.methods.length === 0) return { method: null, atEarDb: null, reason: "not-stated" };
  let label: MethodResult | undefined;
  let reason: Reason | null = null;
  for (const name of rule.methods) {
    const result = methods.find(({ method }) => method === name);
    if (!result) continue;
    if (result.atEarDb !== null) {
      label = result;
      break;
    }
    reason ??= result.reason;
  }
  const own = methods.find(({ method, atEarDb }) => method === "own-fit" && atEarDb !== null);
  if (own && ownFitReplaces(rule, lcLaDb)) return own;
  if (!label && own) reason ??= isTooDeepForOwnFit(rule, lcLaDb) ? "lc-la-out-of-range" : null;
  if (!label) return { method: null, atEarDb: null, reason: reason ?? "no-attenuation-data" };
  return own && own.atEarDb! > label.atEarDb! ? own : label;
}
