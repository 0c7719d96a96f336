import { defineConfig } from "@lingui/cli";
import { formatter } from "@lingui/format-po";

/** One file a language; English is in the sources. A language more: its name here, then `npm run i18n`. */
export default defineConfig({
  sourceLocale: "en",
  locales: ["de", "es", "pl"],
  catalogs: [
    {
      path: "<rootDir>/shared/i18n/{locale}",
      include: ["src", "server", "shared"],
      exclude: ["**/*.test.ts", "**/*.test.tsx", "shared/i18n/compiled/**"],
    },
  ],
  // Without origins and line numbers a moved line changes no catalogue.
  format: formatter({ origins: false, lineNumbers: false, explicitIdAsDefault: true }),
  orderBy: "messageId",
});
