import { defineConfig } from "@lingui/cli";
import { formatter } from "@lingui/format-po";

/** The worker's own pages: their texts go to the small part of the catalogue (see shared/i18n/index.ts). */
const workerPages = ["src/features/own-*/**", "src/routes/own-*"];
const tests = ["**/*.test.ts", "**/*.test.tsx"];

export default defineConfig({
  sourceLocale: "en",
  locales: ["en", "de"],
  fallbackLocales: { default: "en" },
  catalogs: [
    {
      path: "<rootDir>/shared/i18n/{locale}",
      include: ["src/components", "src/lib", ...workerPages],
      exclude: tests,
    },
    {
      path: "<rootDir>/shared/i18n/office-{locale}",
      include: ["src", "server", "shared"],
      exclude: [...tests, "shared/i18n/**", "src/components/**", "src/lib/**", ...workerPages],
    },
  ],
  // Without origins and line numbers a moved line changes no catalogue.
  format: formatter({ origins: false, lineNumbers: false, explicitIdAsDefault: true }),
  orderBy: "messageId",
  compileNamespace: "ts",
});
