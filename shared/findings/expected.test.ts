import { setupI18n } from "@lingui/core";
import { compileMessage } from "@lingui/message-utils/compileMessage";
import { describe, expect, test } from "vitest";
import {
  buildLevel,
  buildProtection,
  buildProtector,
  buildTask,
  dayOf,
  STEADY,
} from "../../tests/published/build-day";
import { evaluateDay } from "../acoustics/day";
import type { TimedTask } from "../acoustics/types";
import { ruleSetVersion } from "../rule-sets";
import { type ExpectedDay, factsAhead, faultsAhead, isSettled, orderAhead } from "./expected";
import { proposeRemedy } from "./remedy";
import { noticedSentence, orderSentence } from "./sentences";

const UK = ruleSetVersion("uk-2005", 1)!;
const US = ruleSetVersion("us-general-industry", 1)!;

const i18n = setupI18n({ locale: "en", messages: { en: {} } }).setMessagesCompiler(compileMessage);

/** Leaves 20 dB less by British practice. */
const muff = buildProtector({
  modelId: "muff",
  name: "Muff",
  usRatingDb: 31,
  snrDb: 24,
  hDb: 24,
  mDb: 24,
  lDb: 24,
});

/** Eight hours at a level under the muff, worn for a share of it. */
function day(levelDb: number, wornPct: number, governing = UK): ExpectedDay {
  const level = buildLevel(levelDb, { metric: STEADY, lcMinusLaDb: 0 });
  const protection = buildProtection(muff);
  const task = buildTask("Run-up", 480, level, { protection, wornPct });
  return expectedOf([task], governing);
}

function expectedOf(tasks: readonly TimedTask[], governing = UK): ExpectedDay {
  const input = dayOf(...tasks);
  return { input, governing, evaluation: evaluateDay(input, governing, []) };
}

const orderOf = (expected: ExpectedDay) =>
  orderAhead(
    expected,
    faultsAhead(expected),
    proposeRemedy(expected.input, expected.governing, [muff]),
  );

describe("the order of a day to come", () => {
  test("is about the wearing where the protector would be enough if it stayed on", () => {
    // 98 for a third of the time: 98 + 10 lg(1/3 + 2/3 · 10^−2) = 93.3.
    const order = orderOf(day(98, 200 / 3));
    expect(order?.kind).toBe("not-worn-long-enough");
    expect(order?.facts.levelDb).toBeCloseTo(93.31, 2);
    const { kind, facts } = order!;
    expect(orderSentence(i18n, "en", kind, facts)).toBe(
      "See that it stays on the whole time in Run-up",
    );
    expect(noticedSentence(i18n, "en", kind, facts)).toMatch(
      /^Enough while worn; by the wearing time known it is off for .+ in Run-up: 93\.3 at the ear, limit 87$/,
    );
  });

  test("names the tasks that have to be worn through, no more than it takes, the loudest first", () => {
    // Off for half of 2 h at 98 and half of 2 h at 96, 20 dB less under the muff; nothing is worn in 4 h at 80.
    const across = (
      ...levels: readonly (readonly [name: string, levelDb: number, min: number])[]
    ) =>
      expectedOf(
        levels.map(([name, levelDb, min]) =>
          buildTask(name, min, buildLevel(levelDb, { metric: STEADY, lcMinusLaDb: 0 }), {
            protection: buildProtection(muff),
            wornPct: 50,
          }),
        ),
      );
    // 10 lg((10^9.8 + 10^9.6) · 1.01/8 + 10^8/2) = 91.3; with the run-up alone worn through 87.5, still over 87.
    const two = orderOf(across(["Idle", 80, 240], ["Turning", 96, 120], ["Run-up", 98, 120]));
    expect(orderSentence(i18n, "en", two!.kind, two!.facts)).toBe(
      "See that it stays on the whole time in Run-up and Turning",
    );
    expect(two?.facts.offMin).toBe(120);
    expect(noticedSentence(i18n, "en", two!.kind, two!.facts)).toMatch(
      /off for .+ in Run-up and Turning: 91\.3 at the ear, limit 87$/,
    );
    // With 94 in place of 96 and the run-up worn through 85.8: one is enough.
    const one = orderOf(across(["Idle", 80, 240], ["Turning", 94, 120], ["Run-up", 98, 120]));
    expect(orderSentence(i18n, "en", one!.kind, one!.facts)).toBe(
      "See that it stays on the whole time in Run-up",
    );
    expect(one?.facts.offMin).toBe(60);
  });

  test("is about the protector where that takes too little, and nothing where the day is right", () => {
    expect(orderOf(day(112, 100))?.kind).toBe("over-limit-at-ear");
    expect(orderOf(day(98, 100))).toBeNull();
    // 96 for a tenth of the time, 86.4: over the action value and under the limit of the day.
    expect(orderOf(day(96, 90))).toBeNull();
  });

  test("where the rule has no limit at the ear, it is what its protectors have to come to", () => {
    expect(orderOf(day(105, 50, US))?.kind).toBe("not-worn-long-enough");
    expect(orderOf(day(105, 100, US))).toBeNull();
  });
});

describe("what a finding asks for", () => {
  const past = {
    kind: "protects-too-little",
    state: "in-hand",
    lastDate: "2026-11-27",
    wasCredited: false,
  } as const;
  const fine = day(98, 100);
  const short = day(112, 100);

  test("is settled by a day since that was in order, unless the day to come is not", () => {
    const right = { day: fine, faults: faultsAhead(fine) };
    expect(isSettled(past, "2026-12-02", right)).toBe(true);
    expect(isSettled(past, "2026-12-02", null)).toBe(true);
    expect(isSettled(past, "2026-11-27", right)).toBe(false);
    expect(isSettled(past, null, right)).toBe(false);
    expect(isSettled(past, "2026-12-02", { day: short, faults: faultsAhead(short) })).toBe(false);
    expect(isSettled({ ...past, kind: "wearing-unknown" }, "2026-12-02", right)).toBe(false);
  });

  test("is said with the figures of the day to come where that has the same fault", () => {
    const known = { kind: "over-limit-at-ear", facts: { levelDb: 95 } } as const;
    expect(factsAhead(known, faultsAhead(short), null).levelDb).toBeCloseTo(92, 6);
    expect(factsAhead(known, faultsAhead(fine), null)).toBe(known.facts);
  });
});
