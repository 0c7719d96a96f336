import type { Locale } from "../i18n/index";

/** A label inside a sentence. German nouns keep their capital, so that German keeps all of it. */
export function withinSentence(text: string, locale: Locale | string): string {
  return locale === "en" ? text.charAt(0).toLocaleLowerCase("en") + text.slice(1) : text;
}

/** The same text at the start of a sentence. */
export function startsSentence(text: string): string {
  return text.charAt(0).toLocaleUpperCase() + text.slice(1);
}
