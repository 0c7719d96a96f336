import { evaluateDay } from "./day";
import { governingReading, likenessFactor, sumDay } from "./day-sum";
import { dayUncertainty } from "./day-uncertainty";
import { type ExchangeLaw, isSameLaw, lawOf, levelFactor } from "./exchange-law";
import { creditedPeaks } from "./maximum";
import { isSameFigure, outsideCriterion } from "./outside-criterion";
import { evaluateAtEar } from "./protection/at-ear";
import { isTooDeepForOwnFit, lcMinusLaDb } from "./protection/attenuation";
import { audioLaw, withAudioAtEndDb } from "./protection/programme-audio";
import { wornShareLevelDb } from "./protection/wearing-time";
import type { SourceId } from "./sources";
import type {
  AttenuationMethod,
  Criterion,
  CriterionResult,
  DayEvaluation,
  DayInput,
  ReadingInput,
  Reason,
  RuleSetVersion,
  TaskAtEar,
  TaskLevel,
  TimedTask,
  Verdict,
  WearingLooks,
} from "./types";
import {
  type BudgetPart,
  COVERAGE_FACTOR,
  durationSensitivityDbPerMin,
  POSITION_DB,
} from "./uncertainty";
import { DayAtEarRows, type TimeAtEar } from "./working-at-ear";
import { boundedLevel, boundLines, NoiseUnderLaw } from "./working-noise";
import {
  type Bound,
  bounded,
  cited,
  column,
  date,
  difference,
  fraction,
  type Line,
  level,
  line,
  type MathPart,
  MINUTES_OVER_T0,
  minutes,
  name,
  number,
  power,
  reason,
  related,
  relationOf,
  row,
  SUM,
  scientific,
  share,
  sign,
  symbol,
  symbolColumn,
  table,
  text,
  unique,
  value,
  verdict,
  type Working,
  type WorkingDetail,
  type WorkingLine,
  type WorkingRecord,
  type WorkingRow,
  type WorkingSource,
  type WorkingStep,
  type WorkingTable,
  type WorkingText,
  type WorkingValue,
  word,
  words,
} from "./working-parts";
import {
  activeLines,
  audioSum,
  bandTable,
  boundedLine,
  methodLines,
  onRecord,
  peakLine,
  programmeLines,
} from "./working-protector";

export type {
  MathPart,
  Working,
  WorkingEquation,
  WorkingRecord,
  WorkingSource,
  WorkingStep,
  WorkingTable,
  WorkingText,
  WorkingValue,
} from "./working-parts";

import { rangeWhileWorn, whileWorn } from "./while-worn";

/**
 * The working of a day's result, built on demand from the same inputs. Texts are messages of the catalogue.
 *
 * @param evaluation the result, where it is at hand; else it is computed again.
 */
export function buildWorking(
  input: DayInput,
  governing: RuleSetVersion,
  comparison: readonly RuleSetVersion[],
  evaluation: DayEvaluation = evaluateDay(input, governing, comparison),
): Working {
  const builder = new Builder(input, governing, comparison, evaluation);
  return {
    methodVersion: evaluation.methodVersion,
    date: input.date,
    governing: {
      key: governing.key,
      version: governing.version,
      title: governing.title,
      citation: governing.citation,
    },
    lines: builder.lines(),
    steps: builder.steps(),
  };
}

type Draft = Partial<Omit<WorkingStep, "number" | "title" | "equations" | "details">> & {
  readonly title: WorkingText;
  readonly equations?: readonly Line[];
  readonly details?: readonly (Omit<WorkingDetail, "equations"> & {
    readonly equations: readonly Line[];
  })[];
};

const isOnLevel = ({ quantity }: Criterion): boolean =>
  quantity === "lex-8h" || quantity === "dose" || quantity === "table-dose";

class Builder {
  private readonly outside: Criterion;
  private readonly law: ExchangeLaw;
  private readonly tasks: readonly TimedTask[];
  private readonly names: ReadonlyMap<string, string>;
  private readonly isWorn: boolean;
  private readonly dayAtEar: DayAtEarRows;

  constructor(
    private readonly input: DayInput,
    private readonly governing: RuleSetVersion,
    private readonly comparison: readonly RuleSetVersion[],
    private readonly evaluation: DayEvaluation,
  ) {
    this.outside = outsideCriterion(governing);
    this.law = lawOf(this.outside);
    this.tasks = input.shifts.flatMap((shift) => shift.tasks);
    this.names = new Map(this.tasks.map(({ id, name }) => [id, name]));
    this.isWorn = evaluation.tasks.some(({ isWorn }) => isWorn);
    const sum = sumDay(input, this.law);
    this.dayAtEar = new DayAtEarRows(
      input,
      this.law,
      evaluateAtEar(input, governing, this.law, sum),
      evaluation.atEarBound,
    );
  }

  steps(): WorkingStep[] {
    const drafts = [
      this.noiseStep(),
      ...this.readingStep(),
      ...this.uncertaintyStep(),
      this.verdictStep("without-protection"),
      ...(this.isWorn ? [this.protectorStep(), this.dayAtEarStep()] : []),
      ...this.atEarVerdictStep(),
      ...this.comparisonStep(),
    ];
    let equationNumber = 0;
    const numbered = ({ label, parts }: Line) => ({ number: ++equationNumber, label, parts });
    return drafts.map((draft, index) => ({
      number: index + 1,
      title: draft.title,
      tables: draft.tables ?? [],
      equations: (draft.equations ?? []).map(numbered),
      details: (draft.details ?? []).map(({ equations, ...detail }) => ({
        ...detail,
        equations: equations.map(numbered),
      })),
      shares: draft.shares ?? [],
      notes: draft.notes ?? [],
      sources: draft.sources ?? [],
      records: unique(draft.records ?? []),
    }));
  }

  lines(): WorkingLine[] {
    const { evaluation } = this;
    // The criterion on the level, known or not: a peak's verdict says nothing of it.
    const atEarResults = this.resultsJudged("at-the-ear");
    const atEarResult =
      atEarResults.find((result) => isOnLevel(criterionOf(this.governing, result))) ??
      atEarResults.find(({ levelDb }) => levelDb !== null);
    const worn = whileWorn(evaluation);
    const [own, others] = this.outsideResults();
    const outsideResult = worstOf(own);
    const deciding = evaluation.tasks.find(
      ({ timedTaskId }) => timedTaskId === evaluation.decidingTaskId,
    );
    const uncertainty = this.law.isEnergy ? difference(evaluation.uncertaintyDb) : null;
    const outsideBound = evaluation.outsideBound === "exact" ? null : evaluation.outsideBound;
    const lines: WorkingLine[] = [
      {
        id: "at-the-ear",
        title: text(/*i18n*/ "At the ear"),
        level: boundedLevel(
          evaluation.counted ? evaluation.counted.atEarDb : evaluation.atEarDb,
          this.atEarBound(),
        ),
        uncertainty: this.atEarBound() === null ? uncertainty : null,
        outcome: atEarResult ? verdict(atEarResult) : null,
        remark: atEarResult ? this.remarkOn(atEarResult) : null,
      },
    ];
    if (this.isWorn) {
      lines.push({
        id: "protector",
        title: text(/*i18n*/ "Protector, while worn"),
        level: boundedLevel(worn.levelDb, worn.bound === "exact" ? null : worn.bound),
        uncertainty: null,
        outcome: evaluation.word ? { kind: "protector-word", word: evaluation.word } : null,
        remark: deciding
          ? text(/*i18n*/ "decided by {task}", { task: this.nameOf(deciding.timedTaskId) })
          : evaluation.protectorReason
            ? text(/*i18n*/ "not judged: {reason}", { reason: reason(evaluation.protectorReason) })
            : null,
      });
    }
    lines.push({
      id: "without-protection",
      title: text(/*i18n*/ "Without protection"),
      level: boundedLevel(evaluation.outsideDb, outsideBound),
      uncertainty: outsideBound === null ? uncertainty : null,
      outcome: outsideResult ? verdict(outsideResult) : null,
      remark: outsideResult ? this.remarkOn(outsideResult) : null,
    });
    for (const result of others) {
      const criterion = criterionOf(this.governing, result);
      lines.push({
        id: `criterion-${criterion.id}`,
        title: text(criterion.label),
        level: boundedLevel(result.levelDb, result.bound === "exact" ? null : result.bound),
        uncertainty: null,
        outcome: verdict(result),
        remark: this.remarkOn(result),
      });
    }
    return lines;
  }

  /**
   * Results without protection that share the figure of the head, and, each with a figure of its own, the others that
   * are over or open: of several on one quantity the highest exceeded.
   */
  private outsideResults(): [own: CriterionResult[], others: CriterionResult[]] {
    const own: CriterionResult[] = [];
    const others: CriterionResult[] = [];
    for (const result of this.resultsJudged("without-protection")) {
      const criterion = criterionOf(this.governing, result);
      if (isSameFigure(criterion, this.outside)) own.push(result);
      else if (
        (result.verdict === "over" || result.verdict === "cant-tell-yet") &&
        result.levelDb !== null
      )
        others.push(result);
    }
    const isExceededHigher = (result: CriterionResult) => {
      const criterion = criterionOf(this.governing, result);
      return others.some((other) => {
        const higher = criterionOf(this.governing, other);
        return (
          other.verdict === "over" &&
          isSameFigure(criterion, higher) &&
          higher.value > criterion.value
        );
      });
    };
    return [own, others.filter((result) => !isExceededHigher(result))];
  }

  /** The governing rule's criteria that add noise up, one of each law and bound, the one that the head shows first. */
  private laws(): { criterion: Criterion; noise: NoiseUnderLaw; title: WorkingText | null }[] {
    const { governing, outside, evaluation, input } = this;
    const summed = governing.criteria.filter(
      ({ quantity, judged }) =>
        (quantity === "dose" || quantity === "table-dose" || quantity === "lex-8h") &&
        judged === "without-protection",
    );
    const resultOf = (criterion: Criterion) =>
      evaluation.criteria.find(
        ({ ruleSetKey, criterionId }) =>
          ruleSetKey === governing.key && criterionId === criterion.id,
      )!;
    const found: Criterion[] = [];
    for (const criterion of [outside, ...summed]) {
      const { bound, levelDb, dosePct } = resultOf(criterion);
      const isOpen = levelDb === null && dosePct === null;
      const isKnown = found.some(
        (one) =>
          isSameLaw(lawOf(one), lawOf(criterion)) && (isOpen || resultOf(one).bound === bound),
      );
      if (!isKnown) found.push(criterion);
    }
    return found.map((criterion) => ({
      criterion,
      noise: new NoiseUnderLaw(input, criterion, resultOf(criterion)),
      title: found.length > 1 ? text(criterion.label) : null,
    }));
  }

  private atEarBound(): Bound | null {
    const { atEarBound } = this.evaluation;
    return atEarBound === "exact" ? null : atEarBound;
  }

  private noiseStep(): Draft {
    const parts = this.laws().map(({ noise, title, criterion }) =>
      noise.byTasks(criterion === this.outside, title),
    );
    return {
      title: text(/*i18n*/ "Noise without protection, over the day"),
      tables: parts.flatMap(({ tables }) => tables),
      equations: parts.flatMap(({ lines }) => lines),
      notes: [
        ...unique(parts.flatMap(({ notes }) => notes)),
        ...(this.input.shifts.some((shift) => likenessFactor(shift) !== 1)
          ? [
              text(
                /*i18n*/ "Time not accounted for is said to be like the rest: the tasks' minutes are scaled to the shift.",
              ),
            ]
          : []),
        ...keptLevels(this.input).map(({ task, why }) =>
          text(
            /*i18n*/ "The level of {task} counts all the same: {why}. The result no longer bears the standard's name.",
            { task: name(task), why: name(why) },
          ),
        ),
      ],
      sources: this.noiseSources(),
      records: this.noiseRecords(),
    };
  }

  private noiseSources(): WorkingSource[] {
    const { law } = this;
    if (law.isEnergy) return [{ id: "iso-9612-2009", clause: "9" }, this.ruleSource()];
    if (law.table) return [{ id: "nr-15", clause: /*i18n*/ "Annex 1" }];
    if (law.exchangeRateDb === 3) return [{ id: "niosh-98-126", clause: "1.1" }, this.ruleSource()];
    return [{ id: "osha-1910.95", clause: /*i18n*/ "App. A" }, this.ruleSource()];
  }

  private ruleSource(): WorkingSource {
    return { id: null, clause: this.outside.citation };
  }

  private noiseRecords(): WorkingRecord[] {
    const records: WorkingRecord[] = [];
    for (const shift of this.input.shifts) {
      if (shift.revisionId) records.push({ kind: "shift-revision", id: shift.revisionId });
      for (const { level: taskLevel } of shift.tasks) {
        if (taskLevel?.revisionId)
          records.push({ kind: "level-revision", id: taskLevel.revisionId });
      }
    }
    return records;
  }

  private readingStep(): Draft[] {
    const readings = this.input.shifts.flatMap((shift) =>
      shift.readings.map((reading) => ({ shift, reading })),
    );
    if (readings.length === 0) return [];
    const { law, evaluation } = this;
    const rows = readings.map(({ shift, reading }) => {
      const { settings } = reading;
      const governs = governingReading(shift, law) === reading;
      return {
        ...row(reading.id, [
          { kind: "text", text: settingsText(settings) },
          minutes(reading.durationMin),
          reading.dosePct === null ? null : ({ kind: "dose", pct: reading.dosePct } as const),
          level(reading.averageDb),
          { kind: "text", text: COVERS[reading.covers] },
          governs ? ({ kind: "text", text: text(/*i18n*/ "governs") } as const) : null,
        ]),
        isEmphasized: governs,
      };
    });
    const parts = this.laws().map(({ noise, title }) => noise.byReadings(title));
    return [
      {
        title: text(/*i18n*/ "Readings on the worker"),
        tables: [
          {
            title: null,
            columns: [
              column("settings", text(/*i18n*/ "Settings"), false),
              column("minutes", text(/*i18n*/ "Run time, minutes"), true),
              column("dose", text(/*i18n*/ "Dose"), true),
              column("average", text(/*i18n*/ "Average, dB"), true),
              column("covers", text(/*i18n*/ "Covers"), false),
              column("role", text(/*i18n*/ "Part in the result"), false),
            ],
            rows,
          },
          ...parts.flatMap(({ tables }) => tables),
        ],
        equations: parts.flatMap(({ lines }) => lines),
        notes: [
          ...unique(parts.flatMap(({ notes }) => notes)),
          ...(evaluation.tasksDb !== null && evaluation.readingGapDb !== null
            ? [
                text(/*i18n*/ "By tasks {tasks}: the reading is {gap} away.", {
                  tasks: level(evaluation.tasksDb),
                  gap: difference(evaluation.readingGapDb),
                }),
              ]
            : []),
          ...unique(readings.flatMap(({ reading }) => leftOutNote(reading))),
          ...(evaluation.isProjected
            ? [
                text(
                  /*i18n*/ "Projected: the officer says that the rest of the shift was like the part measured.",
                ),
              ]
            : []),
          ...keptReadings(readings.map(({ reading }) => reading)).map((why) =>
            text(
              /*i18n*/ "A reading outside its field-check tolerance is kept: {why}. The result no longer bears the standard's name.",
              { why: name(why) },
            ),
          ),
        ],
        sources: [this.ruleSource()],
        records: readings.flatMap(({ reading }) => [
          { kind: "run", id: reading.runId } as const,
          { kind: "reading", id: reading.id } as const,
        ]),
      },
    ];
  }

  private uncertaintyStep(): Draft[] {
    const hasEnergy = [this.governing, ...this.comparison].some(({ criteria }) =>
      criteria.some(({ quantity, usesUncertainty }) => quantity === "lex-8h" && usesUncertainty),
    );
    if (!hasEnergy) return [];
    const { budget, parts, reason: why } = dayUncertainty(this.input);
    const sources: WorkingSource[] = [{ id: "iso-9612-2009", clause: /*i18n*/ "Annex C" }];
    const title = text(/*i18n*/ "How sure that is");
    if (why !== null) {
      return [
        {
          title,
          sources,
          notes: [
            text(/*i18n*/ "No uncertainty can be stated: {reason}.", { reason: reason(why) }),
          ],
        },
      ];
    }
    const total = budget.combinedDb ** 2;
    const shares = [
      { label: text(/*i18n*/ "Instrument"), pct: (100 * budget.instrumentDb2) / total },
      { label: text(/*i18n*/ "Microphone position"), pct: (100 * budget.positionDb2) / total },
      { label: text(/*i18n*/ "Sampling"), pct: (100 * budget.samplingDb2) / total },
      { label: text(/*i18n*/ "Duration"), pct: (100 * budget.durationDb2) / total },
    ];
    return [
      {
        title,
        sources,
        shares,
        equations: [
          line([
            symbol("u"),
            sign("= √"),
            SUM,
            symbol("u", "m"),
            sign("²"),
            sign("="),
            sign("√ ("),
            value(number(total)),
            sign(")"),
            sign("="),
            value(number(budget.combinedDb), true),
          ]),
          line([
            symbol("U"),
            sign("="),
            value(number(COVERAGE_FACTOR)),
            sign("·"),
            symbol("u"),
            sign("="),
            value(number(COVERAGE_FACTOR)),
            sign("·"),
            value(number(budget.combinedDb)),
            sign("="),
            value(difference(budget.expandedDb), true),
          ]),
        ],
        tables: [this.uncertaintyTable(parts, total)],
        notes: [
          ...(parts.some(({ samplingDb }) => samplingDb === null)
            ? [text(/*i18n*/ "A reading of one day carries instrument and position only.")]
            : []),
          ...(this.input.site.usesUncertainty
            ? []
            : [text(/*i18n*/ "This site does not use the uncertainty in verdicts.")]),
        ],
      },
    ];
  }

  /** c1a²(u1a² + u2² + u3²) + (c1b·u1b)² of each part. */
  private uncertaintyTable(parts: readonly BudgetPart[], total: number): WorkingTable {
    const taskNames = new Map(this.tasks.map((task) => [task.taskId, task.name]));
    const hasDuration = parts.some(({ durationUncertaintyMin }) => durationUncertaintyMin > 0);
    const rows = parts.map((part, index) => {
      const durationDb =
        part.durationUncertaintyMin > 0
          ? durationSensitivityDbPerMin(part.energyShare, part.durationMin) *
            part.durationUncertaintyMin
          : 0;
      const own = (part.samplingDb ?? 0) ** 2 + part.instrumentDb ** 2 + POSITION_DB ** 2;
      return row(part.taskId === null ? `reading-${index}` : `${part.taskId}-${index}`, [
        part.taskId === null
          ? words(text(/*i18n*/ "Reading of one day"))
          : name(taskNames.get(part.taskId) ?? part.taskId),
        number(part.energyShare),
        part.samplingDb === null ? null : number(part.samplingDb),
        number(part.instrumentDb),
        number(POSITION_DB),
        ...(hasDuration ? [number(durationDb)] : []),
        number(part.energyShare ** 2 * own + durationDb ** 2),
      ]);
    });
    return table(
      [
        column("part", text(/*i18n*/ "Task"), false),
        symbolColumn("sensitivity", text(/*i18n*/ "Share of the energy"), [symbol("c", "1a")]),
        symbolColumn("sampling", text(/*i18n*/ "Sampling, dB"), [symbol("u", "1a")]),
        symbolColumn("instrument", text(/*i18n*/ "Instrument, dB"), [symbol("u", "2")]),
        symbolColumn("position", text(/*i18n*/ "Position, dB"), [symbol("u", "3")]),
        ...(hasDuration
          ? [
              symbolColumn("duration", text(/*i18n*/ "Duration, dB"), [
                symbol("c", "1b"),
                symbol("u", "1b"),
              ]),
            ]
          : []),
        symbolColumn("square", null, [symbol("u", "m"), sign("²")]),
      ],
      [
        ...rows,
        {
          ...row("sum", [
            words(text(/*i18n*/ "Sum")),
            null,
            null,
            null,
            null,
            ...(hasDuration ? [null] : []),
            number(total),
          ]),
          isTotal: true,
        },
      ],
    );
  }

  private resultsJudged(judged: Criterion["judged"]): CriterionResult[] {
    return this.evaluation.criteria.filter(
      (result) => result.ruleSetKey === this.governing.key && result.judged === judged,
    );
  }

  private verdictStep(judged: Criterion["judged"]): Draft {
    const results = this.resultsJudged(judged);
    const equations = judged === "at-the-ear" ? this.peakLines() : [];
    return {
      title:
        judged === "at-the-ear"
          ? text(/*i18n*/ "Verdict at the ear")
          : text(/*i18n*/ "Verdict without protection"),
      tables: [this.verdictTable(results)],
      equations,
      notes: (judged === "at-the-ear" ? [] : this.governing.notStated).map((what) =>
        text(/*i18n*/ "Not stated by the rule: {what}.", {
          what: { kind: "text", text: text(what) },
        }),
      ),
      sources: [
        ...(equations.length > 0 ? [{ id: "en-458", clause: /*i18n*/ "Annex B" } as const] : []),
        ...unique(
          results.map((result) => ({
            id: null,
            clause: criterionOf(this.governing, result).citation,
          })),
        ),
      ],
    };
  }

  /** Peaks at the ear from which a protector takes something off, by the type of the impulse noise. */
  private peakLines(): Line[] {
    const { governing, input } = this;
    const criterion = governing.criteria.find(
      ({ quantity, judged }) => quantity === "peak" && judged === "at-the-ear",
    );
    if (!criterion) return [];
    return creditedPeaks(input, criterion, governing.protection).map((peak) =>
      line(
        peakLine(peak),
        peak.task ? name(peak.task.name) : words(text(/*i18n*/ "Reading over the shift")),
      ),
    );
  }

  private verdictTable(results: readonly CriterionResult[]): WorkingTable {
    return {
      title: null,
      columns: [
        column("criterion", text(/*i18n*/ "Criterion"), false),
        column("test", text(/*i18n*/ "Test, unrounded"), false),
        column("verdict", text(/*i18n*/ "Verdict"), false),
        column("duties", text(/*i18n*/ "Asks the employer for"), false),
      ],
      rows: results.map((result) => {
        const criterion = criterionOf(this.governing, result);
        return row(result.criterionId, [
          { kind: "text", text: text(criterion.label) },
          testOf(result, criterion),
          verdict(result),
          result.verdict === "over"
            ? {
                kind: "list",
                values: criterion.duties.map(
                  (duty) => ({ kind: "text", text: text(duty) }) as const,
                ),
              }
            : null,
        ]);
      }),
    };
  }

  private protectorStep(): Draft {
    const hasActive = this.evaluation.tasks.some(({ wornActiveDb }) => wornActiveDb !== null);
    // Elsewhere only the whole shift has a word, which stands at the head.
    const hasWords = this.governing.protection.adequacy === "en-458";
    const columns = [
      column("task", text(/*i18n*/ "Task"), false),
      column("device", text(/*i18n*/ "Device"), false),
      column("outside", text(/*i18n*/ "Outside"), true),
      column("worn", text(/*i18n*/ "Worn"), true),
      column(
        "while-worn",
        hasActive ? text(/*i18n*/ "While worn, off") : text(/*i18n*/ "While worn"),
        true,
      ),
      column("method", text(/*i18n*/ "Method"), false),
      ...(hasWords ? [column("word", text(/*i18n*/ "Protector"), false)] : []),
      ...(hasActive ? [column("while-worn-on", text(/*i18n*/ "While worn, on"), true)] : []),
      ...(hasActive && hasWords ? [column("word-on", text(/*i18n*/ "Protector, on"), false)] : []),
      column(
        "in-task",
        hasActive ? text(/*i18n*/ "In the task, off") : text(/*i18n*/ "In the task"),
        true,
      ),
      ...(this.counted
        ? [
            column("in-task-on", text(/*i18n*/ "In the task, on"), true),
            column("counts", text(/*i18n*/ "Counts"), false),
          ]
        : []),
    ];
    const rows = this.evaluation.tasks.map((task) => {
      const of = this.asCounted(task);
      return {
        ...row(task.timedTaskId, [
          this.nameOf(task.timedTaskId),
          task.isWorn ? this.deviceOf(task.timedTaskId) : words(NOT_WORN),
          level(task.outsideDb),
          task.isWorn ? wornCell(task.wornPct) : share(0),
          boundedLevel(of.wornDb, of.bound),
          task.governingMethod
            ? ({ kind: "method", method: task.governingMethod } as const)
            : task.reason
              ? reason(task.reason)
              : null,
          ...(hasWords ? [word(task.word)] : []),
          ...(hasActive ? [boundedLevel(of.wornActiveDb, of.bound)] : []),
          ...(hasActive && hasWords ? [word(task.wordActive)] : []),
          this.countsNothing(task.timedTaskId)
            ? words(COUNTS_NOTHING)
            : boundedLevel(of.inTaskDb, of.bound),
          ...(this.counted
            ? [
                boundedLevel(of.inTaskActiveDb, of.bound),
                task.wornActiveDb === null
                  ? null
                  : words(this.isCredited(task.timedTaskId) ? COUNTS_ON : COUNTS_OFF),
              ]
            : []),
        ]),
        isEmphasized: task.timedTaskId === this.evaluation.decidingTaskId,
      };
    });
    // Those of the others stand at their rows, with the day by each method.
    const methods = new Set(
      this.evaluation.tasks.flatMap(({ governingMethod }) => governingMethod ?? []),
    );
    return {
      title: text(/*i18n*/ "What the protector does, while worn"),
      tables: [table(columns, rows)],
      equations: this.methodEquations(),
      details: this.protectorDetails(),
      notes: [...this.scaleNotes(), ...this.deepNoiseNotes(), ...this.openNotes()],
      sources: [
        ...unique([...methods].flatMap((method) => this.methodSources(method))),
        ...(this.governing.protection.adequacy === "en-458"
          ? [{ id: "en-458", clause: /*i18n*/ "Annex A" } as const]
          : []),
      ],
      records: this.protectorRecords(),
    };
  }

  private methodSources(method: AttenuationMethod): WorkingSource[] {
    const { derating } = this.governing.protection;
    const isDouble = this.tasks.some(({ protection }) => protection?.outer);
    if (method !== "us-single-number") return [METHOD_SOURCES[method]];
    return [
      METHOD_SOURCES[method],
      ...(derating === "by-type" ? [{ id: "niosh-98-126", clause: "6" } as const] : []),
      ...(derating === "half" || isDouble ? [{ id: "osha-otm", clause: "III:5" } as const] : []),
    ];
  }

  /** Tasks in which a protector counts as worn, with what is known of them. */
  private wornTasks() {
    return this.evaluation.tasks.flatMap((atEar) => {
      const task = this.tasks.find(({ id }) => id === atEar.timedTaskId);
      if (!atEar.isWorn || !task?.level || !task.protection) return [];
      return [{ atEar, task, level: task.level, protection: task.protection }];
    });
  }

  private methodEquations(): Line[] {
    const rule = this.governing.protection;
    return this.wornTasks().flatMap(({ atEar, task, level: of, protection }) => {
      const governing = atEar.methods.find(({ method }) => method === atEar.governingMethod);
      if (!governing) return [];
      const label = name(task.name);
      const { usedDb, bound, ...counted } = this.asCounted(atEar);
      const atBound = (parts: readonly MathPart[]): Line =>
        line(isAtEar(parts) ? related(parts, bound) : parts, label);
      const byMethod = methodLines(of, protection, rule, governing);
      const byActive = activeLines(of, protection, rule, counted);
      const programme = programmeLines(counted, this.audioFactor(of, bound)).map(atBound);
      // Only the sum with the programme is a bound where the level itself is exact.
      if (bound === null || usedDb === of.levelDb) {
        const lines = [...byMethod, ...byActive];
        const isExact = !this.dayAtEar.isBounded(of);
        return [
          ...lines.map((parts) => (isExact ? line(parts, label) : atBound(parts))),
          ...programme,
        ];
      }
      const onTop = [...byActive.map(atBound), ...programme];
      // Where nothing bounds the level there is only what the method makes of the one on record.
      if (usedDb === null) return byMethod.map((parts) => line(onRecord(parts), label));
      return [
        ...byMethod.map((parts) => line(onRecord(parts), label)),
        ...boundLines([{ ...of, of: label }], this.dayAtEar.law, sideOf(bound)),
        atBound(boundedLine(of.levelDb, governing.atEarDb!, usedDb, counted)),
        ...onTop,
      ];
    });
  }

  /** The k of a programme's sum with the noise: 10 by energy, the rule's where only weights added bound it. */
  private audioFactor(of: TaskLevel, bound: Bound | null): MathPart {
    const { isUpperByEnergy } = audioLaw(0, of, this.dayAtEar.law, false);
    return bound !== "upper" || isUpperByEnergy ? sign("10") : this.factorPart();
  }

  /** A task at the ear by the level that counts: where that is a bound, as much off it as off the level on record. */
  private asCounted(
    atEar: TaskAtEar,
  ): TaskAtEar & { readonly usedDb: number | null; readonly bound: Bound | null } {
    const of = this.tasks.find(({ id }) => id === atEar.timedTaskId)?.level ?? null;
    if (atEar.wornRangeDb && of) return this.atBoundOf(atEar, atEar.wornRangeDb, of);
    const bare = atEar.isWorn
      ? undefined
      : this.dayAtEar.rows.find(({ id }) => id === atEar.timedTaskId);
    return bare?.bareBound
      ? { ...atEar, inTaskDb: bare.offDb, usedDb: bare.bareDb, bound: bare.bareBound }
      : { ...atEar, usedDb: atEar.outsideDb, bound: null };
  }

  private atBoundOf(
    atEar: TaskAtEar,
    range: NonNullable<TaskAtEar["wornRangeDb"]>,
    of: TaskLevel,
  ): TaskAtEar & { readonly usedDb: number | null; readonly bound: Bound } {
    const { law, factor } = this.dayAtEar;
    const { levelDb: wornDb, bound } = rangeWhileWorn(range, this.evaluation.atEarBound);
    const end = sideOf(bound);
    const usedDb = this.dayAtEar.countedDb(of, end);
    const moved = (db: number | null) =>
      db === null || usedDb === null ? null : db + usedDb - of.levelDb;
    const noiseDb = moved(atEar.audio?.noiseDb ?? null);
    const noiseActiveDb = moved(atEar.audio?.noiseActiveDb ?? null);
    const audio =
      atEar.audio && noiseDb !== null ? { ...atEar.audio, noiseDb, noiseActiveDb } : null;
    const wornActiveDb = audio
      ? noiseActiveDb === null
        ? null
        : withAudioAtEndDb(noiseActiveDb, audioLaw(audio.levelDb, of, law, false), end)
      : moved(atEar.wornActiveDb);
    const inTask = (whileWornDb: number | null): number | null =>
      whileWornDb === null || usedDb === null || atEar.wornPct === null
        ? null
        : wornShareLevelDb(usedDb, whileWornDb, atEar.wornPct, factor);
    return {
      ...atEar,
      wornDb,
      wornActiveDb,
      inTaskDb: inTask(wornDb),
      inTaskActiveDb: inTask(wornActiveDb),
      ...(audio && { audio }),
      usedDb,
      bound,
    };
  }

  /** What is worn in a task: one, or both of a pair. */
  private deviceOf(timedTaskId: string): WorkingValue | null {
    const protection = this.tasks.find(({ id }) => id === timedTaskId)?.protection;
    if (!protection) return null;
    const inner = name(protection.inner.name);
    return protection.outer
      ? words(text(/*i18n*/ "{inner} under {outer}", { inner, outer: name(protection.outer.name) }))
      : inner;
  }

  /** By band, and by the methods that do not govern. */
  private protectorDetails(): NonNullable<Draft["details"]> {
    const rule = this.governing.protection;
    return this.wornTasks().flatMap(({ atEar, task, level: of, protection }) => {
      const bands = bandTable(of, protection, rule, atEar);
      const others = atEar.methods.filter(({ method }) => method !== atEar.governingMethod);
      const isMoved = this.asCounted(atEar).usedDb !== of.levelDb;
      const equations = others.flatMap((other) =>
        methodLines(of, protection, rule, other).map((parts) =>
          line(isMoved ? onRecord(parts) : parts, { kind: "method", method: other.method }),
        ),
      );
      return [
        ...(bands
          ? [
              {
                id: `bands-${task.id}`,
                title: text(/*i18n*/ "By band: {task}", { task: name(task.name) }),
                tables: [bands],
                equations: [],
              },
            ]
          : []),
        ...(equations.length > 0
          ? [
              {
                id: `methods-${task.id}`,
                title: text(/*i18n*/ "By other methods: {task}", { task: name(task.name) }),
                tables: [],
                equations,
              },
            ]
          : []),
      ];
    });
  }

  /** Where an own fit would replace the label, were the noise not so deep. */
  private deepNoiseNotes(): WorkingText[] {
    const rule = this.governing.protection;
    return this.wornTasks().flatMap(({ task, level: of, protection }) => {
      const lcLaDb = lcMinusLaDb(of);
      if (protection.ownFitDb === null || protection.outer !== null || lcLaDb === null) return [];
      if (!isTooDeepForOwnFit(rule, lcLaDb)) return [];
      return [
        text(
          /*i18n*/ "{task} has LC − LA {difference}: in so deep a noise less comes off than an own fit says, which is rated in pink noise. There it can only lower the label.",
          { task: name(task.name), difference: level(lcLaDb) },
        ),
      ];
    });
  }

  private scaleNotes(): WorkingText[] {
    const { adequacy, targetDb } = this.governing.protection;
    if (targetDb === null) return [];
    const actionDb = Math.min(targetDb, this.input.personalTargetDb ?? targetDb);
    // Why it is set is for officers alone.
    const own =
      actionDb < targetDb
        ? [
            text(
              /*i18n*/ "A stricter target is set for this worker: {target}, where the rule asks for {value}.",
              { target: level(actionDb), value: level(targetDb) },
            ),
          ]
        : [];
    if (adequacy === "appendix-b") {
      return [
        text(
          /*i18n*/ "Enough where the shift's TWA under the protector does not exceed {target}.",
          { target: level(actionDb) },
        ),
        ...own,
        ...this.boundNotes(actionDb),
      ];
    }
    if (adequacy !== "en-458") return [];
    return [
      text(
        /*i18n*/ "Against the action value {action}: over {action} too little, {five} to {action} just enough, {ten} to {five} good, {fifteen} to {ten} on the strong side, under {fifteen} too much.",
        {
          action: level(actionDb),
          five: level(actionDb - 5),
          ten: level(actionDb - 10),
          fifteen: level(actionDb - 15),
        },
      ),
      ...own,
    ];
  }

  /** What a bound of the level at the ear proves of the protector. */
  private boundNotes(targetDb: number): WorkingText[] {
    const { atEarBound, protectorReason } = this.evaluation;
    if (atEarBound === "exact") return [];
    const isOpen = protectorReason === "only-upper-bound" || protectorReason === "only-lower-bound";
    return [
      text(
        /*i18n*/ "The level is only bounded: enough is proved by an upper bound within {target}, too little by a lower bound past it.",
        { target: level(targetDb) },
      ),
      ...(isOpen && this.outside.thresholdDb !== null
        ? [
            text(
              /*i18n*/ "Between them it can’t be told yet; an average with threshold {value} would settle it.",
              { value: level(this.outside.thresholdDb) },
            ),
          ]
        : []),
    ];
  }

  private openNotes(): WorkingText[] {
    const notes: WorkingText[] = [];
    for (const { timedTaskId, methods, reason: why, isWorn } of this.evaluation.tasks) {
      if (!isWorn) continue;
      if (why === "saturated") {
        notes.push(
          text(/*i18n*/ "In {task} the active part saturates and gets no credit.", {
            task: this.nameOf(timedTaskId),
          }),
        );
      }
      if (methods.some(({ wasClamped }) => wasClamped)) {
        notes.push(
          text(
            /*i18n*/ "In {task} a method would have raised the level: the bare level stands instead.",
            { task: this.nameOf(timedTaskId) },
          ),
        );
      }
      if (why === "wearing-unknown") {
        notes.push(
          text(
            /*i18n*/ "In {task} the wearing time is not known: levels are those of wearing it all the time.",
            { task: this.nameOf(timedTaskId) },
          ),
        );
      }
    }
    if (this.tasks.some(({ wornIsShiftWide, protection }) => wornIsShiftWide && protection)) {
      notes.push(
        text(/*i18n*/ "A wearing time of the whole shift stands in for those of its tasks."),
      );
    }
    return notes;
  }

  private countsNothing(timedTaskId: string): boolean {
    return this.dayAtEar.rows.some((one) => one.id === timedTaskId && isNothing(one));
  }

  private protectorRecords(): WorkingRecord[] {
    const records: WorkingRecord[] = [];
    for (const { protection } of this.tasks) {
      if (!protection) continue;
      if (protection.assignmentId)
        records.push({ kind: "assignment", id: protection.assignmentId });
      for (const data of [protection.inner, protection.outer]) {
        if (data?.revisionId) records.push({ kind: "protector-revision", id: data.revisionId });
      }
    }
    return records;
  }

  private dayAtEarStep(): Draft {
    const { evaluation } = this;
    const on = [
      [text(/*i18n*/ "Active part on all the time"), evaluation.atEarActiveDb],
      [
        text(/*i18n*/ "As worked, on while the battery lasts"),
        this.countsAsWorked ? null : evaluation.atEarAsWorkedDb,
      ],
    ] as const;
    const methodRows = this.dayByMethod();
    const { counted } = this;
    return {
      title: text(/*i18n*/ "The day at the ear, wearing time included"),
      equations: evaluation.atEarDb === null ? [] : this.dayAtEarLines(),
      tables: [
        ...(evaluation.atEarDb === null ? [] : [this.dayAtEarTable()]),
        {
          title: null,
          columns: [
            column("method", text(/*i18n*/ "Method"), false),
            column(
              "day",
              evaluation.atEarActiveDb === null
                ? text(/*i18n*/ "Day at the ear")
                : text(/*i18n*/ "Day at the ear, off"),
              true,
            ),
            column("source", text(/*i18n*/ "Source"), false),
            column("remark", null, false),
          ],
          rows: [
            ...methodRows,
            ...on.flatMap(([title, db], index) =>
              db === null
                ? []
                : [
                    row(`active-${index}`, [
                      words(title),
                      boundedLevel(db, this.atEarBound()),
                      null,
                      null,
                    ]),
                  ],
            ),
            ...(counted
              ? [
                  {
                    ...row("counted", [
                      words(this.countedTitle()),
                      boundedLevel(counted.atEarDb, this.atEarBound()),
                      null,
                      words(text(/*i18n*/ "counts, by the site’s policy and the check")),
                    ]),
                    isEmphasized: true,
                    isTotal: true,
                  },
                ]
              : []),
          ],
        },
        ...this.wornFromTable(),
      ],
      notes: [
        ...this.dayAtEarNotes(),
        ...(this.readingGoverns()
          ? [
              text(
                /*i18n*/ "The reading says how much noise there was; the tasks only say how it divides between them.",
              ),
            ]
          : []),
        ...(evaluation.atEarActiveDb === null ? [] : this.creditNotes()),
      ],
      sources: [
        { id: "wearing-time", clause: "" },
        ...(this.governing.protection.adequacy === "appendix-b"
          ? [{ id: "osha-1910.95", clause: /*i18n*/ "App. B" } as const]
          : []),
      ],
      records: this.tasks.flatMap(({ id, wornFrom }) =>
        this.isWornIn(id) && wornFrom?.how === "looks"
          ? wornFrom.looks.map(({ roundId }) => ({ kind: "wearing-round", id: roundId }) as const)
          : [],
      ),
    };
  }

  /** The active part counts, and the figure with it is known. */
  private get counted(): { readonly atEarDb: number } | null {
    const atEarDb = this.evaluation.counted?.atEarDb ?? null;
    return atEarDb === null ? null : { atEarDb };
  }

  private isCredited(timedTaskId: string): boolean {
    return this.dayAtEar.rows.some((one) => one.id === timedTaskId && one.isCredited);
  }

  private isWornIn(timedTaskId: string): boolean {
    return this.evaluation.tasks.some((one) => one.timedTaskId === timedTaskId && one.isWorn);
  }

  /** What counts is the day as worked, and is shown once. */
  private get countsAsWorked(): boolean {
    return (
      this.counted !== null &&
      this.evaluation.atEarAsWorkedDb !== null &&
      this.dayAtEar.rows.every(({ wornOnDb, isCredited }) => wornOnDb === null || isCredited)
    );
  }

  private countedTitle(): WorkingText {
    return this.countsAsWorked
      ? text(/*i18n*/ "What counts: as worked, on while the battery lasts")
      : text(/*i18n*/ "What counts: as worked where the active part is credited, else off");
  }

  /** On what the limit is judged, and by whose word. */
  private creditNotes(): WorkingText[] {
    const { evaluation, input, counted } = this;
    if (!input.site.creditsActivePart)
      return [
        text(
          /*i18n*/ "The limit is judged with the active part off: the site’s policy does not credit it.",
        ),
      ];
    if (!counted || evaluation.atEarDb === null)
      return [
        text(
          /*i18n*/ "The limit is judged with the active part off: the site’s policy credits it only after a passed check on this worker, and none is on record.",
        ),
      ];
    const figures = { counted: level(counted.atEarDb), off: level(evaluation.atEarDb) };
    const checkedOn = this.tasks
      .flatMap(({ id, protection }) =>
        this.isCredited(id) ? (protection?.activeCheckedOn ?? []) : [],
      )
      .sort()
      .at(-1);
    const { settingsFrom } = input.site;
    return [
      checkedOn && settingsFrom
        ? text(
            /*i18n*/ "The site’s policy, in force from {from}, credits an active part that passed its check on the worker, and this one passed on {checked}: the limit is judged at {counted}. With the active part off it would be {off}.",
            { from: date(settingsFrom), checked: date(checkedOn), ...figures },
          )
        : text(
            /*i18n*/ "The site’s policy credits an active part that passed its check on the worker, and this one passed: the limit is judged at {counted}. With the active part off it would be {off}.",
            figures,
          ),
    ];
  }

  /** Where each share worn comes from; nothing where an old result does not say. */
  private wornFromTable(): WorkingTable[] {
    const rows = this.tasks.flatMap((task) => {
      if (!this.isWornIn(task.id)) return [];
      const from = wornFromCell(task);
      return from ? [row(task.id, [name(task.name), wornCell(task.wornPct), from])] : [];
    });
    if (rows.length === 0) return [];
    return [
      table(
        [
          column("task", text(/*i18n*/ "Task"), false),
          column("worn", text(/*i18n*/ "Worn"), true),
          column("from", text(/*i18n*/ "Where the share comes from"), false),
        ],
        rows,
        text(/*i18n*/ "How long it was worn"),
      ),
    ];
  }

  private dayAtEarNotes(): WorkingText[] {
    if (this.evaluation.atEarDb === null) return [];
    const { rows, bound } = this.dayAtEar;
    const isMoved = rows.some(
      ({ task, tasksDb }) =>
        task?.level && tasksDb !== null && Math.abs(task.level.levelDb - tasksDb) > 1e-9,
    );
    return [
      ...(isMoved
        ? [
            text(
              /*i18n*/ "Where a level counts by a bound of it, the protector takes as much off the bound.",
            ),
          ]
        : []),
      ...(rows.some(({ audio }) => audio !== null)
        ? [
            text(
              /*i18n*/ "Programme audio under the protector adds to what is left of the noise, by energy, for as long as it is worn.",
            ),
          ]
        : []),
      ...(rows.some(({ audio }) => audio && !audio.isByEnergy)
        ? [
            text(
              /*i18n*/ "Beside an average of this exchange rate the sum with the programme is only bounded: their weights added are the most it can be.",
            ),
          ]
        : []),
      ...(rows.some(({ bareDb, atEar }) => bareDb === null && !atEar?.isWorn)
        ? [
            text(
              /*i18n*/ "Time without a protector counts at the ear as it does without protection: below the threshold not at all.",
            ),
          ]
        : []),
      ...(bound === "upper"
        ? [text(/*i18n*/ "The level at the ear is an upper bound: the true one is no higher.")]
        : []),
      ...(bound === "lower"
        ? [text(/*i18n*/ "The level at the ear is a lower bound: the true one is no lower.")]
        : []),
    ];
  }

  private dayAtEarTable(): WorkingTable {
    const day = this.dayAtEar;
    const k = this.factorPart();
    const hasScale = day.rows.some(
      ({ scale, bareDb, tasksDb }) => scale !== 1 || bareDb !== tasksDb,
    );
    const hasActive = this.evaluation.atEarActiveDb !== null;
    const hasBattery = hasActive && this.evaluation.atEarAsWorkedDb !== null;
    const termOf = (sub: string, isAtEar: boolean): MathPart[] => [
      ...(hasScale && isAtEar ? [symbol("s"), sign("·")] : []),
      MINUTES_OVER_T0,
      sign("·"),
      power("10", [symbol("L", sub, isAtEar), sign("/"), k]),
    ];
    const columns = [
      column("task", text(/*i18n*/ "Task"), false),
      symbolColumn("minutes", text(/*i18n*/ "Minutes"), [symbol("T", "m")]),
      symbolColumn("bare", text(/*i18n*/ "Outside, dB"), [symbol("L", "m")]),
      ...(hasScale ? [symbolColumn("bare-term", null, termOf("m", false))] : []),
      column("worn", text(/*i18n*/ "Worn"), true),
      symbolColumn("in-task", text(/*i18n*/ "In the task, dB"), [symbol("L", "m", true)]),
      symbolColumn("term", null, termOf("m", true)),
      ...(hasActive
        ? [
            symbolColumn("in-task-on", text(/*i18n*/ "In the task, on, dB"), [
              symbol("L", "m,on", true),
            ]),
            symbolColumn("term-on", null, termOf("m,on", true)),
          ]
        : []),
      ...(hasBattery ? [column("as-worked", text(/*i18n*/ "As worked"), true)] : []),
    ];
    const cellsOf = (cells: Record<string, WorkingValue | null>) =>
      columns.map(({ id }) => cells[id] ?? null);
    const bareTerm = (one: TimeAtEar) => day.term({ ...one, scale: 1 }, one.tasksDb);
    const total = (of: (one: TimeAtEar) => number) =>
      scientific(day.rows.reduce((sum, one) => sum + of(one), 0));
    const rows = day.rows.map((one) =>
      row(
        one.id,
        cellsOf({
          task: one.task ? name(one.task.name) : words(text(/*i18n*/ "Quiet, as stated")),
          minutes: minutes(one.minutes),
          bare: boundedLevel(one.tasksDb, one.bareBound),
          "bare-term": scientific(bareTerm(one)),
          worn: one.atEar?.isWorn ? wornCell(one.task?.wornPct ?? null) : share(0),
          "in-task": isNothing(one) ? words(COUNTS_NOTHING) : boundedLevel(one.offDb, one.bound),
          term: scientific(day.term(one, one.offDb)),
          "in-task-on": boundedLevel(one.onDb, one.bound),
          "term-on": scientific(day.term(one, one.onDb)),
          "as-worked": scientific(day.asWorkedTerm(one) ?? 0),
        }),
      ),
    );
    const sum = row(
      "sum",
      cellsOf({
        task: words(text(/*i18n*/ "Sum")),
        minutes: minutes(day.rows.reduce((min, one) => min + one.minutes, 0)),
        "bare-term": total(bareTerm),
        term: total((one) => day.term(one, one.offDb)),
        "term-on": total((one) => day.term(one, one.onDb)),
        "as-worked": total((one) => day.asWorkedTerm(one) ?? 0),
      }),
    );
    return table(columns, [...rows, { ...sum, isTotal: true }]);
  }

  private factorPart(): MathPart {
    return this.law.isEnergy ? sign("10") : value(number(levelFactor(this.law)));
  }

  private dayAtEarLines(): Line[] {
    const { evaluation, law } = this;
    const day = this.dayAtEar;
    const k = this.factorPart();
    const asPower = (exponent: MathPart): MathPart => power("10", [exponent, sign("/"), k]);
    const wornParts = day.rows.flatMap((one): Line[] => {
      if (one.bareDb === null || one.worn === 1 || one.worn === 0 || !one.task) return [];
      const mix = (whileWornDb: number, resultDb: number, sub: string): Line =>
        line(
          [
            symbol("L", sub, true),
            sign(relationOf(one.bound)),
            k,
            sign("lg ("),
            symbol("f"),
            sign("·"),
            asPower(symbol("L", `A,${sub}`, true)),
            sign("+ (1 −"),
            symbol("f"),
            sign(") ·"),
            asPower(symbol("L", "m")),
            sign(")"),
            sign("="),
            k,
            sign("lg ("),
            value(number(one.worn)),
            sign("·"),
            asPower(value(level(whileWornDb))),
            sign("+"),
            value(number(1 - one.worn)),
            sign("·"),
            asPower(value(level(one.bareDb!))),
            sign(")"),
            sign("="),
            value(level(resultDb), true),
          ],
          name(one.task!.name),
        );
      const lines = one.wornDb === null ? [] : [mix(one.wornDb, one.offDb!, "m")];
      if (one.wornOnDb !== null) lines.push(mix(one.wornOnDb, one.onDb!, "m,on"));
      return lines;
    });
    const audioParts = day.rows.flatMap((one) => this.audioLines(one));
    const isSeveral = day.shifts.length > 1;
    const shiftParts = day.shifts.flatMap((shift, index): Line[] => {
      const label = isSeveral
        ? words(text(/*i18n*/ "Shift {number}", { number: number(index + 1) }))
        : null;
      const lines: Line[] = [];
      if (shift.readingSum !== null && shift.tasksSum !== null) {
        const readingMean = shift.readingSum / law.referenceMin;
        const tasksMean = shift.tasksSum / law.referenceMin;
        lines.push(
          line(
            [
              symbol("s"),
              sign("="),
              fraction([value(scientific(readingMean))], [value(scientific(tasksMean))]),
              sign("="),
              value(number(readingMean / tasksMean), true),
            ],
            label,
          ),
        );
      }
      if (evaluation.atEarAsWorkedDb !== null && shift.powered !== null && shift.powered < 1) {
        lines.push(
          line(
            [
              symbol("p"),
              sign("="),
              fraction([value(minutes(shift.batteryMin!))], [value(minutes(shift.activeWornMin))]),
              sign("="),
              value(number(shift.powered), true),
            ],
            label,
          ),
        );
      }
      return lines;
    });
    const dayLine = (sum: number, levelDb: number, label: WorkingValue | null): Line =>
      line(
        [
          symbol("L", law.isEnergy ? "EX,8h" : "TWA", true),
          sign(relationOf(day.bound)),
          k,
          sign("lg"),
          SUM,
          ...(day.rows.some(({ scale }) => scale !== 1) ? [symbol("s"), sign("·")] : []),
          MINUTES_OVER_T0,
          sign("·"),
          asPower(symbol("L", "m", true)),
          sign("="),
          k,
          sign("lg ("),
          value(scientific(sum)),
          sign(")"),
          sign("="),
          value(level(levelDb), true),
        ],
        label,
      );
    const total = (of: (one: TimeAtEar) => number) =>
      day.rows.reduce((sum, one) => sum + of(one), 0);
    const { atEarActiveDb, atEarAsWorkedDb } = evaluation;
    const { counted } = this;
    return [
      ...audioParts,
      ...wornParts,
      ...shiftParts,
      ...(atEarActiveDb === null
        ? []
        : [
            dayLine(
              total((one) => day.term(one, one.onDb)),
              atEarActiveDb,
              words(text(/*i18n*/ "Active part on all the time")),
            ),
          ]),
      ...(atEarAsWorkedDb === null || this.countsAsWorked
        ? []
        : [
            dayLine(
              total((one) => day.asWorkedTerm(one) ?? 0),
              atEarAsWorkedDb,
              words(text(/*i18n*/ "As worked, on while the battery lasts")),
            ),
          ]),
      dayLine(
        total((one) => day.term(one, one.offDb)),
        evaluation.atEarDb!,
        atEarActiveDb === null ? null : words(text(/*i18n*/ "Active part off")),
      ),
      ...(counted
        ? [
            dayLine(
              total((one) =>
                one.isCredited
                  ? (day.asWorkedTerm(one) ?? day.term(one, one.offDb))
                  : day.term(one, one.offDb),
              ),
              counted.atEarDb,
              words(this.countedTitle()),
            ),
          ]
        : []),
    ];
  }

  /** A programme added to what is left of the noise in one row, with the reading's factor put into the noise before. */
  private audioLines(one: TimeAtEar): Line[] {
    const { audio, task, bareDb, tasksDb } = one;
    if (audio === null || !task) return [];
    const label = name(task.name);
    const k = this.factorPart();
    const ofReading = one.bareDb !== null && tasksDb !== null && bareDb !== tasksDb;
    const lines: Line[] = [];
    if (ofReading) {
      const shift = this.dayAtEar.shifts[one.shiftIndex];
      const scale =
        shift?.readingSum != null && shift.tasksSum ? shift.readingSum / shift.tasksSum : 1;
      lines.push(
        line(
          [
            symbol("L", "m"),
            sign("="),
            symbol("L", "task"),
            sign("+"),
            k,
            sign("lg ("),
            symbol("s"),
            sign(")"),
            sign("="),
            value(level(tasksDb)),
            sign("+"),
            k,
            sign("lg ("),
            value(number(scale)),
            sign(")"),
            sign("="),
            value(level(one.bareDb!), true),
          ],
          label,
        ),
      );
    }
    const by = audio.isByEnergy ? sign("10") : k;
    const add = (noiseDb: number | null, wornDb: number | null, sub: string): void => {
      if (noiseDb === null || wornDb === null) return;
      lines.push(
        line(related(audioSum(noiseDb, audio.levelDb, wornDb, sub, by), one.bound), label),
      );
    };
    add(audio.noiseDb, one.wornDb, "A,m");
    add(audio.noiseOnDb, one.wornOnDb, "A,m,on");
    return lines;
  }

  private readingGoverns(): boolean {
    return this.input.shifts.some((shift) => governingReading(shift, this.law) !== undefined);
  }

  /** The whole day by each method alone, protectors on where they are worn; null where a task lacks it. */
  private dayByMethod(): WorkingRow[] {
    const { evaluation } = this;
    const methods = [
      ...new Set(evaluation.tasks.flatMap((task) => task.methods.map(({ method }) => method))),
    ];
    const governing = new Set(
      evaluation.tasks.flatMap(({ governingMethod }) => governingMethod ?? []),
    );
    const isSole = governing.size === 1;
    // With an active part credited another figure is the day's.
    const isResult = this.counted === null;
    return methods.map((method) => {
      const why = this.whyNotByMethod(method);
      const db = why || evaluation.atEarDb === null ? null : this.dayAtEar.byMethod(method);
      const governs = governing.has(method);
      return {
        ...row(method, [
          { kind: "method", method },
          boundedLevel(isSole && governs ? evaluation.atEarDb : db, this.atEarBound()),
          cited(this.methodSources(method)),
          governs
            ? { kind: "text", text: text(/*i18n*/ "governs at this site") }
            : why
              ? {
                  kind: "text",
                  text: text(/*i18n*/ "not assessed in {task}: {reason}", {
                    task: why.task,
                    reason: reason(why.reason),
                  }),
                }
              : null,
        ]),
        isEmphasized: governs && isResult,
      };
    });
  }

  private whyNotByMethod(method: AttenuationMethod): { task: WorkingValue; reason: Reason } | null {
    for (const task of this.evaluation.tasks) {
      if (!task.isWorn) continue;
      const result = task.methods.find((one) => one.method === method);
      if (result?.atEarDb != null) continue;
      return {
        task: this.nameOf(task.timedTaskId),
        reason: result?.reason ?? "no-attenuation-data",
      };
    }
    return null;
  }

  private atEarVerdictStep(): Draft[] {
    return this.resultsJudged("at-the-ear").length === 0 ? [] : [this.verdictStep("at-the-ear")];
  }

  private comparisonStep(): Draft[] {
    const others = this.comparison.filter(({ key }) => key !== this.governing.key);
    if (others.length === 0) return [];
    const rows = others.flatMap((ruleSet) =>
      this.evaluation.criteria
        .filter(({ ruleSetKey }) => ruleSetKey === ruleSet.key)
        .map((result) => {
          const criterion = criterionOf(ruleSet, result);
          return row(`${ruleSet.key}:${criterion.id}`, [
            { kind: "text", text: text(ruleSet.title) },
            { kind: "text", text: text(criterion.label) },
            testOf(result, criterion),
            verdict(result),
          ]);
        }),
    );
    return [
      {
        title: text(/*i18n*/ "By other rule sets, for comparison"),
        tables: [
          {
            title: null,
            columns: [
              column("rule-set", text(/*i18n*/ "Rule set"), false),
              column("criterion", text(/*i18n*/ "Criterion"), false),
              column("test", text(/*i18n*/ "Test, unrounded"), false),
              column("verdict", text(/*i18n*/ "Verdict"), false),
            ],
            rows,
          },
        ],
        sources: others.map(({ citation }) => ({ id: null, clause: citation })),
      },
    ];
  }

  private remarkOn(result: CriterionResult): WorkingText {
    const criterion = criterionOf(this.governing, result);
    const limit = {
      label: { kind: "text", text: text(criterion.label) } as const,
      value: limitValue(criterion),
    };
    return result.reason
      ? text(/*i18n*/ "{label} {value}: {reason}", { ...limit, reason: reason(result.reason) })
      : text(/*i18n*/ "{label} {value}", limit);
  }

  private nameOf(timedTaskId: string): WorkingValue {
    return name(this.names.get(timedTaskId) ?? timedTaskId);
  }
}

const COUNTS_ON = text(/*i18n*/ "active part on, while the battery lasts");
const COUNTS_OFF = text(/*i18n*/ "active part off");

/** A share that nobody knows is no share: what it is taken for is said with it. */
const wornCell = (wornPct: number | null): WorkingValue | null =>
  wornPct === null
    ? words(text(/*i18n*/ "not known, taken as {share}", { share: share(100)! }))
    : share(wornPct);

/** Who said how long it was worn; null where an old result does not tell. */
function wornFromCell({ wornFrom, wornPct, wornIsShiftWide }: TimedTask): WorkingValue | null {
  if (wornPct === null)
    return words(text(/*i18n*/ "assumed: nobody said or saw how long it was worn"));
  if (!wornFrom) return null;
  if (wornFrom.how === "stated")
    return words(
      wornIsShiftWide
        ? text(/*i18n*/ "stated on the shift, one share for all of it")
        : text(/*i18n*/ "stated on the shift"),
    );
  return { kind: "list", values: wornFrom.looks.map((looks) => words(looksText(looks))) };
}

function looksText(looks: WearingLooks): WorkingText {
  const values = {
    date: date(looks.lastOn),
    count: number(looks.roundCount),
    worn: number(looks.wornCount),
    seen: number(looks.seenCount),
    share: share((100 * looks.wornCount) / looks.seenCount)!,
  };
  const isOne = looks.roundCount === 1;
  if (looks.source === "own-report")
    return isOne
      ? text(/*i18n*/ "own report of {date}: {share}", values)
      : text(/*i18n*/ "{count} own reports, the last of {date}: {share} together", values);
  return isOne
    ? text(/*i18n*/ "observation round of {date}: looks {seen}, worn at {worn}", values)
    : text(
        /*i18n*/ "{count} observation rounds, the last of {date}: looks {seen}, worn at {worn}",
        values,
      );
}

const NOT_WORN = text(/*i18n*/ "not worn");

const isAtEar = ([first]: readonly MathPart[]): boolean =>
  first?.kind === "symbol" && first.isAtEar === true;

const sideOf = (bound: Bound): "least" | "most" => (bound === "lower" ? "least" : "most");

const COUNTS_NOTHING = text(/*i18n*/ "counts nothing: under the threshold");

/** Bare time of which nothing is in the sum. */
const isNothing = ({ bareDb, atEar }: TimeAtEar): boolean => bareDb === null && !atEar?.isWorn;

const RESPONSES = {
  slow: /*i18n*/ "slow",
  fast: /*i18n*/ "fast",
  none: /*i18n*/ "no time weighting",
} as const;

const COVERS = {
  shift: text(/*i18n*/ "the shift"),
  projected: text(/*i18n*/ "a part, projected to the shift"),
  part: text(/*i18n*/ "a part"),
} as const;

/** Each method has a document: none may be without. */
const METHOD_SOURCES: Readonly<
  Record<AttenuationMethod, WorkingSource & { readonly id: SourceId }>
> = {
  "octave-band": { id: "iso-4869-2", clause: "6" },
  hml: { id: "iso-4869-2", clause: "7" },
  snr: { id: "iso-4869-2", clause: "8" },
  "us-single-number": { id: "osha-1910.95", clause: /*i18n*/ "App. B" },
  percentile: { id: "ansi-s12.68", clause: "6" },
  slc80: { id: "as-nzs-1270", clause: /*i18n*/ "App. A" },
  "own-fit": { id: "iso-guide-98-3", clause: "4.2, 5.1" },
};

/** The test a verdict rests on, with the numbers put in: level, comparator, value, and with the uncertainty. */
function testOf(result: CriterionResult, criterion: Criterion): WorkingValue | null {
  const isDose = criterion.quantity === "dose" || criterion.quantity === "table-dose";
  const amount = isDose ? result.dosePct : result.levelDb;
  if (amount === null) return result.reason ? reason(result.reason) : null;
  const shown = (number: number): WorkingValue =>
    isDose ? { kind: "dose", pct: number } : { kind: "level", db: number };
  const bound = result.bound === "exact" ? null : result.bound;
  const [past, notPast] = criterion.comparator === "exceeds" ? [">", "≤"] : ["≥", "<"];
  const isOver = result.verdict === "over";
  const limit = value(limitValue(criterion));
  const isWithin = result.reason === "within-uncertainty" && !isOver;
  // An upper bound past the limit proves nothing, and neither does a lower one short of it: each is shown as what it is.
  const isOpenUpper = result.verdict !== "under" && !isOver && result.bound === "upper";
  const parts: MathPart[] = [
    value(bounded(shown(amount), bound)),
    sign(isOver || isOpenUpper ? past : notPast),
    limit,
  ];
  const { uncertaintyDb } = result;
  if (uncertaintyDb !== null) {
    const withDb = isOver ? amount - uncertaintyDb : amount + uncertaintyDb;
    const isWithPast = isOver ? result.isClear : isWithin;
    parts.push(
      sign(","),
      value(shown(amount)),
      sign(isOver ? "−" : "+"),
      value(difference(uncertaintyDb)),
      sign("="),
      value(shown(withDb)),
      sign(isWithPast ? past : notPast),
      limit,
    );
  }
  return { kind: "math", parts };
}

function limitValue(criterion: Criterion): WorkingValue {
  const isDose = criterion.quantity === "dose" || criterion.quantity === "table-dose";
  return isDose ? { kind: "dose", pct: criterion.value } : { kind: "level", db: criterion.value };
}

function criterionOf(ruleSet: RuleSetVersion, { criterionId }: CriterionResult): Criterion {
  const criterion = ruleSet.criteria.find(({ id }) => id === criterionId);
  if (!criterion) throw new RangeError(`Rule set ${ruleSet.key} has no criterion ${criterionId}`);
  return criterion;
}

const SEVERITY: readonly Verdict[] = ["over", "cant-tell-yet", "not-assessed", "under"];

/** The result that says most: an Over by the highest value, then what is open, then Under. */
function worstOf(results: readonly CriterionResult[]): CriterionResult | undefined {
  const levels = results.filter(({ levelDb, dosePct }) => levelDb !== null || dosePct !== null);
  return levels.reduce<CriterionResult | undefined>((worst, result) => {
    if (!worst) return result;
    const order = SEVERITY.indexOf(result.verdict) - SEVERITY.indexOf(worst.verdict);
    return order < 0 || (order === 0 && result.verdict === "over") ? result : worst;
  }, undefined);
}

function settingsText(
  settings: DayInput["shifts"][number]["readings"][number]["settings"],
): WorkingText {
  const values = {
    criterion: number(settings.criterionLevelDb),
    exchange: number(settings.exchangeRateDb),
    weighting: name(settings.weighting),
    response: words(text(RESPONSES[settings.response])),
  };
  return settings.thresholdDb === null
    ? text(
        /*i18n*/ "criterion {criterion} dB, exchange {exchange} dB, no threshold, {weighting}, {response}",
        values,
      )
    : text(
        /*i18n*/ "criterion {criterion} dB, exchange {exchange} dB, threshold {threshold} dB, {weighting}, {response}",
        {
          ...values,
          threshold: number(settings.thresholdDb),
        },
      );
}

/** What becomes of the time that a reading over the shift leaves out. */
function leftOutNote({ covers, leftOut }: ReadingInput): WorkingText[] {
  if (covers === "part" || leftOut === undefined || leftOut.minutes === 0) return [];
  const values = { minutes: minutes(leftOut.minutes) };
  switch (leftOut.how) {
    case "unknown":
      return [
        text(
          /*i18n*/ "{minutes} min of the run are left out, and how it was is not known: what is kept may prove Over, never Under.",
          values,
        ),
      ];
    case "like-the-rest":
      return [
        text(
          /*i18n*/ "{minutes} min of the run are left out; the officer says that they were like the rest, and what is kept stands for them too.",
          values,
        ),
      ];
    case "quiet":
      return [
        text(
          /*i18n*/ "{minutes} min of the run are left out; the officer says that they were quiet, at {level} dB, which is added.",
          { ...values, level: level(leftOut.levelDb) },
        ),
      ];
  }
}

/** The officer's reasons for readings that count in spite of what speaks against them. */
const keptReadings = (readings: readonly ReadingInput[]): string[] => [
  ...new Set(
    readings.flatMap(({ covers, keptReason }) =>
      keptReason === null || covers === "part" ? [] : [keptReason],
    ),
  ),
];

/** The same for the samples behind the tasks' levels, each once a task. */
function keptLevels({ shifts }: DayInput): { task: string; why: string }[] {
  const found = new Map<string, { task: string; why: string }>();
  for (const { name: task, level: taskLevel } of shifts.flatMap(({ tasks }) => tasks))
    for (const why of taskLevel?.keptReasons ?? []) found.set(`${task} ${why}`, { task, why });
  return [...found.values()];
}
