export interface Cluster {
  host: string;
  port: number;
  /** The folder that holds its files, belonging to the account that runs it. */
  home: string;
  version: number;
  /** The folder with psql, pg_dump and their like in this cluster's version. */
  programsFolder: string;
  /** Runs SQL through psql; rows come back as «|»-separated lines. */
  sql(
    text: string,
    options?: { database?: string; role?: "app" | "owner" | "super" },
  ): Promise<string[]>;
  url(role: "app" | "owner" | "super", database: string): string;
  isAlive(): boolean;
  /** The one line for a server that is found dead. */
  explainDeath(): Error;
  hasDatabase(name: string): Promise<boolean>;
  createDatabase(name: string, options?: { template?: string }): Promise<void>;
  dropDatabase(name: string): Promise<void>;
  stop(): Promise<void>;
  destroy(): Promise<void>;
}

export function openCluster(options: {
  folder: string;
  /** False gives up surviving a power cut, for throw-away data. */
  durable: boolean;
  firstPort: number;
  log?: (line: string) => void;
}): Promise<Cluster>;
export function explainDatabaseError(report: string, home: string): Error;
