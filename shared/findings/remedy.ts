import { evaluateDay } from "../acoustics/day";
import type {
  DayEvaluation,
  DayInput,
  Protection,
  ProtectorData,
  ProtectorWord,
  RuleSetVersion,
} from "../acoustics/types";

export interface Remedy {
  modelIds: readonly string[];
  names: readonly string[];
  /** The whole day at the ear with it, worn throughout. */
  atEarDb: number | null;
  word: ProtectorWord;
  wornDb: number | null;
}

/** Best first. A protector that takes too much is a fault as well. */
const order: readonly ProtectorWord[] = [
  "good",
  "enough",
  "just-enough",
  "strong-side",
  "too-much",
  "too-little",
];

/**
 * A protector of the register that would put this day right, worn throughout in every task in noise: the best word
 * while worn in its worst task, then the middle of the band. Null where none does.
 */
export function proposeRemedy(
  input: DayInput,
  governing: RuleSetVersion,
  register: readonly ProtectorData[],
): Remedy | null {
  const candidates = [...register.map((inner) => ({ inner, outer: null })), ...pairs(register)];
  let best: { remedy: Remedy; rank: number; overDb: number } | null = null;
  for (const { inner, outer } of candidates) {
    // One that is good by itself comes before any two, and the ones come first.
    if (outer && best?.rank === 0) break;
    const protection: Protection = {
      assignmentId: null,
      inner,
      outer,
      combinationBands: null,
      ownFitDb: null,
      activeCheckPassed: false,
    };
    const evaluation = evaluateDay(wearing(input, protection), governing, []);
    const { word } = evaluation;
    if (word === null || word === "too-little" || word === "too-much" || isOverAtEar(evaluation))
      continue;
    const rank = order.indexOf(word) * 2 + (outer ? 1 : 0);
    const wornDb =
      evaluation.tasks.find(({ timedTaskId }) => timedTaskId === evaluation.decidingTaskId)
        ?.wornDb ?? null;
    const overDb = evaluation.atEarDb ?? Number.POSITIVE_INFINITY;
    if (best && (rank > best.rank || (rank === best.rank && overDb >= best.overDb))) continue;
    const devices = outer ? [inner, outer] : [inner];
    best = {
      rank,
      overDb,
      remedy: {
        modelIds: devices.map(({ modelId }) => modelId),
        names: devices.map(({ name }) => name),
        atEarDb: evaluation.atEarDb,
        word,
        wornDb,
      },
    };
  }
  return best?.remedy ?? null;
}

const isOverAtEar = ({ criteria }: DayEvaluation) =>
  criteria.some(({ judged, verdict }) => judged === "at-the-ear" && verdict !== "under");

const wearing = (input: DayInput, protection: Protection): DayInput => ({
  ...input,
  shifts: input.shifts.map((shift) => ({
    ...shift,
    readings: shift.readings,
    tasks: shift.tasks.map((task) => ({ ...task, protection, wornPct: 100 })),
  })),
});

const isPlug = ({ kind }: ProtectorData) => kind.endsWith("-plug") && kind !== "banded-plug";
const isMuff = ({ kind }: ProtectorData) => kind === "earmuff" || kind === "helmet-earmuff";

/** A plug under a muff. */
function pairs(
  register: readonly ProtectorData[],
): { inner: ProtectorData; outer: ProtectorData }[] {
  return register
    .filter(isPlug)
    .flatMap((inner) => register.filter(isMuff).map((outer) => ({ inner, outer })));
}
