import { z } from "zod";

const secretList = z
  .string()
  .transform((value) =>
    value
      .split(",")
      .map((secret) => secret.trim())
      .filter(Boolean),
  )
  .refine((list) => list.length > 0 && list.every((secret) => secret.length >= 32), {
    message:
      "needs one or more secrets of at least 32 characters, separated by commas; the first signs, all verify",
  });

const trustProxy = z
  .string()
  .default("false")
  .transform((value, context) => {
    if (value === "false" || value === "true") return value === "true";
    if (/^\d+$/.test(value)) return Number(value);
    if (/^[\d.,:/a-f\s]+$|^(loopback|linklocal|uniquelocal)/i.test(value)) return value;
    context.addIssue({
      code: "custom",
      message: "is false, a number of proxies, or their addresses",
    });
    return z.NEVER;
  });

const flag = z
  .enum(["true", "false"])
  .default("false")
  .transform((value) => value === "true");

const database = {
  NODE_ENV: z.enum(["production", "development", "test"]).default("development"),
  DATABASE_URL: z.url({
    protocol: /^postgres(ql)?$/,
    error: "is a postgres:// address of the application's role",
  }),
  LOG_LEVEL: z.enum(["debug", "info", "warn", "error", "silent"]).default("info"),
  DATA_DIR: z.string({ error: "is the folder in which uploaded files are kept" }).min(1),
};

const mail = {
  SMTP_URL: z.url({ protocol: /^smtps?$/, error: "is an smtp:// or smtps:// address" }),
  MAIL_FROM: z
    .string({ error: "is the sender of notices, such as Dinward <noise@example.org>" })
    .min(3),
  PUBLIC_URL: z.url({ protocol: /^https?$/, error: "is the address that people open" }),
};

/** What each process needs. One schema names every missing or bad value in one message. */
const processes = {
  web: z.object({
    ...database,
    ...mail,
    HOST: z.string().default("127.0.0.1"),
    PORT: z.coerce.number().int().min(0).max(65535).default(8080),
    OIDC_ISSUER: z.url({ error: "is the address of the OpenID provider" }),
    OIDC_CLIENT_ID: z.string({ error: "is what the provider calls this client" }).min(1),
    OIDC_CLIENT_SECRET: z.string({ error: "is the client's secret at the provider" }).min(1),
    /** Plain http to the provider: only ever for one on this machine. */
    OIDC_ALLOW_INSECURE: flag,
    SESSION_SECRETS: secretList,
    SESSION_IDLE_MIN: z.coerce.number().int().min(1).default(60),
    SESSION_ABSOLUTE_MIN: z.coerce.number().int().min(1).default(720),
    TRUST_PROXY: trustProxy,
  }),
  work: z.object({ ...database, ...mail }),
  owner: z.object({
    ...database,
    OWNER_DATABASE_URL: z.url({
      error: "is a postgres:// address of the role that owns the tables",
    }),
  }),
};

export type ProcessName = keyof typeof processes;
export type Config<P extends ProcessName> = Readonly<z.output<(typeof processes)[P]>>;

export class ConfigError extends Error {}

/**
 * The environment of one kind of process, parsed once and frozen.
 *
 * @throws ConfigError that names every missing or bad variable.
 */
export function readConfig<P extends ProcessName>(
  process_: P,
  env: NodeJS.ProcessEnv = process.env,
): Config<P> {
  const present = Object.fromEntries(Object.entries(env).filter(([, value]) => value !== ""));
  const parsed = processes[process_].safeParse(present);
  const wrong = parsed.success
    ? []
    : parsed.error.issues.map((issue) => {
        const name = String(issue.path[0]);
        return `  ${name} ${present[name] === undefined ? "is missing: it " : ""}${issue.message}`;
      });
  const values = parsed.success ? (parsed.data as Record<string, unknown>) : {};
  if (
    values.OIDC_ALLOW_INSECURE &&
    !/^http:\/\/(127\.0\.0\.1|localhost|\[::1\])[:/]/.test(`${values.OIDC_ISSUER}/`)
  ) {
    wrong.push("  OIDC_ALLOW_INSECURE is only for a provider on this machine");
  }
  if (
    values.NODE_ENV === "production" &&
    typeof values.PUBLIC_URL === "string" &&
    values.PUBLIC_URL.startsWith("http:") &&
    !/^http:\/\/(127\.0\.0\.1|localhost)([:/]|$)/.test(values.PUBLIC_URL)
  ) {
    wrong.push("  PUBLIC_URL has to be https in production");
  }
  if (wrong.length > 0)
    throw new ConfigError(`The environment is not complete:\n${wrong.join("\n")}`);
  return Object.freeze(parsed.data) as Config<P>;
}

/** For an entry point: the configuration, or one plain message and exit code 1. */
export function configOrExit<P extends ProcessName>(process_: P): Config<P> {
  try {
    return readConfig(process_);
  } catch (error) {
    if (!(error instanceof ConfigError)) throw error;
    console.error(error.message);
    process.exit(1);
  }
}

/** What a program that this one starts may see: the same environment and something more. */
export const childEnvironment = (more: Record<string, string>): NodeJS.ProcessEnv => ({
  ...process.env,
  ...more,
});
