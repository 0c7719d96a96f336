import { describe, expect, test } from "vitest";
import {
  buildDay,
  buildLevel,
  buildProtection,
  buildProtector,
  buildReading,
  buildShift,
  buildTask,
  dayOf,
  lavg5,
  STEADY,
  settings,
} from "../../tests/published/build-day";
import { ENGINE_VECTORS } from "../../tests/published/vectors";
import { RULE_SETS } from "../rule-sets";
import { evaluateDay } from "./day";
import { lawOf, tableAllowedMin } from "./exchange-law";
import { outsideCriterion } from "./outside-criterion";
import type { DayInput, RuleSetVersion } from "./types";
import { buildWorking, type MathPart, type Working, type WorkingTable } from "./working";
import type { WorkingEquation, WorkingValue } from "./working-parts";

/** What a printed value says, as a number. */
function numberOf(value: WorkingValue): number {
  switch (value.kind) {
    case "level":
    case "difference":
      return value.db;
    case "minutes":
      return value.min;
    case "share":
    case "dose":
      return value.pct;
    case "scientific":
    case "number":
      return value.number;
    default:
      throw new Error(`${value.kind} is no number`);
  }
}

const RELATIONS = new Set(["=", "≤", "≥"]);
const isRelation = (part: MathPart) => part.kind === "sign" && RELATIONS.has(part.text);

/** The terms of an equation between its relations. A sign may begin with one ("= 10 lg"). */
function termsOf(parts: readonly MathPart[]): MathPart[][] {
  const terms: MathPart[][] = [[]];
  for (const part of parts) {
    const begins = part.kind === "sign" ? /^([=≤≥])\s*(.*)$/.exec(part.text) : null;
    if (begins) {
      terms.push(begins[2] ? [{ kind: "sign", text: begins[2] }] : []);
    } else terms[terms.length - 1]!.push(part);
  }
  return terms;
}

function hasLetters(parts: readonly MathPart[]): boolean {
  return parts.some((part) => {
    if (part.kind === "symbol" || part.kind === "sum") return true;
    if (part.kind === "fraction") return hasLetters(part.over) || hasLetters(part.under);
    return part.kind === "power" && hasLetters(part.exponent);
  });
}

/** A term as tokens: numbers, and the signs of ordinary arithmetic. */
function tokensOf(parts: readonly MathPart[]): (string | number)[] {
  return parts.flatMap((part): (string | number)[] => {
    switch (part.kind) {
      case "value":
        return [numberOf(part.value)];
      case "fraction":
        return ["(", ...tokensOf(part.over), ")", "/", "(", ...tokensOf(part.under), ")"];
      case "power":
        return [Number(part.base), "^", "(", ...tokensOf(part.exponent), ")"];
      case "sign":
        return (part.text.match(/[\d.]+|min|max|lg|[^\s]/g) ?? []).map((token) =>
          /^\d/.test(token) ? Number(token) : token,
        );
      default:
        throw new Error(`${part.kind} has no number put in`);
    }
  });
}

/** Ordinary arithmetic, with 10 lg (x) a product without its sign. */
function calculate(parts: readonly MathPart[]): number {
  const tokens = tokensOf(parts);
  let at = 0;
  const take = (token: string) => {
    if (tokens[at] !== token) throw new Error(`${token} expected in ${tokens.join(" ")}`);
    at += 1;
  };
  const list = (): number[] => {
    take("(");
    const values = [sum()];
    while (tokens[at] === ",") {
      at += 1;
      values.push(sum());
    }
    take(")");
    return values;
  };
  function atom(): number {
    const token = tokens[at];
    if (typeof token === "number") {
      at += 1;
      return token;
    }
    if (token === "(") return list()[0]!;
    at += 1;
    if (token === "lg") return Math.log10(list()[0]!);
    if (token === "√") return Math.sqrt(list()[0]!);
    if (token === "min") return Math.min(...list());
    if (token === "max") return Math.max(...list());
    if (token === "−") return -raised();
    throw new Error(`${token} not understood in ${tokens.join(" ")}`);
  }
  function raised(): number {
    const base = atom();
    if (tokens[at] !== "^") return base;
    at += 1;
    return base ** atom();
  }
  function product(): number {
    let result = raised();
    for (;;) {
      const token = tokens[at];
      if (token === "·") {
        at += 1;
        result *= raised();
      } else if (token === "/") {
        at += 1;
        result /= raised();
      } else if (token === "lg" || token === "√") result *= raised();
      else return result;
    }
  }
  function sum(): number {
    let result = product();
    while (tokens[at] === "+" || tokens[at] === "−") {
      const by = tokens[at] === "+" ? 1 : -1;
      at += 1;
      result += by * product();
    }
    return result;
  }
  const result = sum();
  if (at !== tokens.length) throw new Error(`not all of ${tokens.join(" ")} was read`);
  return result;
}

const near = (found: number, stated: number) =>
  expect(Math.abs(found - stated)).toBeLessThanOrEqual(1e-7 * Math.max(1, Math.abs(stated)));

function resultOf({ parts }: WorkingEquation): number {
  const last = parts[parts.length - 1];
  if (last?.kind !== "value" || !last.isResult) throw new Error("an equation without its result");
  return numberOf(last.value);
}

/** Every term of an equation that has its numbers put in gives its result; says how many there were. */
function checkEquation(equation: WorkingEquation): number {
  const stated = resultOf(equation);
  const terms = termsOf(equation.parts).slice(1, -1);
  const numeric = terms.filter((term) => term.length > 0 && !hasLetters(term));
  for (const term of numeric) near(calculate(term), stated);
  return numeric.length;
}

type Cells = Record<string, WorkingValue | null>;
const rowsOf = ({ columns, rows }: WorkingTable) =>
  rows.map((row) => ({
    isTotal: row.isTotal,
    cells: Object.fromEntries(
      columns.map(({ id }, index) => [id, row.cells[index] ?? null]),
    ) as Cells,
  }));
const read = (cells: Cells, id: string): number | null => {
  const cell = cells[id];
  // In words where nothing counts.
  return cell && cell.kind !== "text" ? numberOf(cell) : null;
};

function checkSum(table: WorkingTable, id: string): void {
  const rows = rowsOf(table);
  const total = rows.find(({ isTotal }) => isTotal);
  const stated = total && read(total.cells, id);
  if (stated == null) return;
  near(
    rows.reduce((sum, { isTotal, cells }) => sum + (isTotal ? 0 : (read(cells, id) ?? 0)), 0),
    stated,
  );
}

/** A table of tasks: the counted level gives the allowed time, that the dose, and the rows their sum. */
function checkNoise(table: WorkingTable, ruleSet: RuleSetVersion): void {
  // A table of one of several laws bears its criterion's name.
  const criterion = ruleSet.criteria.find(({ label }) => label === table.title?.id);
  const law = lawOf(criterion ?? outsideCriterion(ruleSet));
  for (const { cells, isTotal } of rowsOf(table)) {
    const levelDb = read(cells, "level");
    if (isTotal) continue;
    const min = read(cells, "minutes")!;
    const energy = read(cells, "energy");
    if (energy !== null) {
      near(levelDb === null ? 0 : (min / 480) * 10 ** (levelDb / 10), energy);
    }
    const allowed = read(cells, "allowed");
    const dosePct = read(cells, "dose");
    if (allowed !== null) {
      const byRate = 480 / 2 ** ((levelDb! - law.criterionLevelDb) / law.exchangeRateDb);
      const byTable = law.table ? tableAllowedMin(levelDb!, law.table) : byRate;
      // A bound counts by the table's exchange rate, and its note says so.
      const isBound = cells["on-record"] && read(cells, "on-record") !== levelDb;
      near(isBound ? byRate : byTable, allowed);
      near((100 * min) / allowed, dosePct!);
    } else if (dosePct !== null) {
      expect(dosePct).toBe(0);
      if (levelDb !== null) expect(levelDb).toBeLessThan(law.thresholdDb ?? law.table![0]![0]);
    }
  }
  for (const id of ["minutes", "energy", "dose"]) checkSum(table, id);
}

function checkDayAtEar(table: WorkingTable, working: Working, factor: number): void {
  const equations = working.steps.flatMap((step) => step.equations);
  const scales = equations
    .filter(({ parts }) => parts[0]?.kind === "symbol" && parts[0].base === "s")
    .map(resultOf);
  for (const { cells, isTotal } of rowsOf(table)) {
    if (isTotal) continue;
    const min = read(cells, "minutes")!;
    const term = (id: string) => {
      const db = read(cells, id);
      return db === null ? 0 : (min / 480) * 10 ** (db / factor);
    };
    const isScaled = "bare-term" in cells;
    if (isScaled) near(term("bare"), read(cells, "bare-term")!);
    const candidates = isScaled ? [1, ...scales] : [1];
    const stated = read(cells, "term")!;
    const errors = candidates.map((scale) => Math.abs(scale * term("in-task") - stated));
    expect(Math.min(...errors)).toBeLessThanOrEqual(1e-7 * Math.max(1, stated));
    const on = read(cells, "term-on");
    if (on !== null && !isScaled) near(term("in-task-on"), on);
    const worn = read(cells, "worn")!;
    if (worn === 0) expect(read(cells, "in-task")).toBe(read(cells, "bare"));
  }
  for (const id of ["minutes", "bare-term", "term", "term-on", "as-worked"]) checkSum(table, id);
}

function checkBands(table: WorkingTable, alpha: number): void {
  const rows = rowsOf(table);
  const sums: Record<string, number> = {};
  for (const { cells, isTotal } of rows) {
    if (isTotal) {
      for (const [id, sum] of Object.entries(sums)) near(10 * Math.log10(sum), read(cells, id)!);
      continue;
    }
    near(read(cells, "level")! + read(cells, "weighting")!, read(cells, "exposed")!);
    near(read(cells, "mean")! - alpha * read(cells, "deviation")!, read(cells, "assumed")!);
    const credited = read(cells, "credited") ?? read(cells, "assumed")!;
    expect(credited).toBeLessThanOrEqual(read(cells, "assumed")!);
    near(read(cells, "exposed")! - credited, read(cells, "behind")!);
    if (cells["behind-on"]) {
      near(read(cells, "behind")! - read(cells, "active")!, read(cells, "behind-on")!);
    }
    for (const id of ["exposed", "behind", "behind-on"]) {
      const db = read(cells, id);
      if (db !== null) sums[id] = (sums[id] ?? 0) + 10 ** (db / 10);
    }
  }
}

const RUMBLE = [103.4, 104.1, 101.7, 94.2, 88.9, 83.3, 77.1, 70.6] as const;
const BANDS = {
  meanDb: [13.1, 14.6, 19.8, 27.3, 33.5, 34.9, 36.2, 35.8],
  sdDb: [2.4, 2.2, 1.9, 2.1, 2.6, 2.8, 2.3, 3.1],
} as const;
const ALL_DATA = {
  usRatingDb: 25,
  snrDb: 28,
  hDb: 31,
  mDb: 25,
  lDb: 17,
  slc80Db: 24,
  bands: BANDS,
} as const;
const LAEQ = { ...settings(3, null), criterionLevelDb: 85 };

const DAYS: readonly { readonly name: string; readonly day: DayInput }[] = [
  ...ENGINE_VECTORS,
  ...[STEADY, lavg5(80), lavg5(90), lavg5(null), { kind: "laeq" } as const].map((metric) => ({
    name: `every level a ${metric.kind} ${"settings" in metric ? metric.settings.thresholdDb : ""}, a muff with all its data`,
    day: dayOf(
      buildTask(
        "mill",
        260,
        buildLevel(97.3, { metric, lcMinusLaDb: 1.3, octaveBandsDb: RUMBLE }),
        { protection: buildProtection(ALL_DATA), wornPct: 91 },
      ),
      buildTask("saw", 90, buildLevel(92.8, { metric }), {
        protection: buildProtection(ALL_DATA, { ownFitDb: 13 }),
        wornPct: 100,
      }),
      buildTask("yard", 130, buildLevel(78.4, { metric })),
    ),
  })),
  {
    name: "levels of all kinds in one day",
    day: dayOf(
      buildTask("a", 120, buildLevel(93.1, { metric: lavg5(90) })),
      buildTask("b", 120, buildLevel(91.4)),
      buildTask("c", 240, buildLevel(88.6, { metric: STEADY })),
    ),
  },
  {
    name: "a reading at 5 dB over unsteady tasks, and one by energy",
    day: buildDay([
      buildShift(
        480,
        [buildTask("a", 300, buildLevel(94.2)), buildTask("b", 180, buildLevel(86))],
        {
          readings: [
            buildReading(settings(5, 90), { dosePct: 61.3, durationMin: 470 }),
            buildReading(LAEQ, { id: "other", averageDb: 92.4, durationMin: 470 }),
          ],
        },
      ),
    ]),
  },
  {
    name: "a reading under a criterion of 85 dB, a dose without an average",
    day: buildDay([
      buildShift(600, [buildTask("a", 600, buildLevel(91.7))], {
        readings: [
          buildReading(
            { ...settings(5, 80), criterionLevelDb: 85 },
            { dosePct: 220, durationMin: 400, covers: "projected" },
          ),
          buildReading(
            { ...LAEQ, criterionLevelDb: 90 },
            { id: "e", dosePct: 90, durationMin: 600 },
          ),
        ],
      }),
    ]),
  },
  {
    name: "two shifts, a reading in one, time like the rest in the other, protectors in both",
    day: buildDay(
      [
        buildShift(
          300,
          [
            buildTask("a", 290, buildLevel(95.5, { metric: lavg5(80), lcMinusLaDb: 0.4 }), {
              protection: buildProtection(ALL_DATA),
              wornPct: 80,
            }),
          ],
          {
            id: "one",
            unaccounted: { how: "quiet", levelDb: 62 },
            readings: [
              buildReading(settings(5, 80), { dosePct: 120, averageDb: 94.6, durationMin: 290 }),
              buildReading(LAEQ, { id: "e", averageDb: 95.9, durationMin: 300 }),
            ],
          },
        ),
        buildShift(
          300,
          [
            buildTask("b", 200, buildLevel(96.1, { lcMinusLaDb: 0.4 }), {
              protection: buildProtection(ALL_DATA),
              wornPct: 95,
            }),
          ],
          { id: "two", unaccounted: { how: "like-the-rest" } },
        ),
      ],
      { usesUncertainty: true },
    ),
  },
  ...[STEADY, lavg5(80), lavg5(90), lavg5(null), { kind: "laeq" } as const].map((metric) => ({
    name: `programme audio under a muff, the level a ${metric.kind} ${"settings" in metric ? metric.settings.thresholdDb : ""}`,
    day: dayOf(
      buildTask("mill", 300, buildLevel(97.3, { metric, lcMinusLaDb: 1.3 }), {
        protection: buildProtection(ALL_DATA, { audioDb: 77 }),
        wornPct: 91,
      }),
      buildTask("yard", 180, buildLevel(78.4, { metric })),
    ),
  })),
  {
    name: "two protectors, and one whose rating would raise the level",
    day: dayOf(
      buildTask("bells", 200, buildLevel(101, { metric: STEADY }), {
        protection: buildProtection(
          { kind: "foam-plug", usRatingDb: 30 },
          { outer: buildProtector({ modelId: "outer", usRatingDb: 22 }) },
        ),
        wornPct: 97,
      }),
      buildTask("doors", 200, buildLevel(91, { metric: STEADY }), {
        protection: buildProtection({ kind: "banded-plug", usRatingDb: 5, snrDb: 3 }),
        wornPct: 100,
      }),
      buildTask("hums", 80, buildLevel(90.5, { metric: STEADY, lcMinusLaDb: 7 }), {
        protection: buildProtection({ snrDb: 4, slc80Db: 3, usRatingDb: 5 }),
        wornPct: 50,
      }),
    ),
  },
];

describe.each(DAYS)("working of $name: each step's numbers give what it states", ({ day }) => {
  test.each(RULE_SETS.map((ruleSet) => [ruleSet.key, ruleSet] as const))("%s", (_key, ruleSet) => {
    const derated: RuleSetVersion[] = (["half", "by-type"] as const).map((derating) => ({
      ...ruleSet,
      protection: {
        ...ruleSet.protection,
        methods: ["us-single-number"],
        derating,
        double: "better-plus-5",
      },
    }));
    for (const governing of [ruleSet, ...derated]) {
      const evaluation = evaluateDay(day, governing, []);
      const working = buildWorking(day, governing, [], evaluation);
      check(working, governing, evaluation);
    }
  });
});

function check(
  working: Working,
  ruleSet: RuleSetVersion,
  evaluation: ReturnType<typeof evaluateDay>,
): void {
  const step = (title: string) => working.steps.find((one) => one.title.id.startsWith(title));
  const noise = step("Noise without")!;
  for (const table of noise.tables) checkNoise(table, ruleSet);
  const doses = noise.tables.flatMap((table) =>
    rowsOf(table).flatMap(({ isTotal, cells }) => (isTotal ? (read(cells, "dose") ?? []) : [])),
  );
  for (const one of working.steps) {
    for (const equation of [
      ...one.equations,
      ...one.details.flatMap(({ equations }) => equations),
    ]) {
      // The dose is the sum that stands over it; all others have their numbers put in.
      if (checkEquation(equation) === 0) {
        const stated = resultOf(equation);
        expect(doses.some((sum) => Math.abs(sum - stated) < 1e-7 * Math.max(1, sum))).toBe(true);
      }
    }
    for (const { tables } of one.details) {
      for (const table of tables) checkBands(table, ruleSet.protection.alpha);
    }
    for (const table of one.tables) {
      for (const id of ["amount", "square"]) checkSum(table, id);
    }
  }
  // Outside: the last level of the noise or, where there are readings that count, of theirs.
  const law = lawOf(outsideCriterion(ruleSet));
  const levels = [noise, step("Readings on")].flatMap((one) =>
    (one?.equations ?? [])
      .filter(({ parts }) => {
        const [first] = parts;
        return (
          first?.kind === "symbol" &&
          (first.base === "TWA" || first.sub === "EX,8h") &&
          parts.some(isRelation)
        );
      })
      .map(resultOf),
  );
  const outside = working.lines.find(({ id }) => id === "without-protection")?.level;
  if (evaluation.outsideDb !== null) {
    expect(outside).toMatchObject({ db: evaluation.outsideDb });
    expect(levels.some((db) => Math.abs(db - evaluation.outsideDb!) < 1e-7)).toBe(true);
  } else expect(outside).toBeNull();
  for (const result of evaluation.criteria) {
    if (result.judged !== "without-protection" || result.dosePct === null) continue;
    if (result.levelDb === null) continue;
    expect(levels.some((db) => Math.abs(db - result.levelDb!) < 1e-7)).toBe(true);
  }
  checkWhileWorn(working, evaluation);
  const atEar = step("The day at the ear");
  if (atEar && evaluation.atEarDb !== null) {
    checkDayAtEar(
      atEar.tables[0]!,
      working,
      law.isEnergy ? 10 : law.exchangeRateDb / Math.log10(2),
    );
    near(
      resultOf(atEar.equations[atEar.equations.length - 1]!),
      evaluation.counted?.atEarDb ?? evaluation.atEarDb,
    );
  }
}

/** The head's figure while worn is what an equation of the deciding task ends in, by its sign, and its row's. */
function checkWhileWorn(working: Working, evaluation: ReturnType<typeof evaluateDay>): void {
  const head = working.lines.find(({ id }) => id === "protector")?.level;
  if (!head) return;
  const worn = working.steps.find(({ title }) => title.id.startsWith("What the protector does"))!;
  const name = worn.tables[0]!.rows.find(({ id }) => id === evaluation.decidingTaskId)!.cells[0];
  const relation = boundSign(head);
  const found = worn.equations.filter(
    (equation) =>
      JSON.stringify(equation.label) === JSON.stringify(name) &&
      Math.abs(resultOf(equation) - numberOf(head)) < 1e-7,
  );
  expect(found.map(({ parts }) => parts.find(isRelation))).toContainEqual({
    kind: "sign",
    text: relation,
  });
  const row = rowsOf(worn.tables[0]!).find(
    ({ cells }) => JSON.stringify(cells.task) === JSON.stringify(name),
  )!;
  // With the active part on where it is credited.
  const cells = [row.cells["while-worn"], row.cells["while-worn-on"]].flatMap((cell) => cell ?? []);
  const alike = cells.filter((cell) => Math.abs(numberOf(cell) - numberOf(head)) < 1e-7);
  expect(alike.map(boundSign)).toContain(relation);
  for (const { cells } of rowsOf(worn.tables[0]!)) expect(cells.device).not.toBeNull();
}

const boundSign = (of: WorkingValue): string =>
  of.kind === "level" && of.bound ? (of.bound === "upper" ? "≤" : "≥") : "=";

test("an average from 90 dB under a rule at 80: the level counted, what the protector leaves of it, and both steps alike", () => {
  // 16.61 lg(10^(93.5/16.61) + 10^(90/16.61)) = 96.96.
  const pair = buildProtection(
    { name: "Foam plug", usRatingDb: 25 },
    { outer: buildProtector({ modelId: "outer", name: "Cup muff", usRatingDb: 22 }) },
  );
  const day = dayOf(
    buildTask("cutting", 200, buildLevel(93.5, { metric: lavg5(90) }), {
      protection: buildProtection({ usRatingDb: 25 }),
      wornPct: 90,
    }),
    buildTask("blasting", 20, buildLevel(90.2, { metric: lavg5(90) }), {
      protection: pair,
      wornPct: 100,
    }),
    buildTask("packing", 260, buildLevel(76, { metric: STEADY })),
  );
  const ruleSet = RULE_SETS.find(({ key }) => key === "us-general-industry")!;
  const working = buildWorking(day, ruleSet, []);
  const step = (title: string) => working.steps.find(({ title: { id } }) => id.startsWith(title))!;
  const worn = step("What the protector does");
  const cutting = worn.equations.filter(
    ({ label }) => label?.kind === "name" && label.name === "cutting",
  );
  const countedDb = LAVG_FACTOR * Math.log10(10 ** (93.5 / LAVG_FACTOR) + 10 ** (90 / LAVG_FACTOR));
  const [recorded, counted, left] = cutting.map(resultOf);
  near(counted!, countedDb);
  near(left!, countedDb - (93.5 - recorded!));
  const head = working.lines.find(({ id }) => id === "protector")!.level;
  expect(head).toEqual({ kind: "level", db: expect.closeTo(left!, 9), bound: "upper" });
  const [first, second, third] = rowsOf(worn.tables[0]!).map(({ cells }) => cells);
  expect(first!["while-worn"]).toEqual(head);
  expect(first!.device).toEqual({ kind: "name", name: "Plain muff" });
  expect(second!.device).toMatchObject({
    text: {
      id: "{inner} under {outer}",
      values: { inner: { name: "Foam plug" }, outer: { name: "Cup muff" } },
    },
  });
  expect(third!.device).toMatchObject({ text: { id: "not worn" } });
  // The word is the shift's: no task has one.
  expect(Object.keys(first!)).not.toContain("word");
  const rows = rowsOf(step("The day at the ear").tables[0]!).flatMap(({ cells, isTotal }) =>
    isTotal ? [] : [cells],
  );
  expect(rows.map((cells) => boundSign(cells["in-task"]!))).toEqual(["≤", "≤", "="]);
  for (const [index, cells] of [first!, second!].entries()) {
    near(read(rows[index]!, "in-task")!, read(cells, "in-task")!);
    expect(boundSign(cells["in-task"]!)).toBe("≤");
  }
});

const LAVG_FACTOR = 5 / Math.log10(2);

test("an average of 5 dB from 80 dB under the general industry rule: by hand, 91.2 dB for 300 min and 86.4 for 180", () => {
  // Action level, threshold 80: 480/2^(1.2/5) = 406.43 min allowed; 86.4 from 90 dB may hide up to 90 dB:
  // 16.61 lg(10^(86.4/16.61) + 10^(90/16.61)) = 93.545, so 480/2^(3.545/5) = 293.6 min, and D = 73.8 + 61.3 = 135.1 %.
  const { day } = ENGINE_VECTORS.find(({ name }) => name.startsWith("averages of a dosimeter"))!;
  const ruleSet = RULE_SETS.find(({ key }) => key === "us-general-industry")!;
  const [noise] = buildWorking(day, ruleSet, []).steps;
  const rows = rowsOf(noise!.tables[0]!);
  expect(read(rows[0]!.cells, "allowed")).toBeCloseTo(406.43, 1);
  expect(noise!.notes.map(({ id }) => id).join(" ")).toContain("{metric} under {rule}");
});

test("an upper bound is called one only where the figure rests on it", () => {
  const ruleSet = RULE_SETS.find(({ key }) => key === "us-general-industry")!;
  const says = (day: DayInput) =>
    buildWorking(day, ruleSet, [])
      .steps.flatMap(({ notes }) => notes)
      .some(({ id }) => id.includes("never Over"));
  expect(says(dayOf(buildTask("a", 480, buildLevel(84))))).toBe(true);
  expect(says(dayOf(buildTask("a", 480, buildLevel(84, { metric: STEADY }))))).toBe(false);
  const withReadings = buildDay([
    buildShift(480, [buildTask("a", 480, buildLevel(84))], {
      readings: [
        buildReading(settings(5, 80), { dosePct: 30 }),
        buildReading(settings(5, 90), { id: "b", dosePct: 10 }),
      ],
    }),
  ]);
  expect(says(withReadings)).toBe(false);
});
