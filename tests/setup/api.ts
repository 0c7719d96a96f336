import { mkdtempSync } from "node:fs";
import { join } from "node:path";
import { inject } from "vitest";
import { copyDatabase } from "./copy-database";

/**
 * Before each file with API tests: a database of its own and the environment that the server reads,
 * set here because the server's modules read it when the tests import them.
 */
const { ports, publicUrl, secrets, folder } = inject("services");
const { ownerUrl, appUrl } = await copyDatabase(`worker_${process.env.VITEST_POOL_ID}`);

Object.assign(process.env, {
  NODE_ENV: "test",
  HOST: "127.0.0.1",
  PORT: String(ports.web),
  DATABASE_URL: appUrl,
  OWNER_DATABASE_URL: ownerUrl,
  OIDC_ISSUER: `http://localhost:${ports.signIn}`,
  OIDC_CLIENT_ID: "dinward",
  OIDC_CLIENT_SECRET: secrets.client,
  OIDC_ALLOW_INSECURE: "true",
  SMTP_URL: `smtp://127.0.0.1:${ports.smtp}`,
  MAIL_FROM: "Dinward <noise@dinward.example>",
  MAIL_RETURN_TO: "returned@dinward.example",
  // The second of two: secrets are changed one after the other.
  MAIL_HOOK_SECRETS: `${"newer-secret-".repeat(3)},${secrets.hook}`,
  SESSION_SECRETS: secrets.session,
  PUBLIC_URL: publicUrl,
  DATA_DIR: mkdtempSync(join(folder, "files-")),
  TRUST_PROXY: "false",
  LOG_LEVEL: "silent",
});
