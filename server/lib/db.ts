import { AsyncLocalStorage } from "node:async_hooks";
import { type BindOrReplacements, QueryTypes, Sequelize, Transaction } from "sequelize";

interface Frame {
  values: Map<string, unknown>;
}

const storage = new AsyncLocalStorage<Frame>();

/** Sequelize looks its transaction up in such a namespace; this one rests on Node's own AsyncLocalStorage. */
const namespace = {
  get: (key: string) => storage.getStore()?.values.get(key),
  set: (key: string, value: unknown) => storage.getStore()?.values.set(key, value),
  run: (work: () => unknown) =>
    storage.run({ values: new Map(storage.getStore()?.values ?? []) }, work),
  bind: <F>(work: F): F => work,
};
// biome-ignore lint/correctness/useHookAtTopLevel: Sequelize's name for it, no hook
Sequelize.useCLS(namespace);

let instance: Sequelize | undefined;

export function connect(
  url: string,
  options: { max?: number; application?: string } = {},
): Sequelize {
  instance = new Sequelize(url, {
    dialect: "postgres",
    logging: false,
    pool: { max: options.max ?? 10, acquire: 10_000, idle: 30_000 },
    define: { underscored: true, timestamps: false },
    dialectOptions: {
      application_name: options.application ?? "dinward",
      statement_timeout: 120_000,
      lock_timeout: 15_000,
    },
    retry: { max: 0 },
  });
  return instance;
}

export function sequelize(): Sequelize {
  if (!instance) throw new Error("connect() comes first");
  return instance;
}

export interface Scope {
  organizationId?: string;
  readOnly?: boolean;
  isolation?: "repeatable-read";
  /** Further settings of the transaction, such as the provider's statement at sign-in. */
  settings?: Record<string, string>;
}

/**
 * One transaction whose rows are those of one organization. Every query inside joins it by itself.
 */
export function inTransaction<T>(
  scope: Scope,
  work: (transaction: Transaction) => Promise<T>,
): Promise<T> {
  const isolationLevel =
    scope.isolation === "repeatable-read"
      ? Transaction.ISOLATION_LEVELS.REPEATABLE_READ
      : undefined;
  return sequelize().transaction({ isolationLevel }, async (transaction) => {
    const settings = { "app.organization": scope.organizationId ?? "", ...scope.settings };
    const entries = Object.entries(settings);
    const calls = entries.map(
      (_, index) => `set_config($${2 * index + 1}, $${2 * index + 2}, true)`,
    );
    await sequelize().query(
      `SELECT ${calls.join(", ")}${scope.readOnly ? ", set_config('transaction_read_only', 'on', true)" : ""}`,
      {
        bind: entries.flat(),
        transaction,
      },
    );
    return work(transaction);
  });
}

/** The transaction that the present work runs in; there has to be one. */
export function currentTransaction(): Transaction {
  const transaction = namespace.get("transaction") as Transaction | undefined;
  if (!transaction) throw new Error("no transaction: commands and queries run inside one");
  return transaction;
}

/**
 * Rows of a query, inside the present transaction. Values go in as `:name`; long ones, such as the JSON of many rows,
 * as `$1` from a list, which leaves them out of the text that is taken apart on both sides.
 */
export async function rows<Row extends object>(
  text: string,
  values: Record<string, unknown> | readonly unknown[] = {},
): Promise<Row[]> {
  const given = Array.isArray(values)
    ? { bind: [...values] }
    : { replacements: values as BindOrReplacements as Record<string, unknown> };
  return sequelize().query<Row>(text, {
    type: QueryTypes.SELECT,
    ...given,
    transaction: currentTransaction(),
  });
}

export async function row<Row extends object>(
  text: string,
  replacements: Record<string, unknown> = {},
): Promise<Row | null> {
  return (await rows<Row>(text, replacements))[0] ?? null;
}

/** A statement whose rows nobody reads; returns how many it touched. */
export async function execute(text: string, bind: readonly unknown[] = []): Promise<number> {
  const [, result] = await sequelize().query(text, {
    bind: [...bind],
    transaction: currentTransaction(),
  });
  // Sequelize gives a count for INSERT and UPDATE, and pg's own result for everything else.
  return typeof result === "number"
    ? result
    : ((result as { rowCount?: number } | undefined)?.rowCount ?? 0);
}

/** Every organization's id, for work that recurs. */
export async function organizationIds(): Promise<string[]> {
  return inTransaction({ settings: { "app.scope": "scheduler" }, readOnly: true }, async () =>
    (await rows<{ id: string }>("SELECT id FROM organizations ORDER BY created_at")).map(
      ({ id }) => id,
    ),
  );
}
