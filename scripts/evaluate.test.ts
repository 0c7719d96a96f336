import { execFile } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { promisify } from "node:util";
import { afterAll, expect, test } from "vitest";

const folder = mkdtempSync(join(tmpdir(), "dinward-evaluate-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

interface Outcome {
  code: number;
  stdout: string;
  stderr: string;
}

async function evaluate(request: unknown): Promise<Outcome> {
  const file = join(folder, "request.json");
  writeFileSync(file, typeof request === "string" ? request : JSON.stringify(request));
  const env = { PATH: process.env.PATH };
  return promisify(execFile)(process.execPath, ["--import", "tsx", "scripts/evaluate.ts", file], {
    cwd: join(import.meta.dirname, ".."),
    env,
  }).then(
    (done) => ({ code: 0, ...done }),
    (error: Outcome) => error,
  );
}

const task = (levelDb: number, durationMin: number) => ({
  id: `${levelDb}`,
  name: "Task",
  durationMin,
  level: { metric: { kind: "laeq" }, levelDb, grade: "task-level" },
});
const day = {
  date: "2026-03-02",
  shifts: [{ id: "s", lengthMin: 480, tasks: [task(100, 120), task(60, 360)] }],
  site: {},
};

test("a day's levels come out unrounded, with the working where it is asked for", async () => {
  const outcome = await evaluate({ day, governingRuleSet: "eu-2003-10-ec", withWorking: true });
  const { evaluation, working } = JSON.parse(outcome.stdout);
  // ISO 9612, 9.2: 10 lg(1/8 · Σ Tm · 10^(0.1 Lm)).
  expect(evaluation.outsideDb).toBeCloseTo(10 * Math.log10((2 * 10 ** 10 + 6 * 10 ** 6) / 8), 9);
  expect(working).not.toBeNull();
});

test("the sample request of the docs is computed", async () => {
  const sample = readFileSync(join(import.meta.dirname, "../docs/evaluate-example.json"), "utf8");
  const { code, stdout } = await evaluate(sample);
  expect(code).toBe(0);
  // ISO 9612, 9.2, with the rest of the shift as stated.
  expect(JSON.parse(stdout).evaluation.outsideDb).toBeCloseTo(
    10 * Math.log10((180 * 10 ** 9.64 + 240 * 10 ** 7.81 + 60 * 10 ** 6.2) / 480),
    9,
  );
});

test("an array is answered by an array, in its order", async () => {
  const one = { day, governingRuleSet: "eu-2003-10-ec" };
  const outcome = await evaluate([one, { ...one, governingRuleSet: "uk-2005" }]);
  const keys = JSON.parse(outcome.stdout).map(
    ({ evaluation }: { evaluation: { criteria: { ruleSetKey: string }[] } }) =>
      evaluation.criteria[0]?.ruleSetKey,
  );
  expect(keys).toEqual(["eu-2003-10-ec", "uk-2005"]);
});

test.each([
  ["{", /is no JSON/],
  [{ governingRuleSet: "uk-2005" }, /day: /],
  [
    [{ day: { ...day, shifts: [] }, governingRuleSet: "uk-2005" }],
    /Request 1 .*\n {2}day\.shifts: /,
  ],
  [
    {
      day: { ...day, shifts: [{ ...day.shifts[0], lengthMin: 100 }] },
      governingRuleSet: "uk-2005",
    },
    /tasks-longer-than-shift/,
  ],
  [{ day, governingRuleSet: "no-such" }, /governingRuleSet: the rule set no-such was not in force/],
])("bad input %j is one message and exit code 1", async (request, message) => {
  const outcome = await evaluate(request);
  expect(outcome.code).toBe(1);
  expect(outcome.stderr).toMatch(message);
  expect(outcome.stderr).not.toMatch(/^\s+at /m);
  expect(outcome.stdout).toBe("");
});
