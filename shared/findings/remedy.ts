import { evaluateDay } from "../acoustics/day";
import { lawAtEar } from "../acoustics/outside-criterion";
import { isInNoise } from "../acoustics/protection/at-ear";
import { ProtectorChoice } from "../acoustics/protection/choose-protector";
import { judgedAtEar } from "../acoustics/protection/judged-at-ear";
import { noisesOf, wornMinOf } from "../acoustics/protection/noises";
import type {
  DayEvaluation,
  DayInput,
  Protection,
  ProtectorData,
  ProtectorWord,
  RuleSetVersion,
  TaskAtEar,
  TimedTask,
} from "../acoustics/types";
import { withTasks } from "../acoustics/with-tasks";
import { besideScaleDb } from "../rule-sets";

/** One protector, or a plug under a muff. */
export interface Devices {
  modelIds: readonly string[];
  names: readonly string[];
  /** The worker has it there already. */
  isHeld: boolean;
}

export interface TaskDevices extends Devices {
  taskIds: readonly string[];
  taskNames: readonly string[];
}

/** What to wear in noise, and instead of it in some tasks. */
export interface Remedy extends Devices {
  inTasks: readonly TaskDevices[];
  /** The whole day at the ear with it, worn throughout. */
  atEarDb: number | null;
  word: ProtectorWord;
  wornDb: number | null;
}

/** What is left where no protector of the register puts the day right, and the task that stands in the way. */
export interface LeftToDo {
  kind: "wear-throughout" | "lower-noise" | "shorten-time" | "other-protector";
  taskId: string | null;
  taskName: string | null;
}

export type Proposal = { remedy: Remedy; left: null } | { remedy: null; left: LeftToDo };

/** What is known of single models on this worker, by model: the verdict would rest on it. */
export type OnWorker = ReadonlyMap<string, KnownOnWorker>;

type KnownOnWorker = Pick<Protection, "ownFitDb" | "activeCheckPassed"> & {
  /** Then it is not proposed. Absent: nothing is known against it. */
  readonly cannotWear?: boolean;
};

/** Best first. A protector that takes too much is a fault as well. */
const ORDER: readonly ProtectorWord[] = ["good", "enough", "just-enough", "strong-side"];
const FAULTY = ORDER.length;
/** Nobody changes protectors more often than this in a day. */
const MOST_CHANGES = 2;
/** Plans by task that are worked out in full, the best first. */
const MOST_PLANS = 40;

/**
 * What to give a worker so that this day would have been right, worn throughout in every task in noise: one protector
 * for the whole day where one is enough, the first of them in the order of `ProtectorChoice`; else the fewest by task.
 * Where the worker's own would do if they were worn throughout, or nothing on the register does, it says what is left. Null where the rule has no word for a protector,
 * or no task of the day is in noise. What a protector brings is judged as a day is: by the own fit where there is one, the
 * active part on where the site credits it and its check passed.
 */
export function proposeRemedy(
  input: DayInput,
  governing: RuleSetVersion,
  register: readonly ProtectorData[],
  onWorker: OnWorker = new Map(),
): Proposal | null {
  if (governing.protection.adequacy === "not-stated") return null;
  return new Search(input, governing, onWorker).find(register);
}

/** A task of the day, however often it was done. */
interface Noise {
  readonly taskId: string;
  readonly name: string;
  readonly timedIds: ReadonlySet<string>;
  readonly minutes: number;
  readonly held: Protection | null;
}

interface Option {
  readonly inner: ProtectorData;
  readonly outer: ProtectorData | null;
  readonly modelIds: readonly string[];
  readonly evaluation: DayEvaluation;
  /** By task: rank of the word while worn (FAULTY: none that will do) and the level. */
  readonly inTask: ReadonlyMap<string, { readonly rank: number; readonly wornDb: number | null }>;
}

/** Per task the option worn in it, by the place of its noise. */
interface Plan {
  readonly main: Option;
  readonly worn: readonly Option[];
  readonly cost: readonly number[];
  readonly quietness: number;
}

class Search {
  private readonly noises: readonly Noise[];
  private readonly hasTaskWords: boolean;
  private readonly onWorker: OnWorker;
  private readonly isBarred: (modelId: string) => boolean;

  constructor(
    private readonly input: DayInput,
    private readonly governing: RuleSetVersion,
    onWorker: OnWorker,
  ) {
    this.onWorker = new Map<string, KnownOnWorker>([...onWorker, ...heldOnWorker(input)]);
    this.isBarred = (modelId) => onWorker.get(modelId)?.cannotWear ?? false;
    this.noises = noiseByTask(input);
    this.hasTaskWords = governing.protection.adequacy === "en-458";
  }

  find(register: readonly ProtectorData[]): Proposal | null {
    if (this.noises.length === 0) return null;
    const unworn = this.wornTooShort();
    if (unworn) return unworn;

    // In one order, so that of two that are alike always the same is proposed.
    const models = register
      .filter(({ modelId }) => !this.isBarred(modelId))
      .toSorted((a, b) => (a.modelId < b.modelId ? -1 : 1));
    const singles = models.map((inner) => this.option(inner, null));
    const single = this.bestForTheDay(singles);
    if (single) return single;
    // Where only a test of the two together counts, the register has none.
    const pairs =
      this.governing.protection.double === "test-data-only"
        ? []
        : pairsOf(models).map(({ inner, outer }) => this.option(inner, outer));
    const options = [...singles, ...pairs];
    if (options.length > 0 && options.every(({ evaluation }) => evaluation.word === null))
      return null;
    const found = this.hasTaskWords
      ? this.bestByTask(options)
      : this.bestByLoudness(singles, pairs);
    return found ?? { remedy: null, left: this.whatIsLeft(options) };
  }

  /** The worker's own protectors would have been right: then nothing has to be given. */
  private wornTooShort(): Proposal | null {
    if (this.noises.some(({ held }) => held === null || this.isUnwearable(held))) return null;
    const asWorked = evaluateDay(this.input, this.governing, []);
    if (this.isRight(asWorked)) return null;
    const throughout = evaluateDay(
      wearing(this.input, (task) => task.protection),
      this.governing,
      [],
    );
    if (!this.isRight(throughout)) return null;
    const worst = asWorked.tasks
      .filter(({ isWorn, wornPct }) => isWorn && wornPct !== null && wornPct < 100)
      .reduce<TaskAtEar | null>(
        (a, b) => (a && this.inTaskDb(a) >= this.inTaskDb(b) ? a : b),
        null,
      );
    const noise = this.noises.find(({ timedIds }) => worst && timedIds.has(worst.timedTaskId));
    return { remedy: null, left: leftIn("wear-throughout", noise) };
  }

  private isUnwearable({ inner, outer }: Protection): boolean {
    return this.isBarred(inner.modelId) || (outer !== null && this.isBarred(outer.modelId));
  }

  private inTaskDb(atEar: TaskAtEar): number {
    const noise = this.noises.find(({ timedIds }) => timedIds.has(atEar.timedTaskId));
    return judgedAtEar(atEar, noise?.held ?? null, this.input.site).inTaskDb ?? 0;
  }

  /** No fault of the protector, and no level limit at the ear passed or left open by the uncertainty. */
  private isRight(evaluation: DayEvaluation): boolean {
    return (
      rankOf(evaluation) < FAULTY &&
      !evaluation.criteria.some(
        ({ criterionId, judged, verdict }) =>
          judged === "at-the-ear" &&
          (verdict === "over" || verdict === "cant-tell-yet") &&
          this.governing.criteria.find(({ id }) => id === criterionId)?.quantity !== "peak",
      )
    );
  }

  private option(inner: ProtectorData, outer: ProtectorData | null): Option {
    const protection = this.protectionOf(inner, outer);
    const evaluation = evaluateDay(
      wearing(this.input, () => protection),
      this.governing,
      [],
    );
    const inTask = new Map(
      this.noises.map(({ taskId, timedIds }) => {
        const own = evaluation.tasks
          .filter(({ timedTaskId }) => timedIds.has(timedTaskId))
          .map((task) => judgedAtEar(task, protection, this.input.site));
        return [
          taskId,
          {
            rank: Math.max(...own.map((task) => this.rankInTask(task))),
            wornDb: own.some(({ wornDb }) => wornDb === null)
              ? null
              : Math.max(...own.map(({ wornDb }) => wornDb ?? 0)),
          },
        ] as const;
      }),
    );
    const modelIds = outer ? [inner.modelId, outer.modelId] : [inner.modelId];
    return { inner, outer, modelIds, evaluation, inTask };
  }

  private protectionOf(inner: ProtectorData, outer: ProtectorData | null): Protection {
    const own = outer === null ? this.onWorker.get(inner.modelId) : undefined;
    return {
      assignmentId: null,
      inner,
      outer,
      combinationBands: null,
      ownFitDb: own?.ownFitDb ?? null,
      activeCheckPassed: own?.activeCheckPassed ?? false,
    };
  }

  private rankInTask({ word, wornDb }: Pick<TaskAtEar, "word" | "wornDb">): number {
    if (!this.hasTaskWords) return wornDb === null ? FAULTY : 0;
    const rank = word === null ? -1 : ORDER.indexOf(word);
    return rank < 0 ? FAULTY : rank;
  }

  private bestForTheDay(options: readonly Option[]): Proposal | null {
    const right = options.filter(({ evaluation }) => this.isRight(evaluation));
    const best = this.firstChosen(right);
    if (!best) return null;
    return this.proposal(this.planOf(best), best.evaluation);
  }

  /** The one that Choose would offer first for the noise of this day. */
  private firstChosen(options: readonly Option[]): Option | undefined {
    const { input, governing } = this;
    if (options.length < 2) return options[0];
    const noises = noisesOf(
      input.shifts.flatMap(({ tasks }) => tasks),
      governing,
      input,
    );
    const [first] = new ProtectorChoice(
      options.map(({ inner, outer }) => ({ ...NOTHING_BESIDE, inner, outer, name: inner.name })),
      governing.protection,
      lawAtEar(governing),
      besideScaleDb(governing),
    ).for({
      noises,
      personalTargetDb: input.personalTargetDb,
      wornGear: [],
      wornMin: wornMinOf(noises),
      fits: new Map(
        [...this.onWorker].flatMap(([modelId, { ownFitDb }]) =>
          ownFitDb === null
            ? []
            : [[modelId, { parDb: ownFitDb, hasPassed: null, needDb: null, testedOn: input.date }]],
        ),
      ),
      creditedModelIds: new Set(
        [...this.onWorker].flatMap(([modelId, { activeCheckPassed }]) =>
          input.site.creditsActivePart && activeCheckPassed ? [modelId] : [],
        ),
      ),
    });
    return options.find(({ inner }) => inner.modelId === first?.modelId);
  }

  /** A rule with a word for each task: one option for most of them, others where it will not do; few changes first. */
  private bestByTask(options: readonly Option[]): Proposal | null {
    for (let changes = 1; changes <= MOST_CHANGES; changes += 1) {
      const plans = options.flatMap((main) => this.plansAround(main, options, changes));
      plans.sort((a, b) => compare(a.cost, b.cost));
      const quietest = plans.reduce<Plan | null>(
        (a, b) => (a && a.quietness <= b.quietness ? a : b),
        null,
      );
      const tried = new Set([...plans.slice(0, MOST_PLANS), ...(quietest ? [quietest] : [])]);
      for (const plan of tried) {
        const evaluation = this.evaluate(plan);
        if (this.isRight(evaluation)) return this.proposal(plan, evaluation);
      }
    }
    return null;
  }

  private plansAround(main: Option, options: readonly Option[], changes: number): Plan[] {
    const isFit = (option: Option, { taskId }: Noise) =>
      (option.inTask.get(taskId)?.rank ?? FAULTY) < FAULTY;
    const open = this.noises.filter((noise) => !isFit(main, noise));
    if (open.length === this.noises.length) return [];
    const plans: Plan[] = [];
    const complete = (worn: ReadonlyMap<string, Option>, left: readonly Noise[], deep: number) => {
      const [next] = left;
      if (!next) {
        plans.push(
          this.plan(
            main,
            this.noises.map(({ taskId }) => worn.get(taskId) ?? main),
          ),
        );
        return;
      }
      if (deep === changes) return;
      // Whoever changes for this task keeps it on in the others that it serves.
      for (const option of options) {
        if (option === main || !isFit(option, next)) continue;
        const taken = new Map(worn);
        for (const noise of left)
          if (isFit(option, noise) || noise === next) taken.set(noise.taskId, option);
        complete(
          taken,
          left.filter(({ taskId }) => !taken.has(taskId)),
          deep + 1,
        );
      }
    };
    complete(new Map(), open, 0);
    return plans;
  }

  /** A rule that judges the shift as a whole: two in the loudest tasks, in as few as will do. */
  private bestByLoudness(singles: readonly Option[], pairs: readonly Option[]): Proposal | null {
    const plans: { plan: Plan; evaluation: DayEvaluation }[] = [];
    for (const pair of pairs) {
      const { evaluation } = pair;
      if (!this.isRight(evaluation)) continue;
      plans.push({ plan: this.planOf(pair), evaluation });
      for (const main of singles) {
        if (!pair.modelIds.includes(main.inner.modelId)) continue;
        const loudest = this.noises.toSorted(
          (a, b) => loudnessIn(main, b) * b.minutes - loudnessIn(main, a) * a.minutes,
        );
        for (let doubled = 1; doubled < loudest.length; doubled += 1) {
          const isDoubled = new Set(loudest.slice(0, doubled));
          const plan = this.plan(
            main,
            this.noises.map((noise) => (isDoubled.has(noise) ? pair : main)),
          );
          const worked = this.evaluate(plan);
          if (!this.isRight(worked)) continue;
          plans.push({ plan, evaluation: worked });
          break;
        }
      }
    }
    const [best] = plans.toSorted((a, b) => compare(a.plan.cost, b.plan.cost));
    return best ? this.proposal(best.plan, best.evaluation) : null;
  }

  private planOf(option: Option): Plan {
    return this.plan(
      option,
      this.noises.map(() => option),
    );
  }

  private plan(main: Option, worn: readonly Option[]): Plan {
    const held = new Set(this.noises.flatMap(({ held: own }) => (own ? modelsOf(own) : [])));
    const devices = new Set([...main.modelIds, ...worn.flatMap(({ modelIds }) => modelIds)]);
    const rank = Math.max(
      ...worn.map((option, at) => option.inTask.get(this.noises[at]!.taskId)?.rank ?? FAULTY),
    );
    const sum = (of: (noise: Noise, option: Option) => number) =>
      this.noises.reduce((total, noise, at) => total + of(noise, worn[at]!), 0);
    const quietness = sum((noise, option) => noise.minutes * loudnessIn(option, noise));
    return {
      main,
      worn,
      quietness,
      cost: [
        devices.size,
        rank,
        sum(({ minutes }, { outer }) => (outer ? minutes : 0)),
        [...devices].filter((id) => !held.has(id)).length,
        sum(({ minutes }, option) => (option === main ? 0 : minutes)),
        quietness,
      ],
    };
  }

  private evaluate({ main, worn }: Plan): DayEvaluation {
    const of = new Map(
      this.noises.map(({ taskId }, at) => {
        const { inner, outer } = worn[at]!;
        return [taskId, this.protectionOf(inner, outer)] as const;
      }),
    );
    return evaluateDay(
      // Outside noise it counts only for somebody who must wear one whatever the level.
      wearing(
        this.input,
        ({ taskId }) => of.get(taskId) ?? this.protectionOf(main.inner, main.outer),
      ),
      this.governing,
      [],
    );
  }

  private proposal({ main, worn }: Plan, evaluation: DayEvaluation): Proposal {
    const tasksOf = (option: Option) => this.noises.filter((_, at) => worn[at] === option);
    const devices = (option: Option): Devices => ({
      modelIds: option.modelIds,
      names: [option.inner.name, ...(option.outer ? [option.outer.name] : [])],
      isHeld: tasksOf(option).every(
        ({ held }) => held !== null && modelsOf(held).join() === option.modelIds.join(),
      ),
    });
    const others = [...new Set(worn)].filter((option) => option !== main);
    const remedy: Remedy = {
      ...devices(main),
      inTasks: others.map((option) => ({
        ...devices(option),
        taskIds: tasksOf(option).map(({ taskId }) => taskId),
        taskNames: tasksOf(option).map(({ name }) => name),
      })),
      atEarDb: evaluation.counted ? evaluation.counted.atEarDb : evaluation.atEarDb,
      word: evaluation.word as ProtectorWord,
      wornDb: evaluation.counted
        ? evaluation.counted.whileWornDb
        : (evaluation.tasks.find(({ timedTaskId }) => timedTaskId === evaluation.decidingTaskId)
            ?.wornDb ?? null),
    };
    return { remedy, left: null };
  }

  private whatIsLeft(options: readonly Option[]): LeftToDo {
    const levelIn = (option: Option, { taskId }: Noise) => option.inTask.get(taskId)?.wornDb;
    const unserved = this.noises.filter((noise) =>
      options.every(({ inTask }) => inTask.get(noise.taskId)?.rank === FAULTY),
    );
    const quietestIn = (noise: Noise) =>
      Math.min(...options.map((option) => levelIn(option, noise) ?? Number.POSITIVE_INFINITY));
    const loudest = (noises: readonly Noise[], by: (noise: Noise) => number) =>
      noises.reduce<Noise | undefined>((a, b) => (a && by(a) >= by(b) ? a : b), undefined);
    if (options.length === 0) return leftIn("other-protector", this.noises[0]);
    if (this.hasTaskWords && unserved.length > 0) {
      const targetDb = Math.min(
        this.governing.protection.targetDb ?? Number.POSITIVE_INFINITY,
        this.input.personalTargetDb ?? Number.POSITIVE_INFINITY,
      );
      const tooLoud = unserved.filter((noise) => quietestIn(noise) > targetDb);
      return tooLoud.length > 0
        ? leftIn("lower-noise", loudest(tooLoud, quietestIn))
        : leftIn("other-protector", unserved[0]);
    }
    return leftIn(
      "shorten-time",
      loudest(this.noises, (noise) => 10 ** (quietestIn(noise) / 10) * noise.minutes),
    );
  }
}

/** A finding asks what would have put the noise right; gear and stock are asked where one is given out. */
const NOTHING_BESIDE = {
  combinationBands: null,
  worksWith: { helmet: null, glasses: null, respirator: null },
  isArchived: false,
  stock: null,
} as const;

const leftIn = (kind: LeftToDo["kind"], noise: Noise | undefined): LeftToDo => ({
  kind,
  taskId: noise?.taskId ?? null,
  taskName: noise?.name ?? null,
});

const rankOf = ({ word }: DayEvaluation): number => {
  const rank = word === null ? -1 : ORDER.indexOf(word);
  return rank < 0 ? FAULTY : rank;
};

const loudnessIn = ({ inTask }: Option, { taskId }: Noise): number =>
  10 ** ((inTask.get(taskId)?.wornDb ?? 140) / 10);

function compare(a: readonly number[], b: readonly number[]): number {
  for (const [at, value] of a.entries()) {
    const difference = value - (b[at] ?? 0);
    if (difference !== 0) return difference;
  }
  return 0;
}

function noiseByTask(input: DayInput): Noise[] {
  const byTask = new Map<string, TimedTask[]>();
  for (const task of input.shifts.flatMap(({ tasks }) => tasks)) {
    if (task.durationMin === 0) continue;
    if (!isInNoise(task, input.site.wearFromDb)) continue;
    byTask.set(task.taskId, [...(byTask.get(task.taskId) ?? []), task]);
  }
  return [...byTask].map(([taskId, tasks]) => ({
    taskId,
    name: tasks[0]?.name ?? "",
    timedIds: new Set(tasks.map(({ id }) => id)),
    minutes: tasks.reduce((sum, { durationMin }) => sum + durationMin, 0),
    held: tasks[0]?.protection ?? null,
  }));
}

const modelsOf = ({ inner, outer }: Protection): string[] =>
  outer ? [inner.modelId, outer.modelId] : [inner.modelId];

/** What the day itself knows of the single devices that are worn in it. */
const heldOnWorker = ({ shifts }: DayInput): (readonly [string, Protection])[] =>
  shifts.flatMap(({ tasks }) =>
    tasks.flatMap(({ protection }) =>
      protection && protection.outer === null
        ? [[protection.inner.modelId, protection] as const]
        : [],
    ),
  );

const wearing = (input: DayInput, protectionIn: (task: TimedTask) => Protection | null): DayInput =>
  withTasks(input, (task) => ({ ...task, protection: protectionIn(task), wornPct: 100 }));

const isPlug = ({ kind }: ProtectorData) => kind.endsWith("-plug") && kind !== "banded-plug";
const isMuff = ({ kind }: ProtectorData) => kind === "earmuff" || kind === "helmet-earmuff";

/** A plug under a muff. */
function pairsOf(
  register: readonly ProtectorData[],
): { inner: ProtectorData; outer: ProtectorData }[] {
  return register
    .filter(isPlug)
    .flatMap((inner) => register.filter(isMuff).map((outer) => ({ inner, outer })));
}
