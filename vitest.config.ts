import { defineConfig } from "vitest/config";

const published = ["./tests/setup/printed.ts"];

/**
 * Parts of `npm test`; each also runs alone: npx vitest run --project api. Tests of pure functions share their modules
 * (`isolate: false`): loading the engine anew for each file took longer than the tests.
 */
export default defineConfig({
  test: {
    globalSetup: "./tests/setup/catalogues.ts",
    projects: [
      {
        test: {
          name: "unit",
          include: [
            "{shared,server,scripts,migrations,seeders,bench}/**/*.test.ts",
            "tests/*.test.ts",
          ],
          setupFiles: published,
          testTimeout: 30_000,
          isolate: false,
        },
      },
      {
        test: {
          name: "published",
          include: ["tests/published/**/*.test.ts"],
          setupFiles: published,
          testTimeout: 30_000,
          isolate: false,
        },
      },
      {
        test: {
          name: "client",
          include: ["src/**/*.test.{ts,tsx}"],
          environment: "jsdom",
          setupFiles: "./tests/setup/client.ts",
          testTimeout: 30_000,
        },
      },
      {
        test: {
          name: "api",
          include: ["tests/api/**/*.test.ts"],
          globalSetup: ["./tests/setup/global-database.ts", "./tests/setup/global-services.ts"],
          setupFiles: "./tests/setup/api.ts",
          testTimeout: 20_000,
          hookTimeout: 30_000,
        },
      },
      {
        test: {
          name: "platform",
          include: ["tests/platform/**/*.test.ts"],
          fileParallelism: false,
          testTimeout: 240_000,
          hookTimeout: 240_000,
        },
      },
      {
        test: {
          name: "e2e",
          include: ["tests/e2e/**/*.test.ts"],
          globalSetup: "./tests/setup/global-database.ts",
          fileParallelism: false,
          testTimeout: 120_000,
          hookTimeout: 240_000,
        },
      },
    ],
  },
});
