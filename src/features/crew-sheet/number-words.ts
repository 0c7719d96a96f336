import type { I18n } from "@lingui/core";

/** Small counts as words, as a sheet on paper has them; from thirteen on in figures. */
export function numberWord(i18n: I18n, count: number): string {
  switch (count) {
    case 0:
      return i18n.t("none");
    case 1:
      return i18n.t("one");
    case 2:
      return i18n.t("two");
    case 3:
      return i18n.t("three");
    case 4:
      return i18n.t("four");
    case 5:
      return i18n.t("five");
    case 6:
      return i18n.t("six");
    case 7:
      return i18n.t("seven");
    case 8:
      return i18n.t("eight");
    case 9:
      return i18n.t("nine");
    case 10:
      return i18n.t("ten");
    case 11:
      return i18n.t("eleven");
    case 12:
      return i18n.t("twelve");
    default:
      return String(count);
  }
}

/** A sentence or a heading begins with a capital. */
export const capital = (i18n: I18n, text: string): string =>
  text.charAt(0).toLocaleUpperCase(i18n.locale) + text.slice(1);
