import { createI18n, isLocale } from "../../shared/i18n";
import {
  GapNames,
  GapNamesQuery,
  GapsView,
  YearDictionaryQuery,
  YearFileQuery,
  YearQuery,
} from "../../shared/schemas/waiting";
import type { Config } from "../config";
import { streamYear } from "../exports/year-csv";
import { yearDictionary } from "../exports/year-dictionary";
import { recordAudit } from "../lib/audit";
import { inTransaction } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { may, sitePolicy } from "../policies";
import { gapNames, yearGaps } from "../queries/gaps";

async function siteToExport(actor: Actor, siteId: string): Promise<Site> {
  const site = await findVisible(Site, sitePolicy, siteId, actor);
  authorize(sitePolicy, actor, "export", site);
  return site;
}

/** A file name that every system takes. */
const fileName = (site: string, year: number) =>
  `${
    site
      .normalize("NFKD")
      .replace(/[^A-Za-z0-9]+/g, "-")
      .replace(/^-+|-+$/g, "")
      .toLowerCase() || "site"
  }-${year}.csv`;

export function defineExportRoutes(config: Pick<Config<"web">, "DATABASE_URL">): void {
  endpoint.get(
    "/exports/year.csv",
    {
      summary: "A site's year as a file, streamed",
      may: may.export,
      query: YearFileQuery,
      streams: true,
    },
    async ({ actor, query, response }) => {
      // The event is committed before the first record leaves: a file that breaks off was an export too.
      const site = await inTransaction({ organizationId: actor.organizationId }, async () => {
        const found = await siteToExport(actor, query.siteId);
        await recordAudit(actor, {
          action: "export-year",
          subjectKind: "site",
          subjectId: found.id,
          values: { year: query.year, workers: query.workers },
        });
        return found;
      });
      response
        .attachment(fileName(site.name, query.year))
        .type("text/csv; charset=utf-8; header=present");
      await streamYear(config.DATABASE_URL, actor, query, response);
    },
  );

  endpoint.get(
    "/exports/year-dictionary.csv",
    {
      summary: "What each column of a year's file means",
      may: may.export,
      query: YearDictionaryQuery,
    },
    async ({ query, actor, response }) => {
      const language = query.language ?? actor.language;
      const i18n = await createI18n(isLocale(language) ? language : "en", ["mail"]);
      response
        .attachment("year-dictionary.csv")
        .type("text/csv; charset=utf-8; header=present")
        .send(yearDictionary(i18n));
    },
  );

  endpoint.get(
    "/exports/gaps",
    {
      summary: "What is missing in a year, before it is exported",
      may: may.export,
      query: YearQuery,
      reply: GapsView,
    },
    async ({ actor, query }) => {
      await siteToExport(actor, query.siteId);
      return yearGaps(actor, query);
    },
  );

  endpoint.get(
    "/exports/gap-names",
    {
      summary: "Who is behind one count of what is missing",
      may: may.export,
      query: GapNamesQuery,
      reply: GapNames,
    },
    async ({ actor, query }) => {
      await siteToExport(actor, query.siteId);
      return { rows: await gapNames(actor, query, query.kind) };
    },
  );
}
