import type { SealFault } from "../shared/schemas/trail-check";
import { configOrExit } from "./config";
import { connect, inTransaction, organizationIds, row } from "./lib/db";
import { checkRows, checkSeals, trailState } from "./queries/trail-check";

/**
 * npm run verify:trail
 * Recomputes every organization's trail and holds all rows against it, under the application's role. Exit code 1 where
 * anything is not as the trail says. With `-- --seal=1234` it prints that seal first, to compare it with one kept elsewhere.
 */
const config = configOrExit("database");
const database = connect(config.DATABASE_URL, { max: 1, application: "dinward verify" });

function sealLine({ kind, number, count, event, table }: SealFault): string {
  const about = event
    ? `event ${event.id}, ${event.action} of ${event.subjectKind} ${event.subjectId ?? ""}, ${event.at}`
    : `entry on rows of ${table ?? "an unknown table"}`;
  switch (kind) {
    case "seal-missing":
      return count > 1
        ? `seals ${number} to ${number + count - 1} are missing`
        : `seal ${number} is missing`;
    case "event-missing":
      return `seal ${number}: its event was removed`;
    case "entry-missing":
      return `seal ${number}: its entry on rows was removed`;
    case "seal-broken":
      return `seal ${number} does not follow: ${about} was changed, or the seal was`;
    case "values-removed":
      return `seal ${number}: what is kept of ${about} was removed, and no erasure did that`;
    case "values-changed":
      return `seal ${number}: what is kept of ${about} is not what was written`;
  }
}

const ROW_WORDS = {
  "row-changed": "was changed behind the trail",
  "row-inserted": "was put in behind the trail",
  "row-removed": "was removed behind the trail",
};

/** @returns how many faults there are. */
async function verify(organizationId: string): Promise<number> {
  const scope = { organizationId, readOnly: true };
  let faults = 0;
  const say = (text: string) => console.log(`  ${text}`);
  const fault = (text: string, count = 1) => {
    faults += count;
    say(`NOT AS IT WAS: ${text}`);
  };
  const { state, name } = await inTransaction(scope, async () => ({
    state: await trailState(organizationId),
    name: (await row<{ name: string }>("SELECT name FROM organizations"))?.name ?? organizationId,
  }));
  console.log(name);
  let seals = 0;
  let erased = 0;
  for (let after: number | null = 0; after !== null; ) {
    const from: number = after;
    const part = await inTransaction(scope, () => checkSeals(organizationId, from));
    seals += part.checked;
    erased += part.erased;
    for (const one of part.faults) fault(sealLine(one), one.count);
    after = part.next;
  }
  say(
    `${seals} seals checked${erased > 0 ? `; of ${erased} events the personal values are erased` : ""}`,
  );
  let rowCount = 0;
  for (const table of state.tables) {
    const checked = await inTransaction(scope, () => checkRows(organizationId, table));
    rowCount += checked.rows;
    for (const { kind, key } of checked.faults) fault(`${table} ${key} ${ROW_WORDS[kind]}`, 0);
    faults += checked.faultCount;
    if (checked.faultCount > checked.faults.length)
      say(`${table}: ${checked.faultCount - checked.faults.length} more`);
  }
  say(`${rowCount} rows of ${state.tables.length} tables checked`);
  for (const table of state.unwatched)
    fault(`changes of ${table} are not recorded: its triggers are off`);
  for (const { roleName, table, operation, rows, firstAt, lastAt, keys } of state.foreign)
    say(
      `by ${roleName}, not by the application: ${operation} of ${rows} in ${table}, ${firstAt} to ${lastAt}, such as ${keys.join(", ")}`,
    );
  for (const { at, roleName, rows } of state.stated)
    say(`${at}: ${rows} rows taken as they stood, by ${roleName}`);
  const { events, entries, since } = state.tail;
  if (since !== null)
    say(`not sealed yet: ${events} events and ${entries} entries on rows, since ${since}`);
  if (state.head)
    say(`head: seal ${state.head.number}, ${state.head.hash}, ${state.head.sealedAt}`);
  return faults;
}

/** What `--seal=1234` asks: the seal as it stands here, to hold against one that was kept elsewhere. */
async function printSeal(organizationId: string, number: number): Promise<void> {
  const found = await inTransaction({ organizationId, readOnly: true }, () =>
    row<{ name: string; hash: string | null }>(
      `SELECT o.name, encode(s.hash, 'hex') AS hash FROM organizations o LEFT JOIN audit_seals s ON s.organization_id = o.id AND s.number = :number
       WHERE o.id = :organizationId`,
      { organizationId, number },
    ),
  );
  console.log(`${found?.name}\n  seal ${number}: ${found?.hash ?? "there is none"}`);
}
const asked = process.argv.find((text) => text.startsWith("--seal="))?.slice("--seal=".length);

try {
  if (asked !== undefined && !/^[1-9]\d{0,14}$/.test(asked))
    throw new Error("--seal= wants the number of a seal");
  if (asked !== undefined)
    for (const organizationId of await organizationIds())
      await printSeal(organizationId, Number(asked));
  let faults = 0;
  for (const organizationId of await organizationIds()) faults += await verify(organizationId);
  console.log(
    faults === 0
      ? "Everything is as the trail says."
      : `${faults} things are not as the trail says.`,
  );
  if (faults > 0) process.exitCode = 1;
} catch (error) {
  console.error(
    `The trail could not be checked: ${error instanceof Error ? error.message : error}`,
  );
  process.exitCode = 1;
} finally {
  await database.close();
}
