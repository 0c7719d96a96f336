import { describe, expect, test } from "vitest";
import { buildLevel, buildProtection, buildTask, dayOf } from "../../tests/published/build-day";
import { ENGINE_VECTORS, type EngineVector } from "../../tests/published/vectors";
import { RULE_SETS, ruleSetVersion } from "../rule-sets";
import { evaluateDay } from "./day";
import type { RuleSetVersion, TimedTask } from "./types";
import { buildWorking, type MathPart, type Working, type WorkingValue } from "./working";

function rulesOf(key: string): RuleSetVersion {
  const found = ruleSetVersion(key, 1);
  if (!found) throw new Error(`No rule set ${key}`);
  return found;
}

function workingOf({ day, governing, comparison }: EngineVector): Working {
  return buildWorking(day, rulesOf(governing), comparison.map(rulesOf));
}

function evaluationOf({ day, governing, comparison }: EngineVector) {
  return evaluateDay(day, rulesOf(governing), comparison.map(rulesOf));
}

/** Results of a step's equations, in order. */
function resultsOf(working: Working, title: string): WorkingValue[] {
  const step = working.steps.find((one) => one.title.id === title);
  return (step?.equations ?? []).flatMap(({ parts }) =>
    parts.flatMap((part: MathPart) => (part.kind === "value" && part.isResult ? [part.value] : [])),
  );
}

const named = (name: string): EngineVector => {
  const vector = ENGINE_VECTORS.find((one) => one.name.startsWith(name));
  if (!vector) throw new Error(`No vector ${name}`);
  return vector;
};

describe.each(ENGINE_VECTORS)("working of $name", (vector) => {
  test("steps and equations are numbered from 1, every number is finite and the rows fit their columns", () => {
    const working = workingOf(vector);
    expect(working.steps.map(({ number }) => number)).toEqual(
      working.steps.map((_, index) => index + 1),
    );
    const equations = working.steps.flatMap((step) =>
      [step, ...step.details].flatMap((part) => part.equations.map(({ number }) => number)),
    );
    expect(equations).toEqual(equations.map((_, index) => index + 1));
    // JSON writes what is not finite as null, and a value of a kind has no null in it.
    expect(JSON.stringify(working)).not.toMatch(/"(db|min|pct|number)":null/);
    for (const { columns, rows } of working.steps.flatMap(({ tables }) => tables)) {
      for (const { cells } of rows) expect(cells).toHaveLength(columns.length);
    }
  });

  test("nothing is cited that has no words", () => {
    const cited = workingOf(vector).steps.flatMap(({ sources }) => sources);
    expect(cited.filter(({ id, clause }) => id === null && clause === "")).toEqual([]);
  });

  test("a result at hand gives the same working as one computed again", () => {
    const again = buildWorking(
      vector.day,
      rulesOf(vector.governing),
      vector.comparison.map(rulesOf),
      evaluationOf(vector),
    );
    expect(again).toEqual(workingOf(vector));
  });
});

describe("the equations end in the evaluation's own numbers", () => {
  test("outside and at the ear by energy, with the uncertainty", () => {
    const vector = named("sampled tasks");
    const working = workingOf(vector);
    const evaluation = evaluationOf(vector);
    const [outside] = resultsOf(working, "Noise without protection, over the day");
    const [uncertainty] = resultsOf(working, "How sure that is").slice(-1);
    const [atEar] = resultsOf(working, "The day at the ear, wearing time included").slice(-1);
    expect(outside).toMatchObject({ kind: "level" });
    expect((outside as { db: number }).db).toBeCloseTo(evaluation.outsideDb!, 9);
    expect((uncertainty as { db: number }).db).toBe(evaluation.uncertaintyDb);
    expect((atEar as { db: number }).db).toBe(evaluation.atEarDb);
  });

  test("dose and TWA", () => {
    const vector = named("steady levels");
    const [dose, twa] = resultsOf(workingOf(vector), "Noise without protection, over the day");
    const result = evaluationOf(vector).criteria[0]!;
    expect((dose as { pct: number }).pct).toBeCloseTo(result.dosePct!, 9);
    expect((twa as { db: number }).db).toBeCloseTo(result.levelDb!, 9);
  });

  test("the governing method's day is the day at the ear", () => {
    const vector = named("sampled tasks");
    const step = workingOf(vector).steps.find(({ title }) =>
      title.id.startsWith("The day at the ear"),
    );
    const row = step?.tables[1]?.rows.find(({ isEmphasized }) => isEmphasized);
    expect(row?.cells[1]).toEqual({ kind: "level", db: evaluationOf(vector).atEarDb });
  });

  test("each day by another method cites its own document, the step only those that govern", () => {
    const vector = named("sampled tasks");
    const { steps } = workingOf(vector);
    const step = steps.find(({ title }) => title.id === "What the protector does, while worn");
    const days = steps.find(({ title }) => title.id.startsWith("The day at the ear"))?.tables[1];
    const governing = days?.rows.find(({ isEmphasized }) => isEmphasized);
    const bySnr = days?.rows.find(({ id }) => id === "snr");
    const cited = (row: typeof bySnr) => {
      const cell = row?.cells[2];
      const values = cell?.kind === "list" ? cell.values : [];
      return values.flatMap((one) => (one.kind === "source" ? [one.source] : []));
    };
    expect(days?.columns.map(({ title }) => title?.id)).toEqual([
      "Method",
      evaluationOf(vector).atEarActiveDb === null ? "Day at the ear" : "Day at the ear, off",
      "Source",
      undefined,
    ]);
    expect(bySnr?.isEmphasized).toBe(false);
    expect(cited(bySnr)).toEqual([{ id: "iso-4869-2", clause: "8" }]);
    expect(step?.sources).not.toContainEqual({ id: "iso-4869-2", clause: "8" });
    expect(step?.sources).toEqual(expect.arrayContaining(cited(governing)));
  });

  test("with an active part credited it ends at the figure that counts, by the site’s policy and the check", () => {
    const active = {
      attenuationDb: [12, 14, 13, 8, 3, 0, 0, 0],
      delayS: null,
      gain: null,
      maximumDb: null,
      bandwidthHz: null,
      saturatesAboveDb: null,
      batteryMin: 200,
    } as const;
    const bands = {
      meanDb: [11, 13, 18, 25, 31, 33, 34, 34],
      sdDb: [2, 2, 2, 2, 2, 2, 2, 2],
    } as const;
    const protection = {
      ...buildProtection({ kind: "active-earmuff", bands, active }),
      activeCheckPassed: true,
      activeCheckedOn: "2026-11-12",
    };
    const octaveBandsDb = [98, 99, 97, 92, 88, 84, 80, 75] as const;
    const on = dayOf(
      buildTask("Soak run", 300, buildLevel(94, { octaveBandsDb }), { protection, wornPct: 90 }),
    );
    const day = {
      ...on,
      site: { ...on.site, creditsActivePart: true, settingsFrom: "2026-02-02" },
    };
    const rules = rulesOf("uk-2005");
    const evaluation = evaluateDay(day, rules, []);
    const { steps } = buildWorking(day, rules, [], evaluation);
    const step = steps.find(({ title }) => title.id.startsWith("The day at the ear"))!;
    expect(evaluation.counted!.atEarDb).toBeLessThan(evaluation.atEarDb! - 0.5);
    const results = resultsOf(buildWorking(day, rules, [], evaluation), step.title.id);
    expect(results.at(-1)).toEqual({ kind: "level", db: evaluation.counted!.atEarDb });
    expect(results.at(-2)).toEqual({ kind: "level", db: evaluation.atEarDb });
    const emphasized = step.tables[1]!.rows.filter((row) => row.isEmphasized);
    expect(emphasized.map(({ id, cells }) => [id, cells[1]])).toEqual([
      ["counted", { kind: "level", db: evaluation.counted!.atEarDb }],
    ]);
    const note = step.notes.find(({ id }) => id.startsWith("The site’s policy, in force from"));
    expect(note?.values).toEqual({
      from: { kind: "date", date: "2026-02-02" },
      checked: { kind: "date", date: "2026-11-12" },
      counted: { kind: "level", db: evaluation.counted!.atEarDb },
      off: { kind: "level", db: evaluation.atEarDb },
    });
    const unchecked = {
      ...day,
      shifts: day.shifts.map((shift) => ({
        ...shift,
        tasks: shift.tasks.map((task) => ({
          ...task,
          protection: { ...protection, activeCheckPassed: false },
        })),
      })),
    };
    expect(
      buildWorking(unchecked, rules, [])
        .steps.flatMap(({ notes }) => notes.map(({ id }) => id))
        .join(" "),
    ).toContain("and none is on record");
  });

  test("each share worn says where it comes from; an old result that does not know says nothing", () => {
    const worn = (id: string, fields: Partial<TimedTask>) =>
      buildTask(id, 100, buildLevel(95, { lcMinusLaDb: 2 }), {
        protection: buildProtection({ snrDb: 25 }),
        ...fields,
      });
    const looks = {
      roundId: "r",
      lastOn: "2026-11-03",
      roundCount: 1,
      wornCount: 12,
      seenCount: 14,
    };
    const day = dayOf(
      worn("Chipping", { wornPct: 90, wornFrom: { how: "stated" } }),
      worn("Grinding", {
        wornPct: 85.7,
        wornFrom: { how: "looks", looks: [{ ...looks, source: "round" }] },
      }),
      worn("Linishing", {
        wornPct: 80,
        wornFrom: { how: "looks", looks: [{ ...looks, source: "own-report", roundCount: 3 }] },
      }),
      worn("Rig run", { wornPct: null }),
      worn("Old", { wornPct: 100 }),
    );
    const step = buildWorking(day, rulesOf("uk-2005"), []).steps.find(({ title }) =>
      title.id.startsWith("The day at the ear"),
    )!;
    const table = step.tables.find(({ title }) => title?.id === "How long it was worn")!;
    const said = (cell: WorkingValue | null | undefined): string | undefined =>
      cell?.kind === "text"
        ? cell.text.id
        : cell?.kind === "list"
          ? cell.values.map(said).join()
          : cell?.kind;
    expect(table.rows.map(({ id, cells }) => [id, said(cells[1]), said(cells[2])])).toEqual([
      ["Chipping", "share", "stated on the shift"],
      ["Grinding", "share", "observation round of {date}: looks {seen}, worn at {worn}"],
      ["Linishing", "share", "{count} own reports, the last of {date}: {share} together"],
      [
        "Rig run",
        "not known, taken as {share}",
        "assumed: nobody said or saw how long it was worn",
      ],
    ]);
    expect(step.records).toContainEqual({ kind: "wearing-round", id: "r" });
    const cells = step.tables[0]!.rows.find(({ id }) => id === "Rig run")!.cells;
    expect(cells.map(said)).toContain("not known, taken as {share}");
  });

  test("shares of the uncertainty make a whole", () => {
    const step = workingOf(named("sampled tasks")).steps.find(
      ({ title }) => title.id === "How sure that is",
    );
    expect(step?.shares.reduce((sum, { pct }) => sum + pct, 0)).toBeCloseTo(100, 9);
  });
});

test("what is open is said: what is known of an open day is a lower bound, and the ear has none", () => {
  const working = workingOf(named("unknown time"));
  const [outside] = working.steps[0]?.equations ?? [];
  expect(outside?.parts).toContainEqual({ kind: "sign", text: "≥" });
  const [ear] = working.lines;
  expect(ear).toMatchObject({ id: "at-the-ear", level: null });
});

test("every rule set of the demo's world has a working", () => {
  const { day } = named("four unsteady");
  for (const ruleSet of RULE_SETS)
    expect(buildWorking(day, ruleSet, []).steps.length).toBeGreaterThan(1);
});
