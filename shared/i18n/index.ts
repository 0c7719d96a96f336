import { type I18n, type Messages, setupI18n } from "@lingui/core";

export const LOCALES = ["en", "de"] as const;
export type Locale = (typeof LOCALES)[number];

/** Each language in its own words, for the choice before sign-in. */
export const LOCALE_NAMES: Readonly<Record<Locale, string>> = { en: "English", de: "Deutsch" };

export function isLocale(value: unknown): value is Locale {
  return LOCALES.some((locale) => locale === value);
}

/** The first language of an Accept-Language list (or of the browser's) that we speak; English where none is. */
export function pickLocale(wanted: readonly string[]): Locale {
  for (const tag of wanted) {
    const language = tag.split(";")[0]?.split("-")[0]?.trim().toLowerCase();
    if (isLocale(language)) return language;
  }
  return "en";
}

/** Parts of the catalogue (see lingui.config.ts): a page loads what it needs, a worker's phone only the base. */
export const CATALOGUE_PARTS = [
  "base",
  "people",
  "office",
  "rules",
  "day",
  "register",
  "measuring",
  "mail",
] as const;
export type CataloguePart = (typeof CATALOGUE_PARTS)[number];

// One literal import a file, so that the bundler makes one chunk each.
const CATALOGUES: Readonly<
  Record<CataloguePart, Readonly<Record<Locale, () => Promise<{ messages: Messages }>>>>
> = {
  base: { en: () => import("./base-en"), de: () => import("./base-de") },
  people: { en: () => import("./people-en"), de: () => import("./people-de") },
  office: { en: () => import("./office-en"), de: () => import("./office-de") },
  rules: { en: () => import("./rules-en"), de: () => import("./rules-de") },
  day: { en: () => import("./day-en"), de: () => import("./day-de") },
  register: { en: () => import("./register-en"), de: () => import("./register-de") },
  measuring: { en: () => import("./measuring-en"), de: () => import("./measuring-de") },
  mail: { en: () => import("./mail-en"), de: () => import("./mail-de") },
};

const loadedParts = new WeakMap<I18n, Set<CataloguePart>>();

async function loadMessages(locale: Locale, parts: Iterable<CataloguePart>): Promise<Messages> {
  const catalogues = await Promise.all([...parts].map((part) => CATALOGUES[part][locale]()));
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
  loadedParts.set(i18n, new Set(parts));
  return i18n;
}

/** Adds a part of the catalogue to an i18n object in use; once it is there, this costs nothing. */
export async function addCatalogue(i18n: I18n, part: CataloguePart): Promise<void> {
  const parts = loadedParts.get(i18n) ?? new Set<CataloguePart>();
  if (parts.has(part)) return;
  // `load` merges into what is there.
  if (isLocale(i18n.locale)) i18n.load(i18n.locale, await loadMessages(i18n.locale, [part]));
  loadedParts.set(i18n, parts.add(part));
}

/** Puts another language into an i18n object in use, with all parts that it had. */
export async function activateLocale(i18n: I18n, locale: Locale): Promise<void> {
  const parts = loadedParts.get(i18n) ?? ["base"];
  i18n.loadAndActivate({ locale, messages: await loadMessages(locale, parts) });
}
