import type { I18n } from "@lingui/core";
import type { BandsRead, BandsRefusal } from "./read-bands";

/** What was left out or summed of what was pasted; null: all of it stands in the cells as it was. */
export function readWords(i18n: I18n, { leftOutHz, summedHz }: BandsRead): string | null {
  const words = [
    summedHz.length > 0 && i18n.t("Third-octaves were summed by energy."),
    leftOutHz.length > 0 &&
      i18n.t("Taken at the frequencies of these cells; left out: {bands} Hz.", {
        bands: leftOutHz.join(", "),
      }),
  ].filter((word) => word !== false);
  return words.length === 0 ? null : words.join(" ");
}

/** Why nothing was taken of what was pasted, and what to do. */
export function refusalWords(i18n: I18n, refusal: BandsRefusal): string {
  switch (refusal.code) {
    case "too-many":
      return i18n.t(
        "Nothing was taken: {count} cells were pasted, and {places, plural, one {# band is} other {# bands are}} left from here on. Paste a single row or column, or one together with its frequencies.",
        { count: refusal.count, places: refusal.places },
      );
    case "uneven":
      return i18n.t(
        "Nothing was taken: {count} cells stand under {places} of the head, and which belongs to which is not clear. Paste both rows of the same length.",
        { count: refusal.count, places: refusal.places },
      );
    case "block":
      return i18n.t(
        "Nothing was taken: these are several rows and columns without their frequencies. Paste one row or one column at a time.",
      );
    case "open-end":
      return i18n.t(
        "Nothing was taken: seven cells and a line end may be 125 Hz to 8 kHz, or 63 Hz to 4 kHz with 8 kHz empty. Paste them together with their frequencies, or without the last line end.",
      );
    case "commas":
      return i18n.t(
        "Nothing was taken: a comma is a decimal mark here. Put tabs, semicolons or blanks between the values.",
      );
    case "no-values":
      return i18n.t("Nothing was taken: these are frequencies without values.");
    case "repeated":
      return i18n.t(
        "Nothing was taken: a frequency stands there twice. Paste each row of values with its own frequencies.",
      );
    case "no-band":
      return i18n.t("Nothing was taken: none of these frequencies has a cell here.");
    case "no-whole-octave":
      return i18n.t(
        "Nothing was taken: a level by third-octaves needs all three of an octave, and no octave has them.",
      );
    case "not-summed":
      return i18n.t(
        "Nothing was taken: these are third-octaves, and what is taken off or added can’t be summed to octaves without the noise. Type it by octave.",
      );
  }
}
