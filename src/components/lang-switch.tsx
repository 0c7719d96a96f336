import { useLingui } from "@lingui/react";
import { LOCALE_NAMES, LOCALES, type Locale } from "../../shared/i18n/index";
import { chooseLocale, rememberChoice, useLocale } from "../lib/i18n";
import { TextButton } from "./link";

/** The other languages, each in its own words. Before the sign-in nobody keeps the choice, so that it is remembered. */
export function LangSwitch({ onChosen }: { onChosen?: (locale: Locale) => void }) {
  const { i18n } = useLingui();
  const current = useLocale();
  return (
    <span className="lang-switch">
      {LOCALES.filter((locale) => locale !== current).map((locale) => (
        <TextButton
          key={locale}
          lang={locale}
          onClick={() =>
            void chooseLocale(i18n, locale).then(() => (onChosen ?? rememberChoice)(locale))
          }
        >
          {LOCALE_NAMES[locale]}
        </TextButton>
      ))}
    </span>
  );
}
