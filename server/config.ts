import { z } from "zod";

/** What each value has to be, said where it is missing or not so. */
const text = (needed: string) => z.string({ error: needed }).min(1, { error: needed });

const address = (protocol: RegExp, needed: string) => z.url({ protocol, error: needed });

const wholeNumber = (from: number, to: number, otherwise: number, needed: string) =>
  z
    .string()
    .default(String(otherwise))
    .transform(Number)
    .refine((value) => Number.isInteger(value) && value >= from && value <= to, { error: needed });

const minutes = (otherwise: number) =>
  wholeNumber(1, 525_600, otherwise, "a whole number of minutes, 1 or more");

const choice = <const T extends readonly string[]>(values: T, otherwise: T[number]) =>
  z
    .enum(values, { error: `one of ${values.slice(0, -1).join(", ")} or ${values.at(-1)}` })
    .default(otherwise as never);

const SECRETS_NEEDED =
  "one or more secrets of at least 32 characters each, separated by commas; the first signs, all verify";
const secretList = z
  .string({ error: SECRETS_NEEDED })
  .transform((value) =>
    value
      .split(",")
      .map((secret) => secret.trim())
      .filter(Boolean),
  )
  .refine((list) => list.length > 0 && list.every((secret) => secret.length >= 32), {
    error: SECRETS_NEEDED,
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
      message: "false, a number of proxies, or the proxies' addresses",
    });
    return z.NEVER;
  });

const flag = choice(["true", "false"], "false").transform((value) => value === "true");

const database = {
  NODE_ENV: choice(["production", "development", "test"], "development"),
  DATABASE_URL: address(
    /^postgres(ql)?$/,
    "the postgres:// address of the database, with the application's role",
  ),
  LOG_LEVEL: choice(["debug", "info", "warn", "error", "silent"], "info"),
  DATA_DIR: text("the folder in which uploaded files are kept"),
};

const mail = {
  SMTP_URL: address(/^smtps?$/, "the smtp:// or smtps:// address of the mail server"),
  MAIL_FROM: text("the sender of notices, such as Dinward <noise@example.org>"),
  PUBLIC_URL: address(/^https?$/, "the https:// address that people open"),
  /** Where mails that can't be delivered go back to; else to the sender. */
  MAIL_RETURN_TO: z.email({ error: "the address to which undeliverable mails return" }).optional(),
};

/** What each process needs. One schema names every missing or bad value in one message. */
const processes = {
  web: z.object({
    ...database,
    ...mail,
    HOST: z.string().default("127.0.0.1"),
    PORT: wholeNumber(0, 65_535, 8080, "a port number from 0 to 65535"),
    OIDC_ISSUER: address(/^https?$/, "the https:// address of the OpenID provider"),
    OIDC_CLIENT_ID: text("the name of this client at the provider"),
    OIDC_CLIENT_SECRET: text("this client's secret at the provider"),
    /** Plain http to the provider: only ever for one on this machine. */
    OIDC_ALLOW_INSECURE: flag,
    SESSION_SECRETS: secretList,
    SESSION_IDLE_MIN: minutes(60),
    SESSION_ABSOLUTE_MIN: minutes(720),
    TRUST_PROXY: trustProxy,
    /** Under which mail servers sign what became of a mail; none: nobody may report it. */
    MAIL_HOOK_SECRETS: secretList.default([]),
  }),
  work: z.object({ ...database, ...mail }),
  /** What only reads the database. */
  database: z.object({ DATABASE_URL: database.DATABASE_URL }),
  owner: z.object({
    ...database,
    OWNER_DATABASE_URL: address(
      /^postgres(ql)?$/,
      "the postgres:// address of the database, with the role that owns the tables",
    ),
  }),
};

export type ProcessName = keyof typeof processes;
export type Config<P extends ProcessName> = Readonly<z.output<(typeof processes)[P]>>;

export class ConfigError extends Error {}

const isOnThisMachine = (url: string) =>
  /^http:\/\/(127\.0\.0\.1|localhost|\[::1\])([:/]|$)/.test(url);

/** What no value shows by itself. Read from the text as given, so that it is said beside all the rest. */
function conflicts(process_: ProcessName, given: NodeJS.ProcessEnv): Record<string, string> {
  const { NODE_ENV, PUBLIC_URL = "", OIDC_ISSUER = "", OIDC_ALLOW_INSECURE } = given;
  const found: Record<string, string> = {};
  if (
    process_ !== "owner" &&
    process_ !== "database" &&
    NODE_ENV === "production" &&
    PUBLIC_URL.startsWith("http:") &&
    !isOnThisMachine(PUBLIC_URL)
  )
    found.PUBLIC_URL = "has to begin with https:// in production";
  if (process_ !== "web") return found;
  const isPlain = OIDC_ISSUER.startsWith("http:");
  if (OIDC_ALLOW_INSECURE === "true" && OIDC_ISSUER !== "" && !isOnThisMachine(OIDC_ISSUER))
    found.OIDC_ALLOW_INSECURE =
      "may be true only where OIDC_ISSUER is an http:// address on this machine";
  else if (isPlain && !isOnThisMachine(OIDC_ISSUER))
    found.OIDC_ISSUER = "has to begin with https://";
  return found;
}

/**
 * The environment of one kind of process, parsed once and frozen.
 *
 * @throws ConfigError that names every missing or bad variable.
 */
export function readConfig<P extends ProcessName>(
  process_: P,
  env: NodeJS.ProcessEnv = process.env,
): Config<P> {
  const given = Object.fromEntries(Object.entries(env).filter(([, value]) => value !== ""));
  const parsed = processes[process_].safeParse(given);
  const wrong = conflicts(process_, given);
  for (const { path, message } of parsed.error?.issues ?? []) {
    const name = String(path[0]);
    wrong[name] = given[name] === undefined ? `is missing: ${message}` : `has to be ${message}`;
  }
  const lines = Object.keys(processes[process_].shape)
    .filter((name) => wrong[name] !== undefined)
    .map((name) => `  ${name} ${wrong[name]}`);
  if (lines.length > 0 || !parsed.success)
    throw new ConfigError(`The environment is not complete:\n${lines.join("\n")}`);
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
