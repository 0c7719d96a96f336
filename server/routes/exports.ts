import { randomBytes } from "node:crypto";
import { createI18n, isLocale } from "../../shared/i18n";
import {
  GapNames,
  GapNamesQuery,
  GapsView,
  YearDictionaryQuery,
  YearFileQuery,
  YearQuery,
} from "../../shared/schemas/waiting";
import { recordYearRead } from "../commands/record-read";
import type { Config } from "../config";
import { streamYear } from "../exports/year-csv";
import { yearDictionary } from "../exports/year-dictionary";
import { streamYearWorkbook } from "../exports/year-workbook";
import { streamYearZip } from "../exports/year-zip";
import { recordAudit } from "../lib/audit";
import { cutOffOnError } from "../lib/cut-off";
import { inTransaction } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { AppError } from "../lib/errors";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { may, sitePolicy, yearPolicy } from "../policies";
import { gapNames, yearGaps } from "../queries/gaps";

/** @throws AppError other-year: a visitor's grant is for other years of the site; forbidden, not-found. */
async function siteToExport(
  actor: Actor,
  { siteId, year }: { siteId: string; year: number },
): Promise<Site> {
  const site = await findVisible(Site, sitePolicy, siteId, actor);
  const years = actor.visits.filter((visit) => visit.siteId === siteId).map(({ year }) => year);
  if (years.length > 0 && !yearPolicy.can.export(actor, { siteId, year }))
    throw new AppError("other-year", 403, { years: years.sort().join(", ") });
  authorize(yearPolicy, actor, "export", { siteId, year });
  return site;
}

/** A file name that every system takes. */
const fileName = (site: string, year: number, ending: "csv" | "zip" | "xlsx") =>
  `${
    site
      .normalize("NFKD")
      .replace(/[^A-Za-z0-9]+/g, "-")
      .replace(/^-+|-+$/g, "")
      .toLowerCase() || "site"
  }-${year}.${ending}`;

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
        const found = await siteToExport(actor, query);
        await recordAudit(actor, {
          action: "export-year",
          subjectKind: "site",
          subjectId: found.id,
          values: { year: query.year, workers: query.workers },
        });
        await recordYearRead(actor, found.id, query.year);
        return found;
      });
      response
        .attachment(fileName(site.name, query.year, "csv"))
        .type("text/csv; charset=utf-8; header=present");
      await streamYear(config.DATABASE_URL, actor, query, response);
    },
  );

  endpoint.get(
    "/exports/year.zip",
    {
      summary: "A site's year with all its records and the means to check them, as a ZIP, streamed",
      may: may.export,
      query: YearFileQuery,
      streams: true,
    },
    async ({ actor, query, response }) => {
      const record = (action: string, values: Record<string, unknown>) =>
        inTransaction({ organizationId: actor.organizationId }, async () => {
          const site = await siteToExport(actor, query);
          await recordAudit(actor, { action, subjectKind: "site", subjectId: site.id, values });
          return site;
        });
      const { year, workers } = query;
      const site = await record("export-year-records", { year, workers });
      await inTransaction({ organizationId: actor.organizationId }, () =>
        recordYearRead(actor, site.id, year),
      );
      const salt = randomBytes(16).toString("hex");
      response.attachment(fileName(site.name, year, "zip")).type("application/zip");
      // Cut off in the middle, it has no list of files and no manifest.
      await cutOffOnError(response, async () => {
        // A file that somebody holds as whole is one that the trail knows by its manifest.
        await streamYearZip(
          actor,
          { siteId: site.id, year, workers, salt },
          new Date(),
          response,
          async (manifestSha256) => {
            await record("finish-year-records", { year, workers, manifestSha256 });
          },
        );
        response.end();
      });
    },
  );

  endpoint.get(
    "/exports/year.xlsx",
    {
      summary: "A site's year with all its records as a workbook, a sheet for each table, streamed",
      may: may.export,
      query: YearFileQuery,
      streams: true,
    },
    async ({ actor, query, response }) => {
      const { year, workers } = query;
      const site = await inTransaction({ organizationId: actor.organizationId }, async () => {
        const found = await siteToExport(actor, query);
        await recordAudit(actor, {
          action: "export-year-workbook",
          subjectKind: "site",
          subjectId: found.id,
          values: { year, workers },
        });
        await recordYearRead(actor, found.id, year);
        return found;
      });
      const salt = randomBytes(16).toString("hex");
      response
        .attachment(fileName(site.name, year, "xlsx"))
        .type("application/vnd.openxmlformats-officedocument.spreadsheetml.sheet");
      // Cut off in the middle, it has no list of sheets and opens nowhere.
      await cutOffOnError(response, () =>
        streamYearWorkbook(actor, { siteId: site.id, year, workers, salt }, new Date(), response),
      );
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
      await siteToExport(actor, query);
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
      await siteToExport(actor, query);
      return { rows: await gapNames(actor, query, query.kind) };
    },
  );
}
