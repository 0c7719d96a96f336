import { SCRIPTS, type Script, typeface } from "./fonts";

/** A part of a text that one font file holds. */
export interface Run {
  readonly text: string;
  readonly script: Script;
}

export interface Line {
  readonly runs: readonly Run[];
  readonly widthPt: number;
}

/** Characters that order text and are not seen. */
const UNSEEN = /[\u200e\u200f\u2066-\u2069]/g;
const scripts = new Map<string, Script>();

/** The file that has a character, the first where none has. The same few characters come again and again. */
function scriptOf(character: string): Script {
  const known = scripts.get(character);
  if (known) return known;
  const code = character.codePointAt(0)!;
  const script = SCRIPTS.find((one) => typeface(one).hasGlyphForCodePoint(code)) ?? SCRIPTS[0]!;
  scripts.set(character, script);
  return script;
}

/** A text in runs of one font file each; an accent written as a sign of its own goes with its letter where there is one for both. */
export function runsOf(text: string): Run[] {
  const runs: Run[] = [];
  for (const character of text
    .normalize("NFC")
    .replace(UNSEEN, "")
    .replace(/[\u202f\t\r\n]/g, "\u00a0")) {
    const script = scriptOf(character);
    const last = runs.at(-1);
    if (last?.script === script) runs[runs.length - 1] = { script, text: last.text + character };
    else runs.push({ script, text: character });
  }
  return runs;
}

type Measure = (runs: readonly Run[]) => number;

/** A word that is wider than its line, in pieces that are not. */
function piecesOf(word: string, widthPt: number, measure: Measure): string[] {
  const pieces: string[] = [];
  let piece = "";
  for (const character of word) {
    if (piece !== "" && measure(runsOf(piece + character)) > widthPt) {
      pieces.push(piece);
      piece = "";
    }
    piece += character;
  }
  return [...pieces, piece];
}

/** A text in lines of a width, broken between words, and within one that is too long. */
export function linesOf(text: string, widthPt: number, measure: Measure): Line[] {
  return text.split("\n").flatMap((paragraph) => {
    const lines: string[] = [];
    const words = paragraph
      .split(" ")
      .flatMap((word) =>
        measure(runsOf(word)) > widthPt ? piecesOf(word, widthPt, measure) : [word],
      );
    for (const word of words) {
      const last = lines.at(-1);
      const longer = last === undefined ? word : `${last} ${word}`;
      if (last !== undefined && measure(runsOf(longer)) <= widthPt)
        lines[lines.length - 1] = longer;
      else lines.push(word);
    }
    return lines.map((line) => {
      const runs = runsOf(line);
      return { runs, widthPt: measure(runs) };
    });
  });
}
