/**
 * npm run setup -- --organization NAME --site NAME --time-zone ZONE --rule-set KEY --administrator NAME
 *   (--email ADDRESS | --subject SUBJECT) [--compare KEY]… [--language en|de] [--from YYYY-MM-DD]
 * Brings the schema up and lays out an organization, its first site and its first administrator, in one transaction.
 * An organization that is there already is left alone, and said so.
 */
import { randomUUID } from "node:crypto";
import { parseArgs } from "node:util";
import { Sequelize } from "sequelize";
import { RULE_SETS } from "../shared/rule-sets";
import { NewSiteInput } from "../shared/schemas/site";
import { UserInput } from "../shared/schemas/user";
import { createSite } from "./commands/create-site";
import { configOrExit } from "./config";
import { recordAudit } from "./lib/audit";
import { todayAt } from "./lib/calendar";
import { connect, execute, inTransaction, row } from "./lib/db";
import { AppError } from "./lib/errors";
import { migrateUp } from "./lib/migrator";
import { Actor } from "./lib/policy";
import { defineModels } from "./models";

class SetupError extends Error {}

const options = {
  organization: { type: "string" },
  site: { type: "string" },
  "time-zone": { type: "string" },
  "rule-set": { type: "string" },
  compare: { type: "string", multiple: true },
  language: { type: "string" },
  from: { type: "string" },
  administrator: { type: "string" },
  email: { type: "string" },
  subject: { type: "string" },
} as const;

const meanings: Record<string, string> = {
  organization: "--organization is the organization's name",
  site: "--site is the first site's name",
  "time-zone": "--time-zone is the site's zone, such as Europe/London",
  "rule-set": `--rule-set is the governing one: ${[...new Set(RULE_SETS.map(({ key }) => key))].join(", ")}`,
  administrator: "--administrator is the name of the first administrator",
};

function readFlags() {
  let values: ReturnType<typeof parseArgs<{ options: typeof options }>>["values"];
  try {
    ({ values } = parseArgs({ options }));
  } catch (error) {
    throw new SetupError((error as Error).message);
  }
  const missing = Object.keys(meanings).filter((name) => !values[name as keyof typeof options]);
  const wrong = missing.map((name) => meanings[name]);
  if (!values.email && !values.subject)
    wrong.push("--email or --subject says by what the provider knows the administrator");
  if (wrong.length > 0) throw new SetupError(`Say more:\n  ${wrong.join("\n  ")}`);
  const { organization = "", language = "en", email = null, subject = null } = values;
  const site = NewSiteInput.safeParse({
    name: values.site,
    timeZone: values["time-zone"],
    language,
    settings: {
      effectiveFrom: values.from ?? todayAt("UTC"),
      governingRuleSet: values["rule-set"],
      comparisonRuleSets: values.compare ?? [],
    },
  });
  const user = UserInput.safeParse({
    name: values.administrator,
    email,
    expectedSubject: subject,
    language,
    grants: [{ role: "administrator" }],
  });
  const issues = [...(site.error?.issues ?? []), ...(user.error?.issues ?? [])];
  if (!site.success || !user.success)
    throw new SetupError(
      issues.map(({ path, message }) => `${path.join(".")}: ${message}`).join("\n  "),
    );
  return { organization: organization.trim(), site: site.data, user: user.data };
}

async function findOrganization(name: string): Promise<boolean> {
  const scope = { settings: { "app.scope": "scheduler" }, readOnly: true };
  return (
    (await inTransaction(scope, () =>
      row("SELECT 1 AS one FROM organizations WHERE name = :name", { name }),
    )) !== null
  );
}

async function layOut({ organization, site, user }: ReturnType<typeof readFlags>): Promise<void> {
  const [organizationId, userId] = [randomUUID(), randomUUID()];
  await inTransaction({ organizationId }, async () => {
    await execute("INSERT INTO organizations (id, name) VALUES ($1, $2)", [
      organizationId,
      organization,
    ]);
    await execute(
      "INSERT INTO users (id, organization_id, name, email, expected_subject, language) VALUES ($1, $2, $3, $4, $5, $6)",
      [userId, organizationId, user.name, user.email, user.expectedSubject, user.language],
    );
    await execute(
      "INSERT INTO role_grants (organization_id, user_id, role) VALUES ($1, $2, 'administrator')",
      [organizationId, userId],
    );
    const actor = new Actor(userId, organizationId, user.name, user.email, user.language, null, [
      { role: "administrator", siteId: null },
    ]);
    await recordAudit(
      { organizationId },
      { action: "create-user", subjectKind: "user", subjectId: userId, values: { ...user } },
    );
    await createSite(actor, site);
  });
}

/** What went wrong, in one line that can be acted on. */
function explain(error: unknown): string {
  if (error instanceof SetupError) return error.message;
  if (error instanceof AppError)
    return (
      error.issues
        .map(({ path, code, params }) => [path.join("."), code, ...Object.values(params)].join(" "))
        .join("\n  ") || error.code
    );
  const { original } = error as { original?: { constraint?: string; code?: string } };
  if (original?.constraint === "users_email" || original?.constraint === "users_expected_subject")
    return "this e-mail or subject is granted in another organization already";
  return error instanceof Error ? error.message : String(error);
}

const config = configOrExit("owner");
const owner = new Sequelize(config.OWNER_DATABASE_URL, { logging: false, pool: { max: 3 } });
const application = connect(config.DATABASE_URL, { max: 2, application: "dinward setup" });
defineModels(application);
try {
  const flags = readFlags();
  await migrateUp(
    owner,
    config.OWNER_DATABASE_URL,
    decodeURIComponent(new URL(config.DATABASE_URL).username),
  );
  if (await findOrganization(flags.organization))
    throw new SetupError(
      `the organization ${flags.organization} is there already; nothing was changed`,
    );
  await layOut(flags);
  console.log(
    `${flags.organization} is set up: ${flags.user.name} can sign in as its administrator and grant the other roles.`,
  );
} catch (error) {
  console.error(`Setting up failed: ${explain(error)}`);
  process.exitCode = 1;
} finally {
  await Promise.all([owner.close(), application.close()]);
}
