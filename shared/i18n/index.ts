import { type I18n, type Messages, setupI18n } from "@lingui/core";
import { CATALOGUES } from "./compiled/catalogues";
import { LOCALE_NAMES, LOCALES, type Locale } from "./compiled/locales";
import { isolateValues } from "./isolate";

export { LOCALE_NAMES, LOCALES, type Locale };

export function isLocale(value: unknown): value is Locale {
  return LOCALES.some((locale) => locale === value);
}

/** The language that an i18n object speaks. */
export const localeOf = ({ locale }: Pick<I18n, "locale">): Locale =>
  isLocale(locale) ? locale : "en";

/** The first language of an Accept-Language list (or of the browser's) that we speak; English where none is. */
export function pickLocale(wanted: readonly string[]): Locale {
  for (const tag of wanted) {
    const language = tag.split(";")[0]?.split("-")[0]?.trim().toLowerCase();
    if (isLocale(language)) return language;
  }
  return "en";
}

/** Parts of the catalogue (scripts/lib/catalogue-parts.mjs): a page loads what it needs, a worker's phone only the base. */
export type CataloguePart = keyof typeof CATALOGUES;
export const CATALOGUE_PARTS = Object.keys(CATALOGUES) as CataloguePart[];

/** The parts that an i18n object has or is getting, each with its loading: whoever asks again waits for the same one. */
const partsOf = new WeakMap<I18n, Map<CataloguePart, Promise<void>>>();

function partsIn(i18n: I18n): Map<CataloguePart, Promise<void>> {
  const parts = partsOf.get(i18n) ?? new Map<CataloguePart, Promise<void>>();
  partsOf.set(i18n, parts);
  return parts;
}

async function loadMessages(locale: Locale, parts: Iterable<CataloguePart>): Promise<Messages> {
  const catalogues = await Promise.all<{ messages: Messages }>(
    [...parts].map((part) => CATALOGUES[part][locale]()),
  );
  return Object.assign({}, ...catalogues.map((catalogue) => catalogue.messages)) as Messages;
}

/** An i18n object with its compiled catalogue. The server takes all parts; the client starts with the base. */
export async function createI18n(
  locale: Locale,
  parts: readonly CataloguePart[] = CATALOGUE_PARTS,
): Promise<I18n> {
  const i18n = setupI18n({ locale, messages: { [locale]: await loadMessages(locale, parts) } });
  // English text without anything to fill in is left out of the compiled catalogue: it is its own id.
  i18n.setMessagesCompiler((text) => [text]);
  isolateValues(i18n);
  for (const part of parts) partsIn(i18n).set(part, Promise.resolve());
  return i18n;
}

/** Adds a part of the catalogue to an i18n object in use; once it is there, this costs nothing. */
export function addCatalogue(i18n: I18n, part: CataloguePart): Promise<void> {
  const parts = partsIn(i18n);
  const known = parts.get(part);
  if (known) return known;
  // Marked before it is there, so that a change of language meanwhile takes it along.
  const loading = loadPart(i18n, part).catch((error: unknown) => {
    parts.delete(part);
    throw error;
  });
  parts.set(part, loading);
  return loading;
}

/** Loads a part in the language that is active once it has come, and not in the one that was when it was asked for. */
async function loadPart(i18n: I18n, part: CataloguePart): Promise<void> {
  let locale: string;
  do {
    locale = i18n.locale;
    // `load` merges into what is there.
    if (isLocale(locale)) i18n.load(locale, await loadMessages(locale, [part]));
  } while (i18n.locale !== locale);
}

/** Puts another language into an i18n object in use, with all parts that it has, those asked for meanwhile among them. */
export async function activateLocale(i18n: I18n, locale: Locale): Promise<void> {
  const parts = partsIn(i18n);
  let loaded: CataloguePart[];
  let messages: Messages;
  do {
    loaded = parts.size > 0 ? [...parts.keys()] : ["base"];
    messages = await loadMessages(locale, loaded);
  } while ([...parts.keys()].some((part) => !loaded.includes(part)));
  i18n.loadAndActivate({ locale, messages });
}

/** Scripts that are written from the right. */
const FROM_THE_RIGHT: ReadonlySet<string | undefined> = new Set(["Arab", "Hebr", "Syrc", "Thaa"]);

/** From which side a language is written, by the script that it is mostly written in. */
export const directionOf = (language: string): "ltr" | "rtl" =>
  FROM_THE_RIGHT.has(new Intl.Locale(language).maximize().script) ? "rtl" : "ltr";
