import { defineConfig } from "@lingui/cli";
import { formatter } from "@lingui/format-po";

/**
 * Pages that a worker's phone may load: their texts go to the small part of the catalogue (see shared/i18n/index.ts). A
 * page missing here would show untranslated text until the other part is there.
 */
const workerPages = [
  "src/router.tsx",
  "src/features/session/**",
  "src/features/me/**",
  "src/routes/me*.tsx",
  "src/routes/sign-in.tsx",
  "src/routes/signed-in.tsx",
  "src/routes/signed-out.tsx",
  "src/routes/no-access.tsx",
  "src/routes/not-found.tsx",
  "src/routes/route-error.tsx",
  "src/routes/loading.tsx",
];
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
