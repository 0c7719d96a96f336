import type { Cluster } from "./cluster.mjs";

export function openTestCluster(): Promise<{
  cluster: Cluster;
  /** Begins the name of every database of this run. */
  prefix: string;
  close(): Promise<void>;
}>;
