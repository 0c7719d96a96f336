import {
  boundsOfReadings,
  cutReading,
  type DaySum,
  governingReading,
  isProjected,
  leftOutQuietMin,
  likenessFactor,
  narrowed,
  projection,
  type ReadingBounds,
  sumDay,
  sumReading,
  sumTasks,
  unaccountedMin,
} from "./day-sum";
import {
  asLaw,
  doseScale,
  type ExchangeLaw,
  lawOf,
  leastWeight,
  levelFactor,
  levelOfWeight,
  mostWeight,
  servesExactly,
  tableExcess,
} from "./exchange-law";
import { lcMinusLaDb } from "./protection/attenuation";
import type {
  Criterion,
  CriterionResult,
  DayInput,
  LevelMetric,
  ReadingInput,
  ShiftInput,
} from "./types";
import {
  type Bound,
  between,
  bounded,
  column,
  difference,
  dose,
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
  relationOf,
  row,
  SUM,
  scientific,
  sign,
  symbol,
  symbolColumn,
  table,
  text,
  unique,
  value,
  type WorkingColumn,
  type WorkingRow,
  type WorkingTable,
  type WorkingText,
  type WorkingValue,
  words,
} from "./working-parts";

/** Which end of what is possible a sum is made of. */
type Side = "least" | "most";

/** How an average stands to the one that a law asks for. */
type Stands =
  | "exact"
  | "as-it-stands"
  | "raised"
  | "reduced"
  | "by-table"
  | "nothing"
  | "unbounded";

interface Counted {
  /** Of a minute, under the law; null where nothing bounds it. */
  readonly weight: number | null;
  /** The level that weighs as much, dB; null where none does. */
  readonly usedDb: number | null;
  readonly stands: Stands;
}

/** What of a step belongs to one law. */
export interface LawPart {
  readonly tables: readonly WorkingTable[];
  readonly lines: readonly Line[];
  readonly notes: readonly WorkingText[];
}

/** The noise without protection under the law of one criterion, taken apart. */
export class NoiseUnderLaw {
  readonly law: ExchangeLaw;
  private readonly sum: DaySum;
  private readonly isKnown: boolean;
  private readonly bound: Bound | null;
  private readonly tasksBound: Bound | null;
  private readonly side: Side;

  constructor(
    private readonly input: DayInput,
    private readonly criterion: Criterion,
    result: CriterionResult,
  ) {
    this.law = lawOf(criterion);
    this.sum = sumDay(input, this.law);
    this.isKnown = result.levelDb !== null || result.dosePct !== null;
    this.bound = result.bound === "exact" ? null : result.bound;
    const restsOnTasks = input.shifts.some((shift) => !governingReading(shift, this.law));
    this.side =
      this.isKnown && restsOnTasks
        ? result.bound === "upper"
          ? "most"
          : "least"
        : this.hasUpperBounds()
          ? "most"
          : "least";
    const { tasks } = this.sum;
    this.tasksBound = tasks.least === tasks.most ? null : this.side === "most" ? "upper" : "lower";
  }

  private hasUpperBounds(): boolean {
    return this.input.shifts.every((shift) =>
      shift.tasks.every(
        (task) =>
          task.level === null ||
          servesExactly(task.level.metric, this.law) ||
          mostWeight(task.level.metric, task.level.levelDb, this.law) < Number.POSITIVE_INFINITY,
      ),
    );
  }

  /** A reading says something about the day's figure that the tasks alone do not. */
  hasReadingPart(): boolean {
    return this.input.shifts.some((shift) => {
      if (governingReading(shift, this.law)) return true;
      const tasks = sumTasks(shift, this.law);
      const after = narrowed(tasks, shift, this.law);
      return after.least !== tasks.least || after.most !== tasks.most;
    });
  }

  /** The tasks, row by row, and what they add up to. */
  byTasks(isMain: boolean, title: WorkingText | null): LawPart {
    const { law, input } = this;
    const all = input.shifts.flatMap(({ tasks }) => tasks);
    const counted = new Map(
      all.flatMap((task) =>
        task.level
          ? [[task, countedAs(task.level.metric, task.level.levelDb, law, this.side)] as const]
          : [],
      ),
    );
    const hasSamples = isMain && all.some(({ level: of }) => (of?.samplesDb.length ?? 0) > 0);
    const hasSpectrum = isMain && all.some(({ level: of }) => of && lcMinusLaDb(of) !== null);
    const hasMetrics = all.some(
      ({ level: of }) => of && !(law.isEnergy && of.metric.kind === "laeq"),
    );
    const hasBounds = [...counted.values()].some(({ stands }) => stands !== "exact");
    const onRecord = text(/*i18n*/ "Level on record, dB");
    const columns: WorkingColumn[] = [
      column("task", text(/*i18n*/ "Task"), false),
      symbolColumn("minutes", text(/*i18n*/ "Minutes"), [symbol("T", "m")]),
      ...(hasSamples ? [column("samples", text(/*i18n*/ "Samples, dB"), true)] : []),
      ...(hasMetrics ? [column("metric", text(/*i18n*/ "Average of"), false)] : []),
      ...(hasBounds ? [column("on-record", onRecord, true)] : []),
      symbolColumn(
        "level",
        hasBounds ? text(/*i18n*/ "Level counted, dB") : text(/*i18n*/ "Level, dB"),
        [symbol("L", "m")],
      ),
      ...(hasSpectrum
        ? [symbolColumn("lc-la", null, [symbol("L", "C"), sign("−"), symbol("L", "A")])]
        : []),
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
    let totalMin = 0;
    let total = 0;
    const add = (
      id: string,
      cells: Record<string, WorkingValue | null>,
      min: number,
      of: Counted | null,
    ) => {
      totalMin += min;
      total += min * (of?.weight ?? 0);
      const all: Record<string, WorkingValue | null> = {
        ...cells,
        minutes: minutes(min),
        level: level(of?.usedDb ?? null),
        ...this.amounts(of, min),
      };
      rows.push(
        row(
          id,
          columns.map((one) => all[one.id] ?? null),
        ),
      );
    };
    for (const shift of input.shifts) {
      const factor = likenessFactor(shift);
      for (const task of shift.tasks) {
        const of = task.level;
        const cells = {
          task: name(task.name),
          samples:
            of && of.samplesDb.length > 0
              ? ({ kind: "list", values: of.samplesDb.map((db) => level(db)) } as const)
              : null,
          metric: of && words(metricText(of.metric)),
          "on-record": level(of?.levelDb ?? null),
          "lc-la": difference(of ? lcMinusLaDb(of) : null),
        };
        add(task.id, cells, task.durationMin * factor, counted.get(task) ?? null);
      }
      const restMin = unaccountedMin(shift);
      if (restMin === 0 || shift.unaccounted.how === "like-the-rest") continue;
      const quietDb = shift.unaccounted.how === "quiet" ? shift.unaccounted.levelDb : null;
      const what = quietDb === null ? /*i18n*/ "Not accounted for" : /*i18n*/ "Quiet, as stated";
      add(
        `${shift.id}-rest`,
        { task: words(text(what)), "on-record": level(quietDb) },
        restMin,
        quietDb === null ? null : countedAs({ kind: "steady" }, quietDb, law, this.side),
      );
    }
    const isOpen = this.sum.tasks.missing !== null;
    const sums: Record<string, WorkingValue> = {
      task: words(isOpen ? text(/*i18n*/ "Sum of what is known") : text(/*i18n*/ "Sum")),
      minutes: minutes(totalMin),
      energy: scientific(total / law.referenceMin),
      dose: dose(100 * total * doseScale(law)),
    };
    rows.push({
      ...row(
        "sum",
        columns.map((one) => sums[one.id] ?? null),
      ),
      isTotal: true,
    });
    const isAlone = !this.hasReadingPart();
    const hasFigure = isAlone
      ? this.isKnown
      : !isOpen && (this.side === "least" || this.hasUpperBounds());
    const bound = isAlone ? this.bound : this.tasksBound;
    const byTasks = words(
      title
        ? text(/*i18n*/ "{criterion}, by the tasks", { criterion: words(title) })
        : text(/*i18n*/ "By the tasks"),
    );
    return {
      tables: [table(columns, rows, title)],
      lines: [
        ...boundLines(
          all.flatMap((task) => (task.level ? [{ ...task.level, of: name(task.name) }] : [])),
          law,
          this.side,
        ),
        ...(hasFigure
          ? this.figureLines(total, bound, isAlone ? title && words(title) : byTasks)
          : []),
      ],
      notes: [
        ...unique(
          all.flatMap((task) => {
            const stands = counted.get(task)?.stands;
            return task.level && stands
              ? standsNote(task.level.metric, law, stands, this.side)
              : [];
          }),
        ),
        ...(isAlone && this.isKnown ? this.sumNotes(total) : []),
        ...(hasBounds && law.thresholdDb !== null && !law.table
          ? [
              text(
                /*i18n*/ "The threshold of {threshold} dB rests on the slow level; a task's average can only bound what it leaves out.",
                { threshold: number(law.thresholdDb) },
              ),
            ]
          : []),
        ...(law.table
          ? [
              text(
                /*i18n*/ "The table is the rule: a level in between takes the time of the next higher row.",
              ),
            ]
          : []),
      ],
    };
  }

  private amounts(of: Counted | null, min: number): Record<string, WorkingValue | null> {
    const { law } = this;
    if (of === null || of.weight === null) return {};
    const perMinute = of.weight * doseScale(law);
    return {
      energy: scientific((min * of.weight) / law.referenceMin),
      allowed: perMinute > 0 ? minutes(1 / perMinute) : null,
      dose: dose(100 * min * perMinute),
    };
  }

  /** From minutes times weight to the rule's own figure. */
  private figureLines(sum: number, bound: Bound | null, label: WorkingValue | null): Line[] {
    const { law } = this;
    const relation = sign(relationOf(bound));
    if (law.isEnergy) {
      if (!(sum > 0)) return [];
      const mean = sum / law.referenceMin;
      return [
        line(
          [
            symbol("L", "EX,8h"),
            relation,
            sign("10 lg"),
            SUM,
            MINUTES_OVER_T0,
            sign("·"),
            power("10", [symbol("L"), sign("/10")]),
            sign("="),
            sign("10 lg ("),
            value(scientific(mean)),
            sign(")"),
            sign("="),
            value(level(levelOfWeight(mean, law)), true),
          ],
          label,
        ),
      ];
    }
    const dosePct = 100 * sum * doseScale(law);
    return [
      line(
        [
          symbol("D"),
          relation,
          sign("100 ·"),
          SUM,
          fraction([symbol("T", "m")], [symbol("T", "L")]),
          sign("="),
          value(dose(dosePct), true),
        ],
        label,
      ),
      ...this.twaLines(dosePct, bound, label),
    ];
  }

  private twaLines(dosePct: number, bound: Bound | null, label: WorkingValue | null): Line[] {
    const { law, criterion } = this;
    if (!(dosePct > 0)) return [];
    const factor = criterion.twaFactor ?? levelFactor(law);
    return [
      line(
        [
          symbol("TWA"),
          sign(relationOf(bound)),
          value(number(law.criterionLevelDb)),
          sign("+"),
          value(number(factor)),
          sign("lg ("),
          value(number(dosePct)),
          sign("/100)"),
          sign("="),
          value(level(law.criterionLevelDb + factor * Math.log10(dosePct / 100)), true),
        ],
        label,
      ),
    ];
  }

  private sumNotes(sum: number): WorkingText[] {
    if (!this.law.isEnergy && sum === 0) {
      return [text(/*i18n*/ "Nothing reaches the threshold: the dose is 0, which has no TWA.")];
    }
    if (this.bound === "upper") {
      return [text(/*i18n*/ "The sum is an upper bound: it may prove Under, never Over.")];
    }
    if (this.bound === "lower") {
      return [text(/*i18n*/ "The sum is a lower bound: it may prove Over, never Under.")];
    }
    return [];
  }

  /** What the readings make of it; empty where they say nothing under this law. */
  byReadings(title: WorkingText | null): LawPart {
    const { law, input } = this;
    if (!this.hasReadingPart() || !this.isKnown) return { tables: [], lines: [], notes: [] };
    const isSeveral = input.shifts.length > 1;
    const shifts = input.shifts.map((shift, index) => {
      const label = text(/*i18n*/ "Shift {number}", { number: number(index + 1) });
      return { label, ...this.shiftPart(shift, isSeveral ? words(label) : title && words(title)) };
    });
    const sum = shifts.reduce((total, { weight }) => total + weight, 0);
    const amountOf = (weight: number) =>
      law.isEnergy ? scientific(weight / law.referenceMin) : dose(100 * weight * doseScale(law));
    const symbolOf = law.isEnergy ? symbol("E") : symbol("D");
    const label = title && words(title);
    const lines: Line[] = shifts.flatMap((shift) => shift.lines);
    if (isSeveral) {
      lines.push(
        line(
          [
            symbolOf,
            sign(relationOf(this.bound)),
            ...between(
              shifts.map(({ weight }) => [value(amountOf(weight))]),
              "+",
            ),
            sign("="),
            value(amountOf(sum), true),
          ],
          label,
        ),
      );
    }
    if (law.isEnergy) {
      const mean = sum / law.referenceMin;
      lines.push(
        line(
          [
            symbol("L", "EX,8h"),
            sign(relationOf(this.bound)),
            sign("10 lg"),
            symbolOf,
            sign("="),
            sign("10 lg ("),
            value(scientific(mean)),
            sign(")"),
            sign("="),
            value(level(levelOfWeight(mean, law)), true),
          ],
          label,
        ),
      );
    } else lines.push(...this.twaLines(100 * sum * doseScale(law), this.bound, label));
    const tables = isSeveral
      ? [
          table(
            [
              column("shift", text(/*i18n*/ "Shift"), false),
              column("rests-on", text(/*i18n*/ "Rests on"), false),
              symbolColumn("amount", null, [symbolOf]),
            ],
            [
              ...shifts.map((shift, index) =>
                row(`shift-${index}`, [
                  words(shift.label),
                  words(shift.restsOn),
                  amountOf(shift.weight),
                ]),
              ),
              {
                ...row("sum", [words(text(/*i18n*/ "Sum")), null, amountOf(sum)]),
                isTotal: true,
              },
            ],
            title,
          ),
        ]
      : [];
    return {
      tables,
      lines,
      notes: [...shifts.flatMap(({ notes }) => notes), ...this.sumNotes(sum)],
    };
  }

  private shiftPart(
    shift: ShiftInput,
    label: WorkingValue | null,
  ): { weight: number; restsOn: WorkingText; lines: Line[]; notes: WorkingText[] } {
    const { law } = this;
    const governing = governingReading(shift, law);
    if (governing) {
      const weight = sumReading(governing, shift, law);
      return {
        weight,
        restsOn: text(/*i18n*/ "its reading"),
        lines: [line(this.readingParts(governing, shift, weight), label)],
        notes: [],
      };
    }
    const tasks = sumTasks(shift, law);
    const after = narrowed(tasks, shift, law);
    const isMost = this.bound === "upper";
    const weight = isMost ? after.most : after.least;
    const readings = boundsOfReadings(shift, law);
    const byTasks = isMost ? tasks.most : tasks.least;
    const reading = readings.find(({ atLeast, atMost }) => (isMost ? atMost : atLeast) === weight);
    const cut = cutReading(shift, law);
    if (cut && byTasks !== weight) {
      return {
        weight,
        restsOn: text(/*i18n*/ "what is kept of its reading"),
        lines: [line(this.readingParts(cut, shift, weight), label)],
        notes: [],
      };
    }
    if (byTasks === weight || !reading) {
      return { weight, restsOn: text(/*i18n*/ "its tasks"), lines: [], notes: [] };
    }
    return {
      weight,
      restsOn: text(/*i18n*/ "a reading under other settings"),
      ...this.otherReading(reading, isMost ? "most" : "least", label),
    };
  }

  /** A governing reading over its shift: E by energy, else D. */
  private readingParts(reading: ReadingInput, shift: ShiftInput, weight: number): MathPart[] {
    const { law } = this;
    const { averageDb, dosePct, settings, durationMin } = reading;
    const isByAverage = law.isEnergy ? averageDb !== null : dosePct === null;
    const start = [
      symbol(law.isEnergy ? "E" : "D"),
      sign(reading === governingReading(shift, law) ? "=" : "≥"),
    ];
    const end = [
      ...this.quietParts(reading, shift),
      sign("="),
      value(
        law.isEnergy ? scientific(weight / law.referenceMin) : dose(100 * weight * doseScale(law)),
        true,
      ),
    ];
    if (isByAverage) {
      return [
        ...start,
        ...this.amountParts(averageDb!, durationMin * projection(reading, shift)),
        ...end,
      ];
    }
    const factor = projection(reading, shift);
    const projected =
      isProjected(reading) || factor !== 1
        ? [sign("·"), fraction([value(number(durationMin * factor))], [value(number(durationMin))])]
        : [];
    const reference =
      law.referenceMin === 480
        ? []
        : [sign("·"), fraction([value(number(480))], [value(number(law.referenceMin))])];
    if (law.isEnergy) {
      return [
        ...start,
        fraction([value(number(dosePct!))], [sign("100")]),
        ...reference,
        sign("·"),
        power("10", [value(number(settings.criterionLevelDb)), sign("/10")]),
        ...projected,
        ...end,
      ];
    }
    const isOwnCriterion = settings.criterionLevelDb === law.criterionLevelDb;
    return [
      ...start,
      value(dose(dosePct!)),
      ...reference,
      ...(isOwnCriterion
        ? []
        : [
            sign("·"),
            power("2", [
              sign("("),
              value(number(settings.criterionLevelDb)),
              sign("−"),
              value(number(law.criterionLevelDb)),
              sign(")/"),
              value(number(law.exchangeRateDb)),
            ]),
          ]),
      ...projected,
      ...end,
    ];
  }

  /** What time left out that was quiet adds; nothing where it lies under the threshold. */
  private quietParts(reading: ReadingInput, shift: ShiftInput): MathPart[] {
    const { law } = this;
    const { leftOut } = reading;
    const quietMin = leftOutQuietMin(reading, shift);
    if (leftOut?.how !== "quiet" || quietMin === 0) return [];
    const weight = leastWeight({ kind: "steady" }, leftOut.levelDb, law);
    if (weight === 0) return [];
    const usedDb = law.table
      ? law.criterionLevelDb + levelFactor(law) * Math.log10(weight)
      : leftOut.levelDb;
    return [sign("+"), ...this.amountParts(usedDb, quietMin)];
  }

  /** Minutes at a level, as energy over T0 or as a dose. */
  private amountParts(levelDb: number, min: number): MathPart[] {
    const { law } = this;
    const time = fraction([value(minutes(min))], [value(number(law.referenceMin))]);
    return law.isEnergy
      ? [time, sign("·"), power("10", [value(level(levelDb)), sign("/10")])]
      : [
          sign("100 ·"),
          time,
          sign("·"),
          power("2", [
            sign("("),
            value(level(levelDb)),
            sign("−"),
            value(number(law.criterionLevelDb)),
            sign(")/"),
            value(number(law.exchangeRateDb)),
          ]),
        ];
  }

  /** A reading under other settings that bounds its shift more closely than its tasks do. */
  private otherReading(
    { reading, metric, averageDb, minutes: min, atLeast, atMost }: ReadingBounds,
    side: Side,
    label: WorkingValue | null,
  ): { lines: Line[]; notes: WorkingText[] } {
    const { law } = this;
    const { dosePct, settings } = reading;
    const { usedDb, stands } = countedAs(metric, averageDb, law, side);
    const weight = side === "most" ? atMost! : atLeast;
    const lines: Line[] = [];
    if (reading.averageDb === null) {
      lines.push(
        line(
          [
            symbol("L"),
            sign("="),
            value(number(settings.criterionLevelDb)),
            sign("+"),
            value(number(levelFactor(asLaw(settings)))),
            sign("lg ("),
            fraction([value(number(dosePct!))], [sign("100")]),
            sign("·"),
            fraction([value(number(480))], [value(number(reading.durationMin))]),
            sign(")"),
            sign("="),
            value(level(averageDb), true),
          ],
          label,
        ),
      );
    }
    lines.push(...boundLines([{ metric, levelDb: averageDb, of: label }], law, side));
    if (usedDb !== null) {
      lines.push(
        line(
          [
            symbol(law.isEnergy ? "E" : "D"),
            sign(relationOf(side === "most" ? "upper" : "lower")),
            ...this.amountParts(usedDb, min),
            sign("="),
            value(
              law.isEnergy
                ? scientific(weight / law.referenceMin)
                : dose(100 * weight * doseScale(law)),
              true,
            ),
          ],
          label,
        ),
      );
    }
    return { lines, notes: standsNote(metric, law, stands, side) };
  }
}

/** The level with which an average of this metric counts under a law. */
export function countedAs(
  metric: LevelMetric,
  levelDb: number,
  law: ExchangeLaw,
  side: Side,
): Counted {
  if (servesExactly(metric, law)) {
    return { weight: leastWeight(metric, levelDb, law), usedDb: levelDb, stands: "exact" };
  }
  const weight = (side === "least" ? leastWeight : mostWeight)(metric, levelDb, law);
  if (weight === 0) return { weight, usedDb: null, stands: "nothing" };
  if (weight === Number.POSITIVE_INFINITY) {
    return { weight: null, usedDb: null, stands: "unbounded" };
  }
  if (law.table) {
    const usedDb = law.criterionLevelDb + levelFactor(law) * Math.log10(weight);
    return { weight, usedDb, stands: "by-table" };
  }
  const usedDb = levelOfWeight(weight, law);
  // Binary arithmetic does not give the same level back to the last digit.
  if (Math.abs(usedDb - levelDb) < 1e-9) return { weight, usedDb: levelDb, stands: "as-it-stands" };
  return { weight, usedDb, stands: usedDb > levelDb ? "raised" : "reduced" };
}

/** How levels that do not count as they stand come by the one that counts. */
export function boundLines(
  levels: readonly { metric: LevelMetric; levelDb: number; of: WorkingValue | null }[],
  law: ExchangeLaw,
  side: Side,
): Line[] {
  const lines = levels.flatMap(({ metric, levelDb, of }) => {
    const { usedDb, stands } = countedAs(metric, levelDb, law, side);
    if (usedDb === null) return [];
    if (stands !== "raised" && stands !== "reduced" && stands !== "by-table") return [];
    const parts = [
      symbol("L", "m"),
      sign("="),
      ...boundParts(metric, levelDb, law, side),
      sign("="),
      value(level(usedDb), true),
    ];
    return [line(parts, of)];
  });
  return unique(lines);
}

function boundParts(
  metric: LevelMetric,
  levelDb: number,
  law: ExchangeLaw,
  side: Side,
): MathPart[] {
  const settings = metric.kind === "lavg" ? metric.settings : null;
  const asPower = (db: number, factor: number) =>
    power("10", [value(level(db)), sign("/"), value(number(factor))]);
  const sumOf = (otherDb: number, by: string, factor: number): MathPart[] => [
    value(number(factor)),
    sign("lg ("),
    asPower(levelDb, factor),
    sign(by),
    asPower(otherDb, factor),
    sign(")"),
  ];
  if (side === "least") {
    const rateDb = settings?.exchangeRateDb ?? 3;
    const own = rateDb === law.exchangeRateDb || !settings ? law : asLaw(settings);
    return sumOf(law.thresholdDb!, "−", levelFactor(own));
  }
  const thresholdDb = thresholdOf(metric);
  const isRaised =
    thresholdDb !== null && thresholdDb > (law.thresholdDb ?? Number.NEGATIVE_INFINITY);
  const raised: MathPart[] = isRaised
    ? sumOf(thresholdDb, "+", levelFactor(asLaw(settings!)))
    : [value(level(levelDb))];
  return law.table
    ? [
        ...raised,
        sign("+"),
        value(number(levelFactor(law))),
        sign("lg ("),
        value(number(tableExcess(law))),
        sign(")"),
      ]
    : raised;
}

const thresholdOf = (metric: LevelMetric): number | null =>
  metric.kind === "lavg" ? metric.settings.thresholdDb : null;

/** Why a level counts as it does. */
function standsNote(
  metric: LevelMetric,
  law: ExchangeLaw,
  stands: Stands,
  side: Side,
): WorkingText[] {
  const values = { metric: words(metricText(metric)), rule: words(ruleText(law)) };
  switch (stands) {
    case "exact":
      return [];
    case "as-it-stands":
      return [
        side === "most"
          ? text(
              /*i18n*/ "{metric} under {rule}: the rule’s own average is never more, so the level counts as it stands, as an upper bound.",
              values,
            )
          : text(
              /*i18n*/ "{metric} under {rule}: the rule’s own average is never less, so the level counts as it stands, as a lower bound.",
              values,
            ),
      ];
    case "raised":
      return [
        text(
          /*i18n*/ "{metric} under {rule}: its threshold may hide noise of up to {threshold} dB; with that added the level is an upper bound.",
          {
            ...values,
            threshold: number(thresholdOf(metric)!),
          },
        ),
      ];
    case "reduced":
      return [
        text(
          /*i18n*/ "{metric} under {rule}: it counts noise below {threshold} dB too; with the most of that taken off the level is a lower bound.",
          { ...values, threshold: number(law.thresholdDb!) },
        ),
      ];
    case "by-table":
      return [
        text(
          /*i18n*/ "{metric} under {rule}: the table can ask up to {factor} times what its exchange rate does; with that added the level is an upper bound, and its allowed time follows from the exchange rate.",
          { ...values, factor: number(tableExcess(law)) },
        ),
      ];
    case "nothing":
      return [
        text(
          /*i18n*/ "{metric} under {rule}: it proves nothing about the least that the rule counts, so none of it is in the sum.",
          values,
        ),
      ];
    case "unbounded":
      return [
        text(
          /*i18n*/ "{metric} under {rule}: it proves nothing about the most that the rule counts, so it has no part in the sum.",
          values,
        ),
      ];
  }
}

export function metricText(metric: LevelMetric): WorkingText {
  if (metric.kind === "laeq") return { id: "LAeq" };
  if (metric.kind === "steady") return text(/*i18n*/ "steady level, slow");
  const { exchangeRateDb, thresholdDb } = metric.settings;
  const exchange = number(exchangeRateDb);
  return thresholdDb === null
    ? text(/*i18n*/ "LAVG {exchange} dB, no threshold", { exchange })
    : text(/*i18n*/ "LAVG {exchange} dB from {threshold} dB", {
        exchange,
        threshold: number(thresholdDb),
      });
}

function ruleText(law: ExchangeLaw): WorkingText {
  if (law.isEnergy) return text(/*i18n*/ "a rule by energy (3 dB)");
  const exchange = number(law.exchangeRateDb);
  if (law.table) return text(/*i18n*/ "a table of allowed times ({exchange} dB)", { exchange });
  return law.thresholdDb === null
    ? text(/*i18n*/ "a {exchange} dB rule without a threshold", { exchange })
    : text(/*i18n*/ "a {exchange} dB rule from {threshold} dB", {
        exchange,
        threshold: number(law.thresholdDb),
      });
}

/** A figure with the side on which it stands. */
export function boundedLevel(db: number | null, bound: Bound | null): WorkingValue | null {
  const plain = level(db);
  return plain && bounded(plain, bound);
}
