import { evaluateDay, outsideCriterion } from "./day";
import { governingReading, likenessFactor, sumDay, sumReading, unaccountedMin } from "./day-sum";
import { dayUncertainty } from "./day-uncertainty";
import {
  doseScale,
  type ExchangeLaw,
  lawOf,
  leastWeight,
  levelFactor,
  mostWeight,
  weightOf,
} from "./exchange-law";
import { lcMinusLaDb } from "./protection/attenuation";
import { wornShareLevelDb } from "./protection/wearing-time";
import type { SourceId } from "./sources";
import type {
  AttenuationMethod,
  Criterion,
  CriterionResult,
  DayEvaluation,
  DayInput,
  ProtectorWord,
  Reason,
  RuleSetVersion,
  TimedTask,
  UncertaintyReason,
  Verdict,
} from "./types";
import { COVERAGE_FACTOR } from "./uncertainty";

/** A message of the catalogue (its English text is its id) and what stands in its places. */
export interface WorkingText {
  readonly id: string;
  readonly values?: Readonly<Record<string, WorkingValue>>;
}

/** A number or a word, unrounded; whoever shows it rounds it by its kind. */
export type WorkingValue =
  | { readonly kind: "level" | "difference"; readonly db: number }
  | { readonly kind: "minutes"; readonly min: number }
  | { readonly kind: "share" | "dose"; readonly pct: number }
  /** Shown as a mantissa and a power of ten. */
  | { readonly kind: "scientific"; readonly number: number }
  /** A constant or an intermediate number, to four figures. */
  | { readonly kind: "number"; readonly number: number }
  | { readonly kind: "verdict"; readonly verdict: Verdict; readonly isClear: boolean }
  | { readonly kind: "protector-word"; readonly word: ProtectorWord }
  | { readonly kind: "method"; readonly method: AttenuationMethod }
  | { readonly kind: "reason"; readonly reason: Reason | UncertaintyReason }
  /** A name that somebody gave: not translated. */
  | { readonly kind: "name"; readonly name: string }
  | { readonly kind: "text"; readonly text: WorkingText }
  | { readonly kind: "list"; readonly values: readonly WorkingValue[] }
  | { readonly kind: "math"; readonly parts: readonly MathPart[] };

/** What an equation is drawn from, in order. */
export type MathPart =
  | { readonly kind: "sign"; readonly text: string }
  | {
      readonly kind: "symbol";
      readonly base: string;
      readonly sub?: string;
      readonly isAtEar?: boolean;
    }
  | { readonly kind: "value"; readonly value: WorkingValue; readonly isResult?: boolean }
  | { readonly kind: "sum" }
  | {
      readonly kind: "fraction";
      readonly over: readonly MathPart[];
      readonly under: readonly MathPart[];
    }
  | { readonly kind: "power"; readonly base: string; readonly exponent: readonly MathPart[] };

export interface WorkingEquation {
  readonly number: number;
  readonly parts: readonly MathPart[];
}

export interface WorkingColumn {
  readonly id: string;
  readonly title: WorkingText | null;
  /** Where the title is a formula. */
  readonly symbol: readonly MathPart[] | null;
  readonly isNumeric: boolean;
}

export interface WorkingRow {
  /** Timed task, criterion or method that the row is about. */
  readonly id: string;
  readonly cells: readonly (WorkingValue | null)[];
  readonly isTotal: boolean;
  /** The row that governs or decides. */
  readonly isEmphasized: boolean;
}

export interface WorkingTable {
  readonly columns: readonly WorkingColumn[];
  readonly rows: readonly WorkingRow[];
}

/** A record that a step rests on. */
export interface WorkingRecord {
  readonly kind:
    | "shift-revision"
    | "level-revision"
    | "reading"
    | "run"
    | "protector-revision"
    | "assignment";
  readonly id: string;
}

export interface WorkingSource {
  /** Null where a rule set is cited itself. */
  readonly id: SourceId | null;
  readonly clause: string;
}

export interface WorkingStep {
  readonly number: number;
  readonly title: WorkingText;
  readonly tables: readonly WorkingTable[];
  readonly equations: readonly WorkingEquation[];
  /** Parts of a whole, percent, in the order in which a bar shows them. */
  readonly shares: readonly { readonly label: WorkingText; readonly pct: number }[];
  readonly notes: readonly WorkingText[];
  readonly sources: readonly WorkingSource[];
  readonly records: readonly WorkingRecord[];
}

/** One of the lines at the head: the ear, the protector, the noise without it. */
export interface WorkingLine {
  readonly id: "at-the-ear" | "protector" | "without-protection";
  readonly title: WorkingText;
  readonly level: WorkingValue | null;
  readonly uncertainty: WorkingValue | null;
  readonly outcome: WorkingValue | null;
  readonly remark: WorkingText | null;
}

/** A day's result taken apart: what went in, by which clause, with the numbers put in. Nothing is left to compute. */
export interface Working {
  readonly methodVersion: number;
  readonly date: string;
  readonly governing: {
    readonly key: string;
    readonly version: number;
    readonly title: string;
    readonly citation: string;
  };
  readonly lines: readonly WorkingLine[];
  readonly steps: readonly WorkingStep[];
}

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

type Draft = Partial<Omit<WorkingStep, "number" | "title" | "equations">> & {
  readonly title: WorkingText;
  readonly equations?: readonly (readonly MathPart[])[];
};

class Builder {
  private readonly outside: Criterion;
  private readonly law: ExchangeLaw;
  private readonly tasks: readonly TimedTask[];
  private readonly names: ReadonlyMap<string, string>;
  private readonly isWorn: boolean;

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
    return drafts.map((draft, index) => ({
      number: index + 1,
      title: draft.title,
      tables: draft.tables ?? [],
      equations: (draft.equations ?? []).map((parts) => ({ number: ++equationNumber, parts })),
      shares: draft.shares ?? [],
      notes: draft.notes ?? [],
      sources: draft.sources ?? [],
      records: unique(draft.records ?? []),
    }));
  }

  lines(): WorkingLine[] {
    const { evaluation } = this;
    const atEarResult = this.resultsJudged("at-the-ear").find(({ levelDb }) => levelDb !== null);
    const outsideResult = worstOf(this.resultsJudged("without-protection"));
    const deciding = evaluation.tasks.find(
      ({ timedTaskId }) => timedTaskId === evaluation.decidingTaskId,
    );
    const uncertainty = this.law.isEnergy ? difference(evaluation.uncertaintyDb) : null;
    const lines: WorkingLine[] = [
      {
        id: "at-the-ear",
        title: text(/*i18n*/ "At the ear"),
        level: level(evaluation.atEarDb),
        uncertainty,
        outcome: atEarResult ? verdict(atEarResult) : null,
        remark: atEarResult ? this.remarkOn(atEarResult) : null,
      },
    ];
    if (this.isWorn) {
      lines.push({
        id: "protector",
        title: text(/*i18n*/ "Protector, while worn"),
        level: level(deciding?.wornDb ?? null),
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
      level: level(evaluation.outsideDb),
      uncertainty,
      outcome: outsideResult ? verdict(outsideResult) : null,
      remark: outsideResult ? this.remarkOn(outsideResult) : null,
    });
    return lines;
  }

  private noiseStep(): Draft {
    const { law } = this;
    const isTable = law.table !== null;
    const columns = [
      column("task", text(/*i18n*/ "Task"), false),
      symbolColumn("minutes", text(/*i18n*/ "Minutes"), [symbol("T", "m")]),
      column("samples", text(/*i18n*/ "Samples, dB"), true),
      symbolColumn("level", text(/*i18n*/ "Level, dB"), [symbol("L", "m")]),
      symbolColumn("lc-la", null, [symbol("L", "C"), sign("−"), symbol("L", "A")]),
      ...(law.isEnergy
        ? [
            symbolColumn("energy", null, [
              MINUTES_OVER_T0,
              sign("·"),
              power("10", [symbol("L"), sign("/10")]),
            ]),
          ]
        : [
            symbolColumn("allowed", text(/*i18n*/ "Allowed minutes"), [symbol("T", "L")]),
            symbolColumn("dose", text(/*i18n*/ "Dose"), [
              fraction([symbol("T", "m")], [symbol("T", "L")]),
            ]),
          ]),
    ];
    const rows: WorkingRow[] = [];
    let least = 0;
    for (const shift of this.input.shifts) {
      const factor = likenessFactor(shift);
      for (const task of shift.tasks) {
        const weight = task.level ? leastOrMost(task.level.metric, task.level.levelDb, law) : null;
        const durationMin = task.durationMin * factor;
        if (weight !== null) least += durationMin * weight;
        rows.push(
          row(task.id, [
            name(task.name),
            minutes(durationMin),
            task.level && task.level.samplesDb.length > 0
              ? { kind: "list", values: task.level.samplesDb.map((db) => level(db)!) }
              : null,
            level(task.level?.levelDb ?? null),
            difference(task.level ? lcMinusLaDb(task.level) : null),
            ...this.noiseCells(weight, durationMin),
          ]),
        );
      }
      const restMin = unaccountedMin(shift);
      if (restMin > 0 && shift.unaccounted.how !== "like-the-rest") {
        const quietDb = shift.unaccounted.how === "quiet" ? shift.unaccounted.levelDb : null;
        const weight = quietDb === null ? null : leastWeight({ kind: "steady" }, quietDb, law);
        if (weight !== null) least += restMin * weight;
        rows.push(
          row(`${shift.id}-rest`, [
            {
              kind: "text",
              text: text(
                quietDb === null ? /*i18n*/ "Not accounted for" : /*i18n*/ "Quiet, as stated",
              ),
            },
            minutes(restMin),
            null,
            level(quietDb),
            null,
            ...this.noiseCells(weight, restMin),
          ]),
        );
      }
    }
    rows.push({
      ...row("sum", [
        { kind: "text", text: text(/*i18n*/ "Sum") },
        minutes(this.evaluation.shiftMin),
        null,
        null,
        null,
        ...(law.isEnergy
          ? [{ kind: "scientific", number: least / law.referenceMin } as const]
          : [null, { kind: "dose", pct: 100 * least * doseScale(law) } as const]),
      ]),
      isTotal: true,
    });
    return {
      title: text(/*i18n*/ "Noise without protection, over the day"),
      tables: [{ columns, rows }],
      equations: this.noiseEquations(least),
      notes: [
        ...this.metricNotes(),
        ...(isTable
          ? [
              text(
                /*i18n*/ "The table is the rule: a level in between takes the time of the next higher row.",
              ),
            ]
          : []),
        ...(this.input.shifts.some((shift) => likenessFactor(shift) !== 1)
          ? [
              text(
                /*i18n*/ "Time not accounted for is said to be like the rest: the tasks' minutes are scaled to the shift.",
              ),
            ]
          : []),
      ],
      sources: this.noiseSources(),
      records: this.noiseRecords(),
    };
  }

  private noiseCells(weight: number | null, durationMin: number): (WorkingValue | null)[] {
    const { law } = this;
    if (weight === null) return law.isEnergy ? [null] : [null, null];
    if (law.isEnergy)
      return [{ kind: "scientific", number: (durationMin * weight) / law.referenceMin }];
    const perMinute = weight * doseScale(law);
    return [
      perMinute > 0 ? minutes(1 / perMinute) : null,
      { kind: "dose", pct: 100 * durationMin * perMinute },
    ];
  }

  private noiseEquations(sum: number): MathPart[][] {
    const { law, outside } = this;
    const result = sumDay(this.input, law).tasks;
    // An open sum has no result; the verdicts say what is certain about it.
    if (result.missing !== null || !(sum > 0)) return [];
    if (law.isEnergy) {
      return [
        [
          symbol("L", "EX,8h"),
          sign("= 10 lg"),
          SUM,
          MINUTES_OVER_T0,
          sign("·"),
          power("10", [symbol("L"), sign("/10")]),
          sign("= 10 lg ("),
          value({ kind: "scientific", number: sum / law.referenceMin }),
          sign(") ="),
          value(level(10 * Math.log10(sum / law.referenceMin))!, true),
        ],
      ];
    }
    const dosePct = 100 * sum * doseScale(law);
    const factor = outside.twaFactor ?? levelFactor(law);
    return [
      [
        symbol("D"),
        sign("= 100 ·"),
        SUM,
        fraction([symbol("T", "m")], [symbol("T", "L")]),
        sign("="),
        value({ kind: "dose", pct: dosePct }, true),
      ],
      [
        symbol("TWA"),
        sign("="),
        value(number(law.criterionLevelDb)),
        sign("+"),
        value(number(factor)),
        sign("lg ("),
        value(number(dosePct)),
        sign("/100) ="),
        value(level(law.criterionLevelDb + factor * Math.log10(dosePct / 100))!, true),
      ],
    ];
  }

  private metricNotes(): WorkingText[] {
    const { law } = this;
    let isUpper = false;
    let isLower = false;
    let isAverage = false;
    for (const { level: taskLevel } of this.tasks) {
      if (!taskLevel) continue;
      const least = leastWeight(taskLevel.metric, taskLevel.levelDb, law);
      const most = mostWeight(taskLevel.metric, taskLevel.levelDb, law);
      if (least !== most) {
        if (most < Number.POSITIVE_INFINITY) isUpper = true;
        else isLower = true;
      }
      if (taskLevel.metric.kind !== "steady" && law.thresholdDb !== null) isAverage = true;
    }
    return [
      ...(isUpper
        ? [
            text(
              /*i18n*/ "Unsteady noise is known by its energy mean: under this rule the sum is an upper estimate and may prove Under, never Over.",
            ),
          ]
        : []),
      ...(isLower
        ? [
            text(
              /*i18n*/ "Some levels are means of a larger exchange rate: under this rule the sum is a lower estimate and may prove Over, never Under.",
            ),
          ]
        : []),
      ...(isAverage
        ? [
            text(
              /*i18n*/ "The threshold of {threshold} dB rests on the slow level; a task's average can only bound what it leaves out.",
              { threshold: number(law.thresholdDb!) },
            ),
          ]
        : []),
    ];
  }

  private noiseSources(): WorkingSource[] {
    const { law } = this;
    if (law.isEnergy) return [{ id: "iso-9612-2009", clause: "9" }, this.ruleSource()];
    if (law.table) return [{ id: "nr-15", clause: "Annex 1" }];
    if (law.exchangeRateDb === 3) return [{ id: "niosh-98-126", clause: "1.1" }, this.ruleSource()];
    return [{ id: "osha-1910.95", clause: "App. A" }, this.ruleSource()];
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
    const governing = readings.filter(
      ({ shift, reading }) => governingReading(shift, law) === reading,
    );
    const sum = governing.reduce(
      (total, { shift, reading }) => total + sumReading(reading, shift, law),
      0,
    );
    const isWhole = governing.length === this.input.shifts.length && sum > 0;
    const shownDb = isWhole
      ? law.isEnergy
        ? 10 * Math.log10(sum / law.referenceMin)
        : evaluation.outsideDb
      : null;
    return [
      {
        title: text(/*i18n*/ "Readings on the worker"),
        tables: [
          {
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
        ],
        equations: shownDb === null ? [] : [[symbol("L"), sign("="), value(level(shownDb)!, true)]],
        notes: [
          ...(evaluation.tasksDb !== null && evaluation.readingGapDb !== null
            ? [
                text(/*i18n*/ "By tasks {tasks}: the reading is {gap} away.", {
                  tasks: level(evaluation.tasksDb)!,
                  gap: difference(evaluation.readingGapDb)!,
                }),
              ]
            : []),
          ...(evaluation.isProjected
            ? [
                text(
                  /*i18n*/ "Projected: the officer says that the rest of the shift was like the part measured.",
                ),
              ]
            : []),
          ...evaluation.keptReasons.map((why) =>
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
    const sources: WorkingSource[] = [{ id: "iso-9612-2009", clause: "Annex C" }];
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
    const taskNames = new Map(this.tasks.map((task) => [task.taskId, task.name]));
    return [
      {
        title,
        sources,
        shares,
        equations: [
          [
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
            value(difference(budget.expandedDb)!, true),
          ],
        ],
        tables: [
          {
            columns: [
              column("part", text(/*i18n*/ "Task"), false),
              symbolColumn("sensitivity", text(/*i18n*/ "Share of the energy"), [
                symbol("c", "1a"),
              ]),
              symbolColumn("sampling", text(/*i18n*/ "Sampling, dB"), [symbol("u", "1a")]),
              symbolColumn("instrument", text(/*i18n*/ "Instrument, dB"), [symbol("u", "2")]),
            ],
            rows: parts.map((part, index) =>
              row(part.taskId ?? `reading-${index}`, [
                part.taskId === null
                  ? { kind: "text", text: text(/*i18n*/ "Reading of one day") }
                  : name(taskNames.get(part.taskId) ?? part.taskId),
                number(part.energyShare),
                part.samplingDb === null ? null : number(part.samplingDb),
                number(part.instrumentDb),
              ]),
            ),
          },
        ],
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

  private resultsJudged(judged: Criterion["judged"]): CriterionResult[] {
    return this.evaluation.criteria.filter(
      (result) => result.ruleSetKey === this.governing.key && result.judged === judged,
    );
  }

  private verdictStep(judged: Criterion["judged"]): Draft {
    const results = this.resultsJudged(judged);
    return {
      title:
        judged === "at-the-ear"
          ? text(/*i18n*/ "Verdict at the ear")
          : text(/*i18n*/ "Verdict without protection"),
      tables: [this.verdictTable(results)],
      notes: (judged === "at-the-ear" ? [] : this.governing.notStated).map((what) =>
        text(/*i18n*/ "Not stated by the rule: {what}.", {
          what: { kind: "text", text: text(what) },
        }),
      ),
      sources: unique(
        results.map((result) => ({
          id: null,
          clause: criterionOf(this.governing, result).citation,
        })),
      ),
    };
  }

  private verdictTable(results: readonly CriterionResult[]): WorkingTable {
    return {
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
    const columns = [
      column("task", text(/*i18n*/ "Task"), false),
      column("outside", text(/*i18n*/ "Outside"), true),
      column("worn", text(/*i18n*/ "Worn"), true),
      column(
        "while-worn",
        hasActive ? text(/*i18n*/ "While worn, off") : text(/*i18n*/ "While worn"),
        true,
      ),
      column("method", text(/*i18n*/ "Method"), false),
      column("word", text(/*i18n*/ "Protector"), false),
      ...(hasActive
        ? [
            column("while-worn-on", text(/*i18n*/ "While worn, on"), true),
            column("word-on", text(/*i18n*/ "Protector, on"), false),
          ]
        : []),
      column("in-task", text(/*i18n*/ "In the task"), true),
    ];
    const rows = this.evaluation.tasks.map((task) => ({
      ...row(task.timedTaskId, [
        this.nameOf(task.timedTaskId),
        level(task.outsideDb),
        task.isWorn ? share(task.wornPct) : share(0),
        level(task.wornDb),
        task.governingMethod
          ? ({ kind: "method", method: task.governingMethod } as const)
          : task.reason
            ? reason(task.reason)
            : null,
        task.isWorn
          ? word(task.word)
          : ({ kind: "text", text: text(/*i18n*/ "not worn") } as const),
        ...(hasActive ? [level(task.wornActiveDb), word(task.wordActive)] : []),
        level(task.inTaskDb),
      ]),
      isEmphasized: task.timedTaskId === this.evaluation.decidingTaskId,
    }));
    const methods = new Set(
      this.evaluation.tasks.flatMap(({ governingMethod }) => governingMethod ?? []),
    );
    return {
      title: text(/*i18n*/ "What the protector does, while worn"),
      tables: [{ columns, rows }],
      equations: [...methods].map((method) => this.methodEquation(method)),
      notes: [...this.scaleNotes(), ...this.openNotes()],
      sources: [
        ...[...methods].map((method) => METHOD_SOURCES[method]),
        ...(this.governing.protection.adequacy === "en-458"
          ? [{ id: "en-458", clause: "Annex A" } as const]
          : []),
      ],
      records: this.protectorRecords(),
    };
  }

  private methodEquation(method: AttenuationMethod): MathPart[] {
    const { allowanceDb, derating } = this.governing.protection;
    const start = [symbol("L", "A,m", true), sign("=")];
    const allowance =
      allowanceDb > 0 && method !== "own-fit" ? [sign("+"), value(number(allowanceDb))] : [];
    switch (method) {
      case "octave-band":
        return [
          ...start,
          sign("10 lg"),
          SUM,
          power("10", [
            sign("("),
            symbol("L", "f"),
            sign("+"),
            symbol("A", "f"),
            sign("−"),
            symbol("m", "f"),
            sign("+"),
            value(number(this.governing.protection.alpha)),
            symbol("s", "f"),
            sign(")/10"),
          ]),
          ...allowance,
        ];
      case "hml":
        return [...start, symbol("L", "A"), sign("−"), symbol("PNR"), ...allowance];
      case "snr":
        return [...start, symbol("L", "C"), sign("−"), symbol("SNR"), ...allowance];
      case "slc80":
        return [...start, symbol("L", "C"), sign("−"), symbol("SLC", "80"), ...allowance];
      case "own-fit":
        return [...start, symbol("L", "A"), sign("−"), symbol("PAR")];
      case "us-single-number":
        return [...start, ...this.usRatingParts(derating), ...allowance];
    }
  }

  private usRatingParts(derating: RuleSetVersion["protection"]["derating"]): MathPart[] {
    const rating = symbol("R");
    const aWeighted = symbol("L", "A");
    if (derating === "by-type") {
      return [aWeighted, sign("− ("), symbol("d"), sign("·"), rating, sign("− 7)")];
    }
    if (derating === "half") return [aWeighted, sign("− ½ ("), rating, sign("− 7)")];
    const isByC = this.tasks.some(({ level: taskLevel }) => taskLevel?.lcMinusLaDb != null);
    return isByC
      ? [symbol("L", "C"), sign("−"), rating]
      : [aWeighted, sign("− ("), rating, sign("− 7)")];
  }

  private scaleNotes(): WorkingText[] {
    const { adequacy, targetDb } = this.governing.protection;
    if (targetDb === null) return [];
    const actionDb = Math.min(targetDb, this.input.personalTargetDb ?? targetDb);
    if (adequacy === "appendix-b") {
      return [
        text(
          /*i18n*/ "Enough where the shift's TWA under the protector does not exceed {target}.",
          { target: level(actionDb)! },
        ),
      ];
    }
    if (adequacy !== "en-458") return [];
    return [
      text(
        /*i18n*/ "Against the action value {action}: over {action} too little, {five} to {action} just enough, {ten} to {five} good, {fifteen} to {ten} on the strong side, under {fifteen} too much.",
        {
          action: level(actionDb)!,
          five: level(actionDb - 5)!,
          ten: level(actionDb - 10)!,
          fifteen: level(actionDb - 15)!,
        },
      ),
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
    const { evaluation, law } = this;
    const k = number(levelFactor(law));
    const factor = law.isEnergy ? sign("10") : value(k);
    const equations: MathPart[][] = [
      [
        symbol("L", "m", true),
        sign("="),
        factor,
        sign("lg ("),
        symbol("f"),
        sign("·"),
        power("10", [symbol("L", "A,m", true), sign("/"), factor]),
        sign("+ (1 −"),
        symbol("f"),
        sign(") ·"),
        power("10", [symbol("L"), sign("/"), factor]),
        sign(")"),
      ],
    ];
    if (evaluation.atEarDb !== null) {
      equations.push([
        symbol("L", law.isEnergy ? "EX,8h" : "TWA", true),
        sign("="),
        factor,
        sign("lg"),
        SUM,
        MINUTES_OVER_T0,
        sign("·"),
        power("10", [symbol("L", "m", true), sign("/"), factor]),
        sign("="),
        factor,
        sign("lg ("),
        value({ kind: "scientific", number: 10 ** (evaluation.atEarDb / levelFactor(law)) }),
        sign(") ="),
        value(level(evaluation.atEarDb)!, true),
      ]);
    }
    const on = [
      [text(/*i18n*/ "Active part on all the time"), evaluation.atEarActiveDb],
      [text(/*i18n*/ "As worked, on while the battery lasts"), evaluation.atEarAsWorkedDb],
    ] as const;
    const methodRows = this.dayByMethod();
    return {
      title: text(/*i18n*/ "The day at the ear, wearing time included"),
      equations,
      tables: [
        {
          columns: [
            column("method", text(/*i18n*/ "Method"), false),
            column("day", text(/*i18n*/ "Day at the ear, off"), true),
            column("remark", null, false),
          ],
          rows: [
            ...methodRows,
            ...on.flatMap(([title, db], index) =>
              db === null
                ? []
                : [row(`active-${index}`, [{ kind: "text", text: title }, level(db), null])],
            ),
          ],
        },
      ],
      notes: [
        ...(this.readingGoverns()
          ? [
              text(
                /*i18n*/ "The reading says how much noise there was; the tasks only say how it divides between them.",
              ),
            ]
          : []),
        ...(evaluation.atEarActiveDb === null
          ? []
          : [
              this.input.site.creditsActivePart
                ? text(
                    /*i18n*/ "The limit is judged as worked where a passed active check is on record, else with the active part off.",
                  )
                : text(/*i18n*/ "The limit is judged with the active part off."),
            ]),
      ],
      sources: [
        { id: "wearing-time", clause: "" },
        ...(this.governing.protection.adequacy === "appendix-b"
          ? [{ id: "osha-1910.95", clause: "App. B" } as const]
          : []),
      ],
      records: [],
    };
  }

  private readingGoverns(): boolean {
    return this.input.shifts.some((shift) => governingReading(shift, this.law) !== undefined);
  }

  /** The whole day by each method alone, protectors on where they are worn; null where a task lacks it. */
  private dayByMethod(): WorkingRow[] {
    const { evaluation } = this;
    const seen = new Map(evaluation.tasks.map((task) => [task.timedTaskId, task]));
    const methods = [
      ...new Set(evaluation.tasks.flatMap((task) => task.methods.map(({ method }) => method))),
    ];
    const governing = new Set(
      evaluation.tasks.flatMap(({ governingMethod }) => governingMethod ?? []),
    );
    const isSole = governing.size === 1;
    return methods.map((method) => {
      const why = this.whyNotByMethod(method);
      const db = why || evaluation.atEarDb === null ? null : this.levelByMethod(method, seen);
      const governs = governing.has(method);
      return {
        ...row(method, [
          { kind: "method", method },
          level(isSole && governs ? evaluation.atEarDb : db),
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
        isEmphasized: governs,
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

  private levelByMethod(
    method: AttenuationMethod,
    seen: ReadonlyMap<string, DayEvaluation["tasks"][number]>,
  ): number {
    const { law, evaluation } = this;
    const factor = levelFactor(law);
    const byGoverning = this.relativeSum(seen, (task) => task.wornDb);
    const byMethod = this.relativeSum(
      seen,
      (task) => task.methods.find((one) => one.method === method)?.atEarDb ?? null,
    );
    return evaluation.atEarDb! + factor * Math.log10(byMethod / byGoverning);
  }

  private relativeSum(
    seen: ReadonlyMap<string, DayEvaluation["tasks"][number]>,
    wornDbOf: (task: DayEvaluation["tasks"][number]) => number | null,
  ): number {
    const { law } = this;
    let sum = 0;
    for (const shift of this.input.shifts) {
      for (const { id, durationMin, level: taskLevel } of shift.tasks) {
        const task = seen.get(id);
        if (!task || !taskLevel) continue;
        const wornDb = task.isWorn ? wornDbOf(task) : null;
        const inTaskDb =
          wornDb === null
            ? taskLevel.levelDb
            : wornShareLevelDb(taskLevel.levelDb, wornDb, task.wornPct ?? 100, levelFactor(law));
        sum += durationMin * likenessFactor(shift) * weightOf(inTaskDb, law);
      }
      if (shift.unaccounted.how === "quiet") {
        sum += unaccountedMin(shift) * weightOf(shift.unaccounted.levelDb, law);
      }
    }
    return sum;
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

const SUM: MathPart = { kind: "sum" };
const MINUTES_OVER_T0: MathPart = fraction([symbol("T", "m")], [symbol("T", "0")]);

const COVERS = {
  shift: text(/*i18n*/ "the shift"),
  projected: text(/*i18n*/ "a part, projected to the shift"),
  part: text(/*i18n*/ "a part"),
} as const;

const METHOD_SOURCES: Readonly<Record<AttenuationMethod, WorkingSource>> = {
  "octave-band": { id: "iso-4869-2", clause: "6" },
  hml: { id: "iso-4869-2", clause: "7" },
  snr: { id: "iso-4869-2", clause: "8" },
  "us-single-number": { id: "osha-1910.95", clause: "App. B" },
  slc80: { id: "as-nzs-1270", clause: "App. A" },
  "own-fit": { id: null, clause: "" },
};

/** The test a verdict rests on, with the numbers put in: level, comparator, value, and with the uncertainty. */
function testOf(result: CriterionResult, criterion: Criterion): WorkingValue | null {
  const isDose = criterion.quantity === "dose" || criterion.quantity === "table-dose";
  const amount = isDose ? result.dosePct : result.levelDb;
  if (amount === null) return result.reason ? reason(result.reason) : null;
  const shown = (number: number): WorkingValue =>
    isDose ? { kind: "dose", pct: number } : { kind: "level", db: number };
  const [past, notPast] = criterion.comparator === "exceeds" ? [">", "≤"] : ["≥", "<"];
  const isOver = result.verdict === "over";
  const limit = value(limitValue(criterion));
  const isWithin = result.reason === "within-uncertainty" && !isOver;
  // An upper bound past the limit proves nothing, and neither does a lower one short of it: each is shown as what it is.
  const isOpenUpper = result.verdict !== "under" && !isOver && result.bound === "upper";
  const parts: MathPart[] = [
    ...(result.bound === "exact" ? [] : [sign(result.bound === "upper" ? "≤" : "≥")]),
    value(shown(amount)),
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
      value(difference(uncertaintyDb)!),
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

function leastOrMost(
  metric: NonNullable<TimedTask["level"]>["metric"],
  levelDb: number,
  law: ExchangeLaw,
): number {
  const most = mostWeight(metric, levelDb, law);
  return most < Number.POSITIVE_INFINITY ? most : leastWeight(metric, levelDb, law);
}

function settingsText(
  settings: DayInput["shifts"][number]["readings"][number]["settings"],
): WorkingText {
  const values = {
    criterion: number(settings.criterionLevelDb),
    exchange: number(settings.exchangeRateDb),
    weighting: name(settings.weighting),
    response: name(settings.response),
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

function text(id: string, values?: Readonly<Record<string, WorkingValue>>): WorkingText {
  return values ? { id, values } : { id };
}

function column(id: string, title: WorkingText | null, isNumeric: boolean): WorkingColumn {
  return { id, title, symbol: null, isNumeric };
}

function symbolColumn(
  id: string,
  title: WorkingText | null,
  parts: readonly MathPart[],
): WorkingColumn {
  return { id, title, symbol: parts, isNumeric: true };
}

function row(id: string, cells: readonly (WorkingValue | null)[]): WorkingRow {
  return { id, cells, isTotal: false, isEmphasized: false };
}

function level(db: number | null): WorkingValue | null {
  return db === null ? null : { kind: "level", db };
}

function difference(db: number | null): WorkingValue | null {
  return db === null ? null : { kind: "difference", db };
}

function minutes(min: number): WorkingValue {
  return { kind: "minutes", min };
}

function share(pct: number | null): WorkingValue | null {
  return pct === null ? null : { kind: "share", pct };
}

function number(of: number): WorkingValue {
  return { kind: "number", number: of };
}

function name(of: string): WorkingValue {
  return { kind: "name", name: of };
}

function reason(of: Reason | UncertaintyReason): WorkingValue {
  return { kind: "reason", reason: of };
}

function word(of: ProtectorWord | null): WorkingValue | null {
  return of === null ? null : { kind: "protector-word", word: of };
}

function verdict(result: CriterionResult): WorkingValue {
  return { kind: "verdict", verdict: result.verdict, isClear: result.isClear };
}

function sign(signs: string): MathPart {
  return { kind: "sign", text: signs };
}

function symbol(base: string, sub?: string, isAtEar?: boolean): MathPart {
  return { kind: "symbol", base, ...(sub ? { sub } : {}), ...(isAtEar ? { isAtEar } : {}) };
}

function value(of: WorkingValue, isResult?: boolean): MathPart {
  return { kind: "value", value: of, ...(isResult ? { isResult } : {}) };
}

function fraction(over: readonly MathPart[], under: readonly MathPart[]): MathPart {
  return { kind: "fraction", over, under };
}

function power(base: string, exponent: readonly MathPart[]): MathPart {
  return { kind: "power", base, exponent };
}

function unique<T>(items: readonly T[]): T[] {
  const seen = new Map(items.map((item) => [JSON.stringify(item), item]));
  return [...seen.values()];
}
