import type { I18n } from "@lingui/core";
import { formatInstant } from "../../shared/format/date";
import type { Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import type { TrailHead } from "../../shared/schemas/trail-check";
import { row } from "../lib/db";
import { only } from "../lib/only";
import { trailHead } from "../queries/trail-check";
import type { Report } from "./blocks";

/** Of a SHA-256 so much stands at the foot of a page: enough to find the seal. */
const HASH_SHOWN = 16;

/** Whose a report is, and as of when. */
export interface ReportOrigin {
  readonly organization: string;
  readonly site: string;
  readonly timeZone: string;
  readonly asOf: Date;
  readonly trail: Pick<TrailHead, "number" | "hash"> | null;
}

/** Of a site as it is now, inside the transaction that reads what the report says. */
export async function originOf(organizationId: string, siteId: string): Promise<ReportOrigin> {
  const found = await row<Omit<ReportOrigin, "trail">>(
    `SELECT o.name AS organization, s.name AS site, s.time_zone AS "timeZone", now() AS "asOf"
     FROM sites s JOIN organizations o ON o.id = s.organization_id WHERE s.id = :siteId`,
    { siteId },
  );
  return { ...only(found ? [found] : []), trail: await trailHead(organizationId) };
}

/** What every report has in common: its foot, its page numbers and its own dates. */
export function frameOf(
  i18n: I18n,
  locale: Locale,
  { organization, site, timeZone, asOf, trail }: ReportOrigin,
): Pick<Report, "language" | "foot" | "pageOf" | "madeAt" | "author"> {
  const instant = formatInstant(asOf.toISOString(), timeZone, locale);
  return {
    language: locale,
    madeAt: asOf,
    author: `${organization}, ${site}`,
    pageOf: (page, pages) => i18n.t("Page {page} of {pages}", { page, pages }),
    foot: [
      i18n.t("{organization}, {site}. As of {instant} ({zone}).", {
        organization: isolate(organization),
        site: isolate(site),
        instant,
        zone: timeZone,
      }),
      trail
        ? i18n.t("Head of the trail: seal {number}, {hash}…", {
            number: String(trail.number),
            hash: trail.hash.slice(0, HASH_SHOWN),
          })
        : i18n.t("The trail has no seal yet."),
    ],
  };
}
