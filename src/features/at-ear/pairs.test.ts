import { expect, test } from "vitest";
import { firstTask, partnersOf, worn } from "./pairs";

const model = (id: string, kind: "earmuff" | "foam-plug" | "active-plug", isArchived = false) => ({
  id,
  name: id,
  kind,
  isArchived,
});

test("a plug goes under what lies over the ear, from whichever page it is asked", () => {
  const muff = model("muff", "earmuff");
  const plug = model("plug", "foam-plug");
  const register = [muff, plug, model("other", "active-plug"), model("old", "foam-plug", true)];
  expect(partnersOf(muff, register).map(({ id }) => id)).toEqual(["plug", "other"]);
  expect(partnersOf(plug, register).map(({ id }) => id)).toEqual(["muff"]);
  expect(worn(muff, "plug")).toEqual({ innerId: "plug", outerId: "muff" });
  expect(worn(plug, "muff")).toEqual({ innerId: "plug", outerId: "muff" });
  expect(worn(plug, undefined)).toEqual({ innerId: "plug", outerId: undefined });
});

test("the loudest task with octave bands comes first, and one without a level never", () => {
  const task = (id: string, levelDb: number | null, hasBands = false) =>
    ({
      id,
      isArchived: false,
      level: levelDb === null ? null : { levelDb, octaveBandsDb: hasBands ? [] : null },
    }) as unknown as Parameters<typeof firstTask>[0][number];
  const tasks = [task("quiet", 80, true), task("loud", 104), task("bands", 95, true)];
  expect(firstTask(tasks)?.id).toBe("bands");
  expect(firstTask([task("untold", null), task("loud", 104)])?.id).toBe("loud");
  expect(firstTask([task("untold", null)])).toBeUndefined();
});
