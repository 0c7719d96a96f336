import type { Locale } from "../i18n/index";

/** German words that labels begin with and that are no nouns: only these lose their capital inside a sentence. */
const NO_NOUNS: ReadonlySet<string> = new Set([
  "Ab",
  "Abgeschlossen",
  "Darunter",
  "Darüber",
  "Die",
  "Erledigt",
  "Etwa",
  "Gar",
  "In",
  "Kein",
  "Linkes",
  "Neu",
  "Nicht",
  "Noch",
  "Rechtes",
  "Oberer",
  "Ohne",
  "Passt",
  "Schützt",
  "Unter",
  "Unterer",
  "Wieder",
  "Zwei",
  "Über",
]);

/** A label inside a sentence: without its capital, unless it begins with a German noun. */
export function withinSentence(text: string, locale: Locale | string): string {
  const [first = ""] = text.split(" ", 1);
  return locale !== "de" || NO_NOUNS.has(first)
    ? text.charAt(0).toLocaleLowerCase(locale) + text.slice(1)
    : text;
}

/** The same text at the start of a sentence: a weekday, say, which Polish and Spanish write small. */
export function startsSentence(text: string, locale?: Locale): string {
  return text.charAt(0).toLocaleUpperCase(locale) + text.slice(1);
}

/** What somebody typed, inside a sentence that ends by itself: without a stop of its own. */
export function withoutStop(text: string): string {
  return text.trim().replace(/\.+$/, "");
}
