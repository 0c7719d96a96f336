import type { Locale } from "../i18n/index";

/** German words that labels begin with and that are no nouns: only these lose their capital inside a sentence. */
const NO_NOUNS: ReadonlySet<string> = new Set([
  "Abgeschlossen",
  "Darunter",
  "Darüber",
  "Erledigt",
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

/** The same text at the start of a sentence. */
export function startsSentence(text: string): string {
  return text.charAt(0).toLocaleUpperCase() + text.slice(1);
}

/** What somebody typed, inside a sentence that ends by itself: without a stop of its own. */
export function withoutStop(text: string): string {
  return text.trim().replace(/\.+$/, "");
}
