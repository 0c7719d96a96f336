import { describe, expect, test } from "vitest";
import { typeface } from "./fonts";
import { runsOf } from "./letters-on-paper";

/** Ids of the glyphs of a text, in runs of one font file each; 0 is the empty box. */
const glyphs = (text: string) =>
  runsOf(text).map(({ text: part, script }) => ({
    script,
    ids: typeface(script)
      .layout(part)
      .glyphs.map(({ id }) => id),
  }));

/** Ids from here on are made: letters that no file has. */
const MADE_FROM = 0x100000;

describe("letters of a name on paper", () => {
  test.each([
    ["Quill Amberley-Voß", ["latin"]],
    ["Ευτέρπη Ξανθάκη, Ώριμος", ["greek", "latin", "greek", "latin", "greek"]],
    ["Єлизавета Щеглюк", ["cyrillic", "latin", "cyrillic"]],
  ])("%s has a glyph of its own for each letter", (name, scripts) => {
    const runs = glyphs(name);
    expect(runs.map(({ script }) => script)).toEqual(scripts);
    for (const id of runs.flatMap(({ ids }) => ids)) {
      expect(id).toBeGreaterThan(0);
      expect(id).toBeLessThan(MADE_FROM);
    }
  });

  test("an accent that is a sign of its own goes with its letter", () => {
    expect(glyphs("Ξανθάκη".normalize("NFD"))).toEqual(glyphs("Ξανθάκη"));
  });

  test("a letter of no file stays a box that is read out as what it is", () => {
    const [run] = glyphs("林");
    expect(run?.ids).toEqual([MADE_FROM + "林".codePointAt(0)!]);
  });
});
