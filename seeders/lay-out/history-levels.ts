import { MISSING } from "../../shared/acoustics/history";
import type { LevelMetric } from "../../shared/acoustics/types";
import { chance } from "./chance";

/** One stretch of work under a task, of which the instrument logs the levels. */
export interface Block {
  name: string;
  metric: LevelMetric;
  /** What the stretch is to come to, under the task's own metric. */
  levelDb: number;
  /** The greatest peak that occurs, dB(C). */
  peakDb: number;
  seconds: number;
}

/** How a task's noise goes up and down. */
interface Pattern {
  /** Work and pause in turn, seconds; none: it goes on without. */
  turns?: { onS: readonly [number, number]; offS: readonly [number, number]; offDb: number };
  /** Wandering of the level, dB, and how slowly. */
  wanderDb: number;
  memory: number;
  /** Single blows or bursts: one in so many seconds, so many dB above. */
  blows?: { everyS: number; aboveDb: number };
  /** Peak above the second's LAeq. */
  crestDb: number;
}

const STEADY_NOISE: Pattern = { wanderDb: 0.5, memory: 0.97, crestDb: 13 };
const TALK: Pattern = {
  wanderDb: 3.5,
  memory: 0.8,
  blows: { everyS: 140, aboveDb: 11 },
  crestDb: 16,
};

const PATTERNS: Readonly<Record<string, Pattern>> = {
  Grinding: {
    turns: { onS: [25, 90], offS: [8, 35], offDb: -17 },
    wanderDb: 1.4,
    memory: 0.85,
    crestDb: 14,
  },
  Chipping: {
    turns: { onS: [12, 45], offS: [10, 40], offDb: -19 },
    wanderDb: 1.8,
    memory: 0.7,
    blows: { everyS: 9, aboveDb: 6 },
    crestDb: 19,
  },
  Linishing: {
    turns: { onS: [30, 70], offS: [6, 20], offDb: -14 },
    wanderDb: 1.1,
    memory: 0.9,
    crestDb: 13,
  },
  "Run-up": {
    turns: { onS: [180, 420], offS: [40, 120], offDb: -24 },
    wanderDb: 2.6,
    memory: 0.985,
    crestDb: 18,
  },
  "Soak run": { wanderDb: 0.7, memory: 0.99, crestDb: 17 },
  Teardown: {
    wanderDb: 3,
    memory: 0.85,
    blows: { everyS: 40, aboveDb: 12 },
    crestDb: 18,
  },
  "Casting wash": {
    turns: { onS: [60, 200], offS: [20, 60], offDb: -9 },
    wanderDb: 1,
    memory: 0.92,
    crestDb: 13,
  },
  "Plate hammering": {
    turns: { onS: [20, 60], offS: [15, 50], offDb: -20 },
    wanderDb: 2.2,
    memory: 0.6,
    blows: { everyS: 4, aboveDb: 7 },
    crestDb: 22,
  },
  "Plasma cutting": {
    turns: { onS: [40, 120], offS: [20, 60], offDb: -16 },
    wanderDb: 0.9,
    memory: 0.9,
    crestDb: 14,
  },
  "Welding and tacking": {
    turns: { onS: [20, 80], offS: [10, 45], offDb: -10 },
    wanderDb: 1.8,
    memory: 0.85,
    blows: { everyS: 60, aboveDb: 9 },
    crestDb: 16,
  },
  "Compressor rounds": STEADY_NOISE,
  "Blow-down": STEADY_NOISE,
};
const patternOf = (name: string): Pattern => PATTERNS[name] ?? TALK;

/** Numbers from 0 to under 1, the same for the same words. */
class Chances {
  private state: number;

  constructor(...words: readonly (string | number)[]) {
    this.state = Math.floor(chance(...words) * 2 ** 32) | 1;
  }

  next(): number {
    this.state ^= this.state << 13;
    this.state ^= this.state >>> 17;
    this.state ^= this.state << 5;
    return (this.state >>> 0) / 2 ** 32;
  }

  between([from, to]: readonly [number, number]): number {
    return from + (to - from) * this.next();
  }

  /** Spread like a normal deviate of 1: the sum of a few. */
  deviate(): number {
    return (this.next() + this.next() + this.next() + this.next() - 2) * Math.sqrt(3);
  }
}

export interface LoggedLevels {
  laeq: Int16Array;
  las: Int16Array;
  lcpeak: Int16Array;
}

/** Instruments write tenths of a decibel. */
const tenths = (levelDb: number): number => Math.round(levelDb * 10) * 10;
/** Nothing below this is shown. */
const FLOOR_DB = 48;
/** Time constant of the slow detector, seconds. */
const SLOW_S = 1;

/** What an instrument logs over a shift of these blocks, one value every `intervalS`. The same words give the same levels. */
export function logLevels(
  blocks: readonly Block[],
  intervalS: number,
  ...words: readonly (string | number)[]
): LoggedLevels {
  const count = Math.round(
    blocks.reduce((sum, { seconds }) => sum + Math.round(seconds / intervalS), 0),
  );
  const laeqDb = new Float64Array(count);
  const lcpeak = new Int16Array(count);
  let at = 0;
  for (const [place, block] of blocks.entries()) {
    const length = Math.round(block.seconds / intervalS);
    const chances = new Chances(...words, place, block.name);
    const shape = shapeOf(patternOf(block.name), length, intervalS, chances);
    const byDb = block.levelDb - meanOf(shape, block.metric, intervalS);
    const { crestDb } = patternOf(block.name);
    for (let index = 0; index < length; index++) {
      const levelDb = Math.max(FLOOR_DB, shape[index]! + byDb);
      laeqDb[at + index] = levelDb;
      const peakDb = levelDb + crestDb + 2 * chances.deviate();
      lcpeak[at + index] = tenths(Math.min(block.peakDb - 0.6 - 2 * chances.next(), peakDb));
    }
    at += length;
  }
  return { laeq: Int16Array.from(laeqDb, tenths), las: slowOf(laeqDb, intervalS), lcpeak };
}

/** The block's levels before they are brought to what it is to come to. */
function shapeOf(
  { turns, wanderDb, memory, blows }: Pattern,
  length: number,
  intervalS: number,
  chances: Chances,
): Float64Array {
  const shape = new Float64Array(length);
  const kept = memory ** intervalS;
  const spread = wanderDb * Math.sqrt(1 - kept ** 2);
  let wandering = wanderDb * chances.deviate();
  let isOn = true;
  let left = turns ? chances.between(turns.onS) / 2 : Number.POSITIVE_INFINITY;
  let turnDb = 0;
  for (let index = 0; index < length; index++) {
    wandering = kept * wandering + spread * chances.deviate();
    if (turns) {
      left -= intervalS;
      if (left <= 0) {
        isOn = !isOn;
        left = chances.between(isOn ? turns.onS : turns.offS);
        turnDb = isOn ? chances.deviate() : turns.offDb + 2 * chances.deviate();
      }
    }
    const isBlow = blows && isOn && chances.next() < intervalS / blows.everyS;
    shape[index] = turnDb + wandering + (isBlow ? blows.aboveDb * (0.6 + 0.5 * chances.next()) : 0);
  }
  return shape;
}

/** Mean of the block under its task's metric; a 5 dB average counts the slow level above its threshold. */
function meanOf(shape: Float64Array, metric: LevelMetric, intervalS: number): number {
  if (metric.kind !== "lavg") {
    let sum = 0;
    for (const levelDb of shape) sum += 10 ** (levelDb / 10);
    return 10 * Math.log10(sum / shape.length);
  }
  // Without the threshold: what is below it is far below the average and hardly counts.
  const { exchangeRateDb } = metric.settings;
  const slow = slowOf(shape, intervalS, (levelDb) => Math.round(levelDb * 100));
  let sum = 0;
  for (const level of slow) sum += 2 ** (level / 100 / exchangeRateDb);
  return exchangeRateDb * Math.log2(sum / slow.length);
}

function slowOf(
  levelsDb: Float64Array,
  intervalS: number,
  round: (levelDb: number) => number = tenths,
): Int16Array {
  const kept = Math.exp(-intervalS / SLOW_S);
  let energy = levelsDb.length > 0 ? 10 ** (levelsDb[0]! / 10) : 0;
  return Int16Array.from(levelsDb, (levelDb) => {
    energy = kept * energy + (1 - kept) * 10 ** (levelDb / 10);
    return round(10 * Math.log10(energy));
  });
}

/** A microphone that is knocked about: thumps far above the work. Changes the levels in place. */
export function knock(
  levels: LoggedLevels,
  fromIndex: number,
  toIndex: number,
  ...words: readonly (string | number)[]
): void {
  const chances = new Chances(...words, "knock");
  for (let index = fromIndex; index < toIndex; index++) {
    const isThump = chances.next() < 0.3;
    const levelDb = isThump ? 112 + 8 * chances.next() : 104 + 4 * chances.next();
    levels.laeq[index] = tenths(levelDb);
    levels.las[index] = tenths(levelDb - 1 + chances.deviate());
    levels.lcpeak[index] = tenths(isThump ? 138 + 5 * chances.next() : levelDb + 15);
  }
}

/** The instrument's own file: local date and time, and a column a channel. */
export function levelsText(
  channels: readonly { heading: string; levels: Int16Array }[],
  startMs: number,
  intervalMs: number,
  utcOffsetMs: number,
): string {
  const lines = [["Time", ...channels.map(({ heading }) => heading)].join(",")];
  const count = channels[0]?.levels.length ?? 0;
  for (let index = 0; index < count; index++) {
    const stamp = new Date(startMs + utcOffsetMs + index * intervalMs).toISOString();
    const time = `${stamp.slice(0, 10)} ${stamp.slice(11, intervalMs % 1000 === 0 ? 19 : 23)}`;
    let line = time;
    for (const { levels } of channels) {
      const level = levels[index]!;
      line += `,${level === MISSING ? "" : (level / 100).toFixed(1)}`;
    }
    lines.push(line);
  }
  return `${lines.join("\n")}\n`;
}
