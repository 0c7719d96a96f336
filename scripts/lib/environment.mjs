/**
 * The environment of the application's processes beside the local services: what an installation
 * sets by hand, filled in for a demo or a test.
 */
export function applicationEnvironment({
  mode,
  cluster,
  database,
  ports,
  publicUrl,
  secrets,
  dataDir,
}) {
  return {
    ...process.env,
    NODE_ENV: mode,
    HOST: "127.0.0.1",
    PORT: String(ports.web),
    DATABASE_URL: cluster.url("app", database),
    OWNER_DATABASE_URL: cluster.url("owner", database),
    OIDC_ISSUER: issuerUrl(ports),
    OIDC_CLIENT_ID: "dinward",
    OIDC_CLIENT_SECRET: secrets.client,
    OIDC_ALLOW_INSECURE: "true",
    SMTP_URL: `smtp://127.0.0.1:${ports.smtp}`,
    MAIL_FROM: "Dinward <noise@dinward.example>",
    MAIL_RETURN_TO: "returned@dinward.example",
    MAIL_HOOK_SECRETS: secrets.hook,
    SESSION_SECRETS: secrets.session,
    PUBLIC_URL: publicUrl,
    DATA_DIR: dataDir,
    TRUST_PROXY: "false",
    LOG_LEVEL: process.env.LOG_LEVEL ?? "info",
  };
}

/** Another host name than the application's, so that cookies and redirects behave as between sites. */
export function issuerUrl(ports) {
  return `http://localhost:${ports.signIn}`;
}

/** `people` is a JSON file, or a folder of such files, with who can sign in. */
export function providerEnvironment({ ports, publicUrl, secrets, people, serviceDir }) {
  return {
    ...process.env,
    NODE_ENV: "development",
    PORT: String(ports.signIn),
    OIDC_ISSUER: issuerUrl(ports),
    OIDC_CLIENT_ID: "dinward",
    OIDC_CLIENT_SECRET: secrets.client,
    PUBLIC_URL: publicUrl,
    DEMO_PEOPLE: people,
    SERVICE_DIR: serviceDir,
  };
}

/** Where the catcher reports mails that come back. */
export function catcherEnvironment({ ports, secrets, serviceDir }) {
  return {
    ...process.env,
    NODE_ENV: "development",
    SMTP_PORT: String(ports.smtp),
    PORT: String(ports.mails),
    HOOK_URL: `http://127.0.0.1:${ports.web}/api/hooks/mail`,
    HOOK_SECRET: secrets.hook,
    SERVICE_DIR: serviceDir,
  };
}

export const providerScript = "scripts/services/oidc-provider.mjs";
export const catcherScript = "scripts/services/smtp-catcher.mjs";
