import pg from "pg";
import { inject } from "vitest";

async function asSuperuser<T>(work: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client(inject("database").superUrl);
  await client.connect();
  try {
    return await work(client);
  } finally {
    await client.end();
  }
}

/** A fresh copy of the migrated database or of another of this run, in the place of an earlier one of that name. */
export async function copyDatabase(label: string, from?: string) {
  const { prefix, ownerUrl, appUrl, ...rest } = inject("database");
  const template = from ?? rest.template;
  const name = `${prefix}_${label}`;
  await asSuperuser(async (client) => {
    await client.query(`DROP DATABASE IF EXISTS ${name} WITH (FORCE)`);
    await client.query(`CREATE DATABASE ${name} TEMPLATE ${template} OWNER dinward_owner`);
  });
  return {
    name,
    ownerUrl: ownerUrl.replace("DATABASE", name),
    appUrl: appUrl.replace("DATABASE", name),
  };
}

export async function dropDatabase(name: string): Promise<void> {
  await asSuperuser((client) => client.query(`DROP DATABASE IF EXISTS ${name} WITH (FORCE)`));
}
