import { daysFromToday } from "./days";
import { insert } from "./insert";
import type { Site } from "./site";

interface FindingOverrides {
  site: Site;
  workerId?: string;
  jobId?: string;
  kind?: string;
  state?: string;
  criterion?: string;
  lastDate?: string;
  lastResultId?: string;
  dueOn?: string;
  ownerId?: string;
}

/** A finding, without the days it would rest on unless a result is given. */
export async function buildFinding(overrides: FindingOverrides): Promise<string> {
  const { site, kind = "over-limit-outside", state = "new", ...facts } = overrides;
  const lastDate = overrides.lastDate ?? daysFromToday(-1);
  return insert("findings", {
    organizationId: site.organizationId,
    siteId: site.id,
    kind,
    state,
    ...facts,
    firstDate: lastDate,
    lastDate,
  });
}

/** A row of a file, without its content in the store. */
export const buildFile = (site: Site, name = "offer.pdf"): Promise<string> =>
  insert("files", {
    organizationId: site.organizationId,
    sha256: Buffer.from(crypto.randomUUID()),
    sizeBytes: 2048,
    mediaType: "application/pdf",
    name,
  });
