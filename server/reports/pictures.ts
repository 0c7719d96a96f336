import { formatMonthName } from "../../shared/format/date";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { formatNumber } from "../../shared/format/number";
import type { Locale } from "../../shared/i18n";
import type { YearReportFigures } from "../../shared/schemas/report";
import type { Block, Pencil } from "./blocks";

/** The scale of every picture, dB, as the strips on screen have it. */
const SCALE = { from: 60, to: 120, step: 10 };
const LABELS_PT = 96;
const NUMBERS_PT = 88;

const placeOf = (pencil: Pencil) => {
  const width = pencil.widthPt - LABELS_PT - NUMBERS_PT;
  return (levelDb: number) =>
    LABELS_PT +
    ((Math.min(SCALE.to, Math.max(SCALE.from, levelDb)) - SCALE.from) / (SCALE.to - SCALE.from)) *
      width;
};

function scale(pencil: Pencil, y: number, locale: Locale): void {
  const x = placeOf(pencil);
  pencil.line(x(SCALE.from), y, x(SCALE.to), y, { widthPt: 0.8 });
  for (let level = SCALE.from; level <= SCALE.to; level += SCALE.step) {
    pencil.line(x(level), y, x(level), y + 3, { widthPt: 0.8 });
    pencil.text(formatLimit(level, locale), x(level), y + 4, "center");
  }
}

interface Mark {
  readonly levelDb: number;
  readonly label: string;
}

const BARS_PT = 74;

/** Days by level, the same scale above for the noise without protection and below at the ear. */
export function histogramPicture(
  locale: Locale,
  steps: YearReportFigures["histogram"],
  lines: readonly {
    readonly title: string;
    readonly name: "outside" | "atEar";
    readonly mark: Mark | null;
  }[],
  stepDb: number,
  alt: string,
): Block {
  const most = Math.max(1, ...steps.flatMap(({ outside, atEar }) => [outside, atEar]));
  return {
    kind: "picture",
    alt,
    heightPt: lines.length * (BARS_PT + 30),
    draw: (pencil) => {
      const x = placeOf(pencil);
      for (const [index, { title, name, mark }] of lines.entries()) {
        const foot = index * (BARS_PT + 30) + BARS_PT + 8;
        pencil.text(title, 0, foot - 10);
        for (const step of steps) {
          const height = (step[name] / most) * BARS_PT;
          const [left, right] = [x(step.fromDb), x(step.fromDb + stepDb)];
          if (height > 0 && right > left)
            pencil.box(left + 0.4, foot - height, right - left - 0.8, height, "bar");
        }
        pencil.text(formatNumber(most, 0, locale), LABELS_PT - 4, foot - BARS_PT - 4, "right");
        pencil.line(LABELS_PT - 3, foot - BARS_PT, LABELS_PT, foot - BARS_PT, { widthPt: 0.6 });
        scale(pencil, foot, locale);
        if (!mark) continue;
        pencil.line(x(mark.levelDb), foot - BARS_PT - 6, x(mark.levelDb), foot + 3, {
          widthPt: 1.6,
        });
        pencil.text(mark.label, x(mark.levelDb) + 3, foot - BARS_PT - 8);
      }
    },
  };
}

const ROW_PT = 15;

/** Each month as a strip: the median without protection, what falls away, and the median at the ear. */
export function monthsPicture(
  locale: Locale,
  months: YearReportFigures["months"],
  heads: { readonly atEar: string; readonly outside: string },
  mark: Mark | null,
  alt: string,
): Block {
  const top = 24;
  return {
    kind: "picture",
    alt,
    heightPt: top + months.length * ROW_PT + 18,
    draw: (pencil) => {
      const x = placeOf(pencil);
      const bottom = top + months.length * ROW_PT + 2;
      const outsideX = pencil.widthPt;
      pencil.text(heads.atEar, LABELS_PT - 8, 0, "right");
      pencil.text(heads.outside, outsideX, 0, "right");
      for (const [index, { month, medianAtEarDb, medianOutsideDb }] of months.entries()) {
        const y = top + index * ROW_PT;
        pencil.text(formatMonthName(month, locale), 0, y);
        pencil.text(formatLevel(medianAtEarDb, locale), LABELS_PT - 8, y, "right");
        pencil.text(formatLevel(medianOutsideDb, locale), outsideX, y, "right");
        if (medianOutsideDb !== null && medianAtEarDb !== null)
          pencil.line(x(medianOutsideDb), y + 3, x(medianAtEarDb), y + 7.5, {
            ink: "bar",
            widthPt: 3,
          });
        if (medianOutsideDb !== null)
          pencil.line(x(medianOutsideDb), y, x(medianOutsideDb), y + 7, { widthPt: 1.4 });
        if (medianAtEarDb !== null)
          pencil.line(x(medianAtEarDb), y + 3.5, x(medianAtEarDb), y + 11, { widthPt: 1.8 });
      }
      scale(pencil, bottom, locale);
      if (!mark) return;
      pencil.line(x(mark.levelDb), top - 4, x(mark.levelDb), bottom, { widthPt: 1.4 });
      pencil.text(mark.label, x(mark.levelDb), top - 14, "center");
    },
  };
}
