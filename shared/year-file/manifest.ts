import type { TrailHead } from "../schemas/trail-check";

/** Last in the file: whatever else is in it is named here, with its hash. */
export const MANIFEST = "manifest.json";
/** Files of results with their inputs, one a month. */
export const RESULTS_FOLDER = "results/";

export interface ManifestFile {
  path: string;
  sizeBytes: number;
  /** Records, without a head; null where it has none. */
  rows: number | null;
  sha256: string;
}

export interface YearManifest {
  format: 1;
  madeAt: string;
  organization: string;
  site: string;
  timeZone: string;
  year: number;
  workers: "number" | "name" | "pseudonym";
  ruleSets: { key: string; version: number }[];
  methodVersions: number[];
  /** The last seal of the trail when the file was made. */
  trail: TrailHead | null;
  files: ManifestFile[];
}

/** One line of a file of results. */
export interface ResultLine {
  id: string;
  worker: string;
  date: string;
  /** Whether it was the day's result when the file was made; an earlier one is kept beside it. */
  isCurrent: boolean;
  origin: "computed" | "imported";
  methodVersion: number;
  governing: { key: string; version: number };
  comparison: { key: string; version: number }[];
  inputsSha256: string;
  /** What the arithmetic got; null for a result that was imported. */
  input: unknown;
  /** What was stored of the evaluation, by the names of `resultFacts`. */
  outcome: Record<string, unknown>;
}
