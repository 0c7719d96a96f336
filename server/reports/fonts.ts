import { readFileSync } from "node:fs";
import { createRequire } from "node:module";
import PDFDocument from "pdfkit";

interface Glyph {
  readonly id: number;
  readonly codePoints: readonly number[];
  readonly path: { readonly commands: readonly { command: string; args: readonly number[] }[] };
  readonly advanceWidth: number;
  _getMetrics(): { leftBearing: number };
}
interface GlyphRun {
  readonly glyphs: readonly Glyph[];
  readonly positions: readonly object[];
  readonly advanceWidth: number;
}
interface Subset {
  readonly font: Typeface;
  readonly glyf: Uint8Array[];
  readonly loca: { offsets: number[] };
  readonly hmtx: { metrics: { advance: number; bearing: number }[] };
  offset: number;
  _addGlyph(id: number): number;
}

/** A font file as pdfkit holds it, as far as it is used here. */
export interface Typeface {
  /** Height over the line that letters stand on, in units of which `unitsPerEm` make a size. */
  readonly ascent: number;
  readonly unitsPerEm: number;
  hasGlyphForCodePoint(codePoint: number): boolean;
  getGlyph(id: number, codePoints?: readonly number[]): Glyph;
  createSubset(): Subset;
  layout(text: string, features?: readonly string[]): GlyphRun;
  /** Glyphs made so far. */
  _glyphs: Record<number, Glyph | undefined>;
}

/**
 * An outline in the format of a TrueType font's `glyf` table. The font files come compressed, with composite letters whose
 * parts the PDF package can't take into a subset: each letter goes in as one outline instead.
 */
function encodeOutline({ commands }: Glyph["path"]): Uint8Array {
  const ends: number[] = [];
  const points: { x: number; y: number; isOnCurve: boolean }[] = [];
  for (const { command, args } of commands) {
    if (command === "closePath") ends.push(points.length - 1);
    for (let at = 0; at + 1 < args.length; at += 2)
      points.push({
        x: Math.trunc(args[at]!),
        y: Math.trunc(args[at + 1]!),
        isOnCurve: command !== "quadraticCurveTo" || at > 0,
      });
  }
  if (points.length === 0) return new Uint8Array(0);
  const [xs, ys] = [points.map(({ x }) => x), points.map(({ y }) => y)];
  const length = 10 + 2 * ends.length + 2 + 5 * points.length;
  const bytes = Buffer.alloc(length + ((4 - (length % 4)) % 4));
  let at = 0;
  const write = (value: number) => {
    at = bytes.writeInt16BE(value, at);
  };
  for (const value of [
    ends.length,
    Math.min(...xs),
    Math.min(...ys),
    Math.max(...xs),
    Math.max(...ys),
    ...ends,
  ])
    write(value);
  // No instructions.
  write(0);
  for (const { isOnCurve } of points) at = bytes.writeUInt8(isOnCurve ? 1 : 0, at);
  for (const places of [xs, ys])
    for (const [index, place] of places.entries()) write(place - (places[index - 1] ?? 0));
  return bytes;
}

function addOutline(this: Subset, id: number): number {
  const glyph = this.font.getGlyph(id);
  const outline = encodeOutline(glyph.path);
  this.glyf.push(outline);
  this.loca.offsets.push(this.offset);
  this.hmtx.metrics.push({
    advance: glyph.advanceWidth,
    bearing: glyph._getMetrics().leftBearing,
  });
  this.offset += outline.length;
  return this.glyf.length - 1;
}

/** Ids from here on are of letters made here, by their characters. */
const MADE_FROM = 0x100000;
/** Signs that the typeface lacks: another with a line under it. */
const UNDERLINED: Readonly<Record<number, string>> = { 8805: ">", 8804: "<" };
const LINE = { y: -70, height: 62 };

/** A letter for a character that the typeface lacks: drawn as a sign of it or as an empty box, and read out as what it is. */
function madeGlyph(font: Typeface, codePoint: number): Glyph {
  const base = UNDERLINED[codePoint];
  const [letter] = base ? font.layout(base).glyphs : [font.getGlyph(0)];
  const { path, advanceWidth } = letter!;
  const bearing = letter!._getMetrics();
  const { y, height } = LINE;
  const [left, right] = [bearing.leftBearing, advanceWidth - bearing.leftBearing];
  const point = (command: string, ...args: number[]) => ({ command, args });
  const line = [
    point("moveTo", left, y),
    point("lineTo", left, y + height),
    point("lineTo", right, y + height),
    point("lineTo", right, y),
    point("closePath"),
  ];
  return {
    id: MADE_FROM + codePoint,
    codePoints: [codePoint],
    advanceWidth,
    path: { commands: base ? [...path.commands, ...line] : path.commands },
    _getMetrics: () => bearing,
  };
}

/** Gives a typeface a letter for each character that it lacks. */
function complete(font: Typeface): void {
  const getGlyph = font.getGlyph.bind(font);
  const made = new Map<number, Glyph>();
  font.getGlyph = (id, codePoints = []) => {
    if (id >= MADE_FROM) {
      const glyph = made.get(id) ?? madeGlyph(font, id - MADE_FROM);
      made.set(id, glyph);
      return glyph;
    }
    // What was made as a part of another letter does not know which character it is for: a comma would be none.
    if (codePoints.length > 0 && font._glyphs[id]?.codePoints.length === 0)
      font._glyphs[id] = undefined;
    return getGlyph(id, codePoints);
  };
  const layout = font.layout.bind(font);
  // Figures of one width everywhere; asked for at each text, they would not be remembered.
  const layOutKnown = (text: string) => layout(text, ["tnum"]);
  font.layout = (text) => {
    const parts: { known: string; lacking: number | null }[] = [{ known: "", lacking: null }];
    for (const character of text) {
      const codePoint = character.codePointAt(0)!;
      if (font.hasGlyphForCodePoint(codePoint)) parts.at(-1)!.known += character;
      else parts.push({ known: "", lacking: codePoint });
    }
    if (parts.length === 1) return layOutKnown(text);
    const runs = parts.flatMap(({ known, lacking }): GlyphRun[] => {
      const own = lacking === null ? null : font.getGlyph(MADE_FROM + lacking);
      const { advanceWidth = 0 } = own ?? {};
      return [
        ...(own ? [{ glyphs: [own], positions: [still(advanceWidth)], advanceWidth }] : []),
        ...(known === "" ? [] : [layOutKnown(known)]),
      ];
    });
    return {
      glyphs: runs.flatMap(({ glyphs }) => glyphs),
      positions: runs.flatMap(({ positions }) => positions),
      advanceWidth: runs.reduce((sum, run) => sum + run.advanceWidth, 0),
    };
  };
}

const still = (xAdvance: number) => ({ xAdvance, yAdvance: 0, xOffset: 0, yOffset: 0 });

/** The application's own typeface first; names in letters that it lacks are in another of the same free licence. */
const FILES = {
  latin: ["atkinson-hyperlegible-next", "AtkinsonHyperlegibleNext"],
  "latin-ext": ["atkinson-hyperlegible-next", "AtkinsonHyperlegibleNext"],
  greek: ["noto-sans", "NotoSans"],
  "greek-ext": ["noto-sans", "NotoSans"],
  cyrillic: ["noto-sans", "NotoSans"],
  "cyrillic-ext": ["noto-sans", "NotoSans"],
} as const;

/** A font file, by the characters that it holds. */
export type Script = keyof typeof FILES;
export const SCRIPTS = Object.keys(FILES) as Script[];

function readTypeface(script: Script): Typeface {
  const [family, name] = FILES[script];
  const path = createRequire(import.meta.url).resolve(
    `@fontsource-variable/${family}/files/${family}-${script}-wght-normal.woff2`,
  );
  // The package that reads fonts is pdfkit's own: a document that goes nowhere hands it out.
  const scratch = new PDFDocument({ font: null as never, autoFirstPage: false });
  scratch.font(readFileSync(path));
  const { font } = (scratch as unknown as { _font: { font: Typeface } })._font;
  complete(font);
  const createSubset = font.createSubset.bind(font);
  font.createSubset = () => Object.assign(createSubset(), { _addGlyph: addOutline });
  Object.defineProperty(font, "postscriptName", { value: `${name}-${script}` });
  return font;
}

const read = new Map<Script, Typeface>();

/** A font file, read once and not before a text needs it. */
export function typeface(script: Script): Typeface {
  const known = read.get(script) ?? readTypeface(script);
  read.set(script, known);
  return known;
}
