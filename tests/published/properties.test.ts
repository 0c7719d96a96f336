import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import { dosePct } from "../../shared/acoustics/dose";
import { lawOf } from "../../shared/acoustics/exchange-law";
import { cancellationDb } from "../../shared/acoustics/protection/active";
import type {
  Criterion,
  DayEvaluation,
  DayInput,
  LevelMetric,
  OctaveBandValues,
  RuleSetVersion,
  TaskLevel,
  TimedTask,
} from "../../shared/acoustics/types";
import { RULE_SETS } from "../../shared/rule-sets";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildProtector,
  buildShift,
  buildTask,
  dayOf,
  LAEQ,
  lavg5,
  ruleSet,
  STEADY,
  settings,
} from "./build-day";

const levelDb = fc.double({ min: 55, max: 120, noNaN: true });
const durationMin = fc.integer({ min: 1, max: 240 });
const metric = fc.constantFrom<LevelMetric>(LAEQ, STEADY, lavg5(80), lavg5(90), lavg5(null), {
  kind: "lavg",
  settings: settings(3, 80),
});
const level = fc
  .record({
    levelDb,
    metric,
    samples: fc.array(fc.double({ min: -2, max: 2, noNaN: true }), { minLength: 2, maxLength: 4 }),
  })
  .map(({ levelDb: db, metric: kind, samples }) =>
    buildLevel(db, {
      metric: kind,
      lcMinusLaDb: 1,
      samplesDb: samples.map((offset) => db + offset),
      instrument: "dosimeter",
    }),
  );
const protection = fc.option(
  fc
    .record({ snrDb: fc.integer({ min: 5, max: 37 }), usRatingDb: fc.integer({ min: 5, max: 33 }) })
    .map((data) => buildProtection(data)),
  { nil: null },
);
const wornPct = fc.option(fc.integer({ min: 0, max: 100 }), { nil: null });
const tasks = fc
  .array(fc.record({ level, durationMin, protection, wornPct }), { minLength: 1, maxLength: 5 })
  .map((drafts) =>
    drafts.map((draft, index) =>
      buildTask(`task-${index}`, draft.durationMin, draft.level, {
        protection: draft.protection,
        wornPct: draft.wornPct,
      }),
    ),
  );
const governing = fc.constantFrom(...RULE_SETS);

const near = (a: number | null, b: number | null) =>
  a === null || b === null ? a === b : Math.abs(a - b) <= 1e-7 * Math.max(1, Math.abs(a));

function expectSame(a: DayEvaluation, b: DayEvaluation): void {
  expect(a.criteria.length).toBe(b.criteria.length);
  for (const [index, one] of a.criteria.entries()) {
    const other = b.criteria[index]!;
    // A bound that lies on its value to the last bit may fall on either side of it.
    expect([one.criterionId, one.verdict]).toEqual([other.criterionId, other.verdict]);
    expect(near(one.levelDb, other.levelDb)).toBe(true);
    expect(near(one.dosePct, other.dosePct)).toBe(true);
  }
  expect(near(a.atEarDb, b.atEarDb)).toBe(true);
  expect(near(a.uncertaintyDb, b.uncertaintyDb)).toBe(true);
  expect(a.word).toBe(b.word);
}

const evaluate = (day: DayInput, rules: RuleSetVersion) => evaluateDay(day, rules, RULE_SETS);

describe("what must not change a result", () => {
  test("splitting a task in two", () => {
    fc.assert(
      fc.property(
        tasks,
        governing,
        fc.double({ min: 0.1, max: 0.9, noNaN: true }),
        (list, rules, share) => {
          const [first, ...rest] = list;
          const part = (id: string, of: number): TimedTask => ({
            ...first!,
            id,
            durationMin: first!.durationMin * of,
          });
          expectSame(
            evaluate(dayOf(...list), rules),
            evaluate(dayOf(part("a", share), part("b", 1 - share), ...rest), rules),
          );
        },
      ),
      { numRuns: 150 },
    );
  });

  test("the order of tasks", () => {
    fc.assert(
      fc.property(tasks, governing, (list, rules) => {
        expectSame(evaluate(dayOf(...list), rules), evaluate(dayOf(...list.toReversed()), rules));
      }),
      { numRuns: 150 },
    );
  });

  test("two shifts instead of one", () => {
    fc.assert(
      fc.property(tasks, governing, (list, rules) => {
        const shifts = list.map((task) => buildShift(task.durationMin, [task], { id: task.id }));
        expectSame(evaluate(dayOf(...list), rules), evaluate(buildDay(shifts), rules));
      }),
      { numRuns: 150 },
    );
  });
});

describe("monotony", () => {
  test("more noise never lowers a dose", () => {
    const law = lawOf(ruleSet("us-general-industry").criteria[0]!);
    fc.assert(
      fc.property(
        fc.array(fc.record({ levelDb, durationMin }), { minLength: 1 }),
        fc.double({ min: 0, max: 10, noNaN: true }),
        (parts, moreDb) => {
          const louder = parts.map((part) => ({ ...part, levelDb: part.levelDb + moreDb }));
          expect(dosePct(louder, law)).toBeGreaterThanOrEqual(dosePct(parts, law));
        },
      ),
    );
  });

  test("more noise never turns Over into Under", () => {
    fc.assert(
      fc.property(
        tasks,
        governing,
        fc.double({ min: 0, max: 15, noNaN: true }),
        (list, rules, moreDb) => {
          const bare = list.map((task) => ({ ...task, protection: null }));
          const louder = bare.map((task) => ({
            ...task,
            level: { ...task.level!, levelDb: task.level!.levelDb + moreDb },
          }));
          const before = evaluate(dayOf(...bare), rules).criteria;
          const after = evaluate(dayOf(...louder), rules).criteria;
          for (const [index, { verdict }] of before.entries()) {
            if (verdict === "over") expect(after[index]!.verdict).toBe("over");
          }
        },
      ),
      { numRuns: 150 },
    );
  });

  test("wearing it longer never raises the level", () => {
    fc.assert(
      fc.property(
        levelDb,
        fc.integer({ min: 0, max: 100 }),
        fc.integer({ min: 0, max: 100 }),
        (db, one, other) => {
          const atEar = (pct: number) =>
            evaluateDay(
              dayOf(
                buildTask("press", 480, buildLevel(db, { lcMinusLaDb: 0 }), {
                  protection: buildProtection({ snrDb: 25 }),
                  wornPct: pct,
                  zone: "single",
                }),
              ),
              ruleSet("eu-2003-10-ec"),
              [],
            ).atEarDb!;
          expect(atEar(Math.max(one, other))).toBeLessThanOrEqual(
            atEar(Math.min(one, other)) + 1e-9,
          );
        },
      ),
    );
  });

  test("a canceller is bounded by its gain", () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0.01, max: 0.99, noNaN: true }),
        fc.double({ min: 0, max: Math.PI, noNaN: true }),
        (gain, phaseRad) => {
          expect(cancellationDb(gain, phaseRad)).toBeLessThanOrEqual(
            -20 * Math.log10(1 - gain) + 1e-9,
          );
        },
      ),
    );
  });
});

describe("the day's engine and the plain formula", () => {
  test("agree on steady levels", () => {
    const rules = ruleSet("us-general-industry");
    fc.assert(
      fc.property(
        fc.array(fc.record({ levelDb, durationMin }), { minLength: 1, maxLength: 6 }),
        (parts) => {
          const list = parts.map((part, index) =>
            buildTask(
              `task-${index}`,
              part.durationMin,
              buildLevel(part.levelDb, { metric: STEADY }),
            ),
          );
          const { criteria } = evaluateDay(dayOf(...list), rules, []);
          for (const index of [0, 1]) {
            expect(
              near(criteria[index]!.dosePct, dosePct(parts, lawOf(rules.criteria[index]!))),
            ).toBe(true);
          }
        },
      ),
    );
  });
});

const bands = fc.tuple(
  ...Array.from({ length: 8 }, () => fc.double({ min: 40, max: 110, noNaN: true })),
) as unknown as fc.Arbitrary<OctaveBandValues>;
const lossDb = fc.tuple(
  ...Array.from({ length: 8 }, () => fc.double({ min: 0, max: 45, noNaN: true })),
) as unknown as fc.Arbitrary<OctaveBandValues>;
const gainDb = fc.tuple(
  ...Array.from({ length: 8 }, () => fc.double({ min: -6, max: 20, noNaN: true })),
) as unknown as fc.Arbitrary<OctaveBandValues>;

describe("a protector never raises the level", () => {
  test("by any method, any rule set, any label", () => {
    const label = fc.record({
      usRatingDb: fc.integer({ min: 0, max: 33 }),
      snrDb: fc.integer({ min: 0, max: 37 }),
      slc80Db: fc.integer({ min: 0, max: 33 }),
      kind: fc.constantFrom("earmuff", "foam-plug", "premoulded-plug", "level-dependent"),
    });
    fc.assert(
      fc.property(
        levelDb,
        bands,
        lossDb,
        label,
        fc.double({ min: -2, max: 12, noNaN: true }),
        governing,
        (db, spectrum, meanDb, data, lcMinusLaDb, rules) => {
          const sdDb: OctaveBandValues = [6, 6, 6, 6, 6, 6, 6, 6];
          const worn = buildTask(
            "press",
            480,
            buildLevel(db, { octaveBandsDb: spectrum, lcMinusLaDb, metric: STEADY }),
            {
              protection: buildProtection({ ...data, bands: { meanDb, sdDb } } as never),
              wornPct: 100,
              zone: "single",
            },
          );
          const evaluation = evaluateDay(dayOf(worn), rules, []);
          for (const { atEarDb } of evaluation.tasks[0]!.methods) {
            if (atEarDb !== null) expect(atEarDb).toBeLessThanOrEqual(db + 1e-9);
          }
          if (evaluation.atEarDb !== null)
            expect(evaluation.atEarDb).toBeLessThanOrEqual(db + 1e-9);
        },
      ),
    );
  });

  test("unless its active part adds noise in some band", () => {
    fc.assert(
      fc.property(bands, lossDb, gainDb, (spectrum, meanDb, attenuationDb) => {
        const active = {
          attenuationDb,
          delayS: null,
          gain: null,
          maximumDb: null,
          bandwidthHz: null,
          saturatesAboveDb: null,
          batteryMin: null,
        };
        const sdDb: OctaveBandValues = [0, 0, 0, 0, 0, 0, 0, 0];
        const inner = buildProtector({ kind: "active-earmuff", bands: { meanDb, sdDb }, active });
        const task = buildTask("run-up", 480, buildLevel(100, { octaveBandsDb: spectrum }), {
          protection: buildProtection({}, { inner }),
          wornPct: 100,
        });
        const [seen] = evaluateDay(dayOf(task), ruleSet("eu-2003-10-ec"), []).tasks;
        const addsSomewhere = attenuationDb.some((db) => db! < 0);
        if (seen!.wornActiveDb! > seen!.wornDb! + 1e-9) expect(addsSomewhere).toBe(true);
      }),
    );
  });

  test("the day as worked lies between on and off, and more battery moves it towards on", () => {
    fc.assert(
      fc.property(
        bands,
        gainDb,
        fc.integer({ min: 0, max: 480 }),
        fc.integer({ min: 0, max: 480 }),
        (spectrum, attenuationDb, one, other) => {
          const asWorked = (batteryMin: number) => {
            const inner = buildProtector({
              bands: { meanDb: [12, 14, 18, 25, 30, 34, 36, 36], sdDb: [2, 2, 2, 2, 2, 2, 2, 2] },
              active: {
                attenuationDb,
                delayS: null,
                gain: null,
                maximumDb: null,
                bandwidthHz: null,
                saturatesAboveDb: null,
                batteryMin,
              },
            });
            const task = buildTask("run-up", 480, buildLevel(100, { octaveBandsDb: spectrum }), {
              protection: buildProtection({}, { inner }),
              wornPct: 100,
            });
            return evaluateDay(dayOf(task), ruleSet("eu-2003-10-ec"), []);
          };
          const [shorter, longer] = [
            asWorked(Math.min(one, other)),
            asWorked(Math.max(one, other)),
          ];
          const { atEarDb, atEarActiveDb } = longer;
          const helps = atEarActiveDb! <= atEarDb!;
          const [a, b] = [longer.atEarAsWorkedDb!, shorter.atEarAsWorkedDb!];
          if (helps) expect(a).toBeLessThanOrEqual(b + 1e-9);
          else expect(a).toBeGreaterThanOrEqual(b - 1e-9);
          expect(a).toBeGreaterThanOrEqual(Math.min(atEarDb!, atEarActiveDb!) - 1e-9);
          expect(a).toBeLessThanOrEqual(Math.max(atEarDb!, atEarActiveDb!) + 1e-9);
        },
      ),
    );
  });
});

/**
 * A time history of slow levels, one value a second, in runs of random length and level, many of them about the
 * thresholds of 80, 85 and 90 dB.
 */
const historyLevelDb = fc.oneof(
  fc.double({ min: 50, max: 118, noNaN: true }),
  fc.double({ min: 76, max: 94, noNaN: true }),
);
const history = fc
  .array(
    fc.record({
      seconds: fc.integer({ min: 1, max: 300 }),
      levelDb: historyLevelDb,
      swingDb: fc.double({ min: 0, max: 12, noNaN: true }),
    }),
    { minLength: 1, maxLength: 6 },
  )
  .map((runs) =>
    runs.flatMap(({ seconds, levelDb: db, swingDb }) =>
      Array.from({ length: seconds }, (_, second) => db + swingDb * Math.sin(second)),
    ),
  );

/** Criteria that add noise up, each with its rule set. */
const ADDED_UP = RULE_SETS.flatMap(({ key, criteria }) =>
  criteria
    .filter(
      ({ quantity }) => quantity === "lex-8h" || quantity === "dose" || quantity === "table-dose",
    )
    .map((criterion) => ({ key, criterion })),
);

/** Minutes for which a history comes out near a criterion's value, where a wrong bound would show. */
function minutesNear(
  levels: readonly number[],
  criterion: Criterion,
  factor: number,
): number | null {
  const amount = exactAmount(levels, 480, criterion);
  if (amount === null || !Number.isFinite(amount) || amount === 0) return null;
  const ratio =
    criterion.quantity === "lex-8h"
      ? 10 ** ((criterion.value - amount) / 10)
      : criterion.value / amount;
  return 480 * ratio * factor;
}

/** 3 dB means equal energy here, as an averaging instrument takes it; a rule's own halving differs by 0.03 dB at most. */
const EQUAL_ENERGY_DB = 10 * Math.log10(2);

function meanDb(
  levels: readonly number[],
  exchangeRateDb: number,
  thresholdDb: number | null,
): number {
  const rate = exchangeRateDb === 3 ? EQUAL_ENERGY_DB : exchangeRateDb;
  let sum = 0;
  for (const db of levels) if (thresholdDb === null || db >= thresholdDb) sum += 2 ** (db / rate);
  return rate * Math.log2(sum / levels.length);
}

/** The amount that a criterion compares, second by second; null where it isn't one of a dose or a level. */
function exactAmount(
  levels: readonly number[],
  minutes: number,
  criterion: Criterion,
): number | null {
  const law = lawOf(criterion);
  if (criterion.quantity === "lex-8h")
    return meanDb(levels, 3, null) + 10 * Math.log10(minutes / 480);
  if (criterion.quantity === "dose") {
    const db = meanDb(levels, law.exchangeRateDb, law.thresholdDb);
    const rate = law.exchangeRateDb === 3 ? EQUAL_ENERGY_DB : law.exchangeRateDb;
    return ((100 * minutes) / 480) * 2 ** ((db - law.criterionLevelDb) / rate);
  }
  const each = minutes / levels.length;
  return dosePctByTable(levels, each, criterion);
}

function dosePctByTable(levels: readonly number[], eachMin: number, { table }: Criterion): number {
  let sum = 0;
  for (const db of levels) {
    const row = table!.find(([rowDb]) => db <= rowDb) ?? table!.at(-1)!;
    if (db >= table![0]![0]) sum += eachMin / row[1];
  }
  return 100 * sum;
}

const MEANS: readonly (readonly [string, number, number | null])[] = [
  ["LAeq", 3, null],
  ["3 dB from 80", 3, 80],
  ["5 dB", 5, null],
  ["5 dB from 80", 5, 80],
  ["5 dB from 90", 5, 90],
  ["4 dB from 80", 4, 80],
];

describe("a one-sided proof never contradicts the exact verdict", () => {
  test.each(MEANS)("from an average by %s", (_name, exchangeRateDb, thresholdDb) => {
    fc.assert(
      fc.property(
        history,
        fc.constantFrom(...ADDED_UP),
        fc.double({ min: 0.6, max: 1.6, noNaN: true }),
        (levels, aim, factor) => {
          const minutes = minutesNear(levels, aim.criterion, factor);
          fc.pre(minutes !== null && minutes < 1e6);
          const averageDb = meanDb(levels, exchangeRateDb, thresholdDb);
          fc.pre(Number.isFinite(averageDb));
          const averaged: LevelMetric = {
            kind: "lavg",
            settings: settings(exchangeRateDb, thresholdDb),
          };
          const task: TaskLevel = buildLevel(averageDb, {
            metric: exchangeRateDb === 3 && thresholdDb === null ? LAEQ : averaged,
          });
          const evaluation = evaluateDay(
            dayOf(buildTask("history", minutes, task)),
            RULE_SETS[0]!,
            RULE_SETS,
          );
          for (const { key, criterion } of ADDED_UP) {
            const result = evaluation.criteria.find(
              ({ ruleSetKey, criterionId }) => ruleSetKey === key && criterionId === criterion.id,
            )!;
            if (criterion.quantity === "table-dose" && result.bound === "exact") continue; // a mean put into a table
            const exact = exactAmount(levels, minutes, criterion)!;
            // 2^(x/3) against 10^(x/10), x dB from the criterion level: at most 4 % of a dose at these levels.
            const slack =
              criterion.exchangeRateDb === 3 && criterion.quantity === "dose" ? 0.04 : 1e-6;
            const isOver =
              criterion.comparator === "exceeds"
                ? exact > criterion.value
                : exact >= criterion.value;
            if (result.verdict === "over" && !isOver) {
              expect(exact).toBeGreaterThanOrEqual(criterion.value * (1 - slack));
            }
            if (result.verdict === "under" && isOver) {
              expect(exact).toBeLessThanOrEqual(criterion.value * (1 + slack));
            }
          }
        },
      ),
      { numRuns: 150 },
    );
  });

  test("and an average under the criterion's own settings is exact", () => {
    fc.assert(
      fc.property(history, (levels) => {
        for (const thresholdDb of [80, 90]) {
          const averageDb = meanDb(levels, 5, thresholdDb);
          if (!Number.isFinite(averageDb)) continue;
          const task = buildLevel(averageDb, { metric: lavg5(thresholdDb) });
          const [action, limit] = evaluateDay(
            dayOf(buildTask("history", 480, task)),
            ruleSet("us-general-industry"),
            [],
          ).criteria;
          const result = thresholdDb === 80 ? action! : limit!;
          const criterion = ruleSet("us-general-industry").criteria[thresholdDb === 80 ? 0 : 1]!;
          expect(result.bound).toBe("exact");
          expect(near(result.dosePct, exactAmount(levels, 480, criterion))).toBe(true);
        }
      }),
      { numRuns: 60 },
    );
  });
});
