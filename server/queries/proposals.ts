import { createHash } from "node:crypto";
import { LRUCache } from "lru-cache";
import type { ProtectorData } from "../../shared/acoustics/types";
import type { ExpectedDay } from "../../shared/findings/expected";
import { type OnWorker, type Proposal, proposeRemedy } from "../../shared/findings/remedy";

/** Usual days of the people of a large organization; each is some names and numbers. */
const KEPT = 20_000;
const kept = new LRUCache<string, { readonly proposal: Proposal | null }>({ max: KEPT });

const digestOf = (values: readonly unknown[]): string =>
  createHash("sha256").update(JSON.stringify(values)).digest("base64");

/**
 * What would put usual days right. A search through the whole register for each person takes long for a page, and its
 * outcome follows from what it is given alone: it is kept under a digest of all of that.
 */
export function proposalsFrom(
  register: readonly ProtectorData[],
): (day: ExpectedDay, onWorker: OnWorker | undefined) => Proposal | null {
  const registerDigest = digestOf([register]);
  return ({ input, governing }, onWorker) => {
    const { key, version } = governing;
    const digest = digestOf([registerDigest, key, version, input, [...(onWorker ?? [])]]);
    const known = kept.get(digest);
    if (known) return known.proposal;
    const proposal = proposeRemedy(input, governing, register, onWorker);
    kept.set(digest, { proposal });
    return proposal;
  };
}
