import type { I18n } from "@lingui/core";
import { I18nProvider, useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import {
  activateLocale,
  createI18n,
  directionOf,
  isLocale,
  type Locale,
  localeOf,
  pickLocale,
} from "../../shared/i18n/index";

/** Also read by the server, so that its pages and mails speak the chosen language. */
const LOCALE_COOKIE = "dinward.locale";
const A_YEAR_S = 31_536_000;

function readCookie(name: string): string | undefined {
  const entry = document.cookie.split("; ").find((part) => part.startsWith(`${name}=`));
  return entry && decodeURIComponent(entry.slice(name.length + 1));
}

/** Before anybody is signed in: the language last used on this device, else the browser's. */
function chosenLocale(): Locale {
  const stored = readCookie(LOCALE_COOKIE);
  return isLocale(stored) ? stored : pickLocale(navigator.languages);
}

/** Tells the browser the page's language, and from which side it is written. */
function speakIn(locale: Locale): void {
  document.documentElement.lang = locale;
  document.documentElement.dir = directionOf(locale);
}

export async function startI18n(): Promise<I18n> {
  const locale = chosenLocale();
  speakIn(locale);
  return createI18n(locale, ["base"]);
}

/** Chosen while nobody was signed in; kept over the way to the provider and back. */
const CHOICE_BEFORE_SIGN_IN = "dinward.chosen-locale";

export function rememberChoice(locale: Locale): void {
  try {
    sessionStorage.setItem(CHOICE_BEFORE_SIGN_IN, locale);
  } catch {
    // A browser without storage: the choice holds until the sign-in.
  }
}

function takeChoice(): Locale | null {
  try {
    const chosen = sessionStorage.getItem(CHOICE_BEFORE_SIGN_IN) ?? undefined;
    sessionStorage.removeItem(CHOICE_BEFORE_SIGN_IN);
    return isLocale(chosen) ? chosen : null;
  } catch {
    return null;
  }
}

/**
 * Whoever signs in reads what they chose: on the sign-in page, or earlier. A worker who never chose reads the language of
 * the worker's record, which the server answers as theirs. Only before the sign-in is it the browser's.
 */
export async function readAs(
  i18n: I18n,
  ownLanguage: string,
  keep: (locale: Locale) => Promise<void>,
): Promise<void> {
  const chosen = takeChoice();
  if (chosen !== null) {
    if (chosen !== ownLanguage) await keep(chosen);
    return;
  }
  if (isLocale(ownLanguage) && ownLanguage !== i18n.locale) await chooseLocale(i18n, ownLanguage);
}

/** Switches the language at once and keeps it on this device. */
export async function chooseLocale(i18n: I18n, locale: Locale): Promise<void> {
  await activateLocale(i18n, locale);
  speakIn(locale);
  // biome-ignore lint/suspicious/noDocumentCookie: the Cookie Store API is not in every browser that we serve
  document.cookie = `${LOCALE_COOKIE}=${locale}; path=/; max-age=${A_YEAR_S}; samesite=lax`;
}

export function useLocale(): Locale {
  const { i18n } = useLingui();
  return localeOf(i18n);
}

export function LanguageProvider({ i18n, children }: { i18n: I18n; children: ReactNode }) {
  return <I18nProvider i18n={i18n}>{children}</I18nProvider>;
}
