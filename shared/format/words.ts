import type { Locale } from "../i18n/index";

/** A label inside a sentence. German nouns keep their capital, so that German keeps all of it. */
export function withinSentence(text: string, locale: Locale | string): string {
  return locale === "en" ? text.charAt(0).toLocaleLowerCase("en") + text.slice(1) : text;
}
