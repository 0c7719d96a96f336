import { type I18n, setupI18n } from "@lingui/core";
import { compileMessage } from "@lingui/message-utils/compileMessage";
import type { ReactNode } from "react";
import type { Locale } from "../../shared/i18n/index";
import { LanguageProvider } from "./i18n";

/** Messages are compiled from their ids, so that a test needs no catalogue. */
export function testI18n(locale: Locale = "en"): I18n {
  return setupI18n({ locale, messages: { [locale]: {} } }).setMessagesCompiler(compileMessage);
}

export function TestLanguage({ locale, children }: { locale?: Locale; children: ReactNode }) {
  return <LanguageProvider i18n={testI18n(locale)}>{children}</LanguageProvider>;
}
