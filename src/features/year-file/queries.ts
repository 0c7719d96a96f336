import { queryOptions } from "@tanstack/react-query";
import type { z } from "zod";
import type { Locale } from "../../../shared/i18n";
import type { YearReportPage } from "../../../shared/schemas/report";
import type { GapKind, GapNames, GapsView } from "../../../shared/schemas/waiting";
import { ApiError, api } from "../../lib/api";
import { download } from "../../lib/download";
import { ownReply } from "../../lib/own-reply";
import { parseDictionary } from "./parse-dictionary";

export type Gap = z.infer<typeof GapKind>;
export type GapName = z.infer<typeof GapNames>["rows"][number];
export type GapMonth = GapsView["months"][number];

export interface YearOfSite {
  readonly siteId: string;
  readonly year: number;
}

const dictionaryAddress = (language: Locale) =>
  `/api/exports/year-dictionary.csv?${new URLSearchParams({ language })}`;

export const yearFileQueries = {
  gaps: ({ siteId, year }: YearOfSite) =>
    queryOptions({
      queryKey: ["year-file", "gaps", siteId, year],
      queryFn: ({ signal }) =>
        api.get("/exports/gaps", {
          query: { siteId, year },
          schema: ownReply<GapsView>("counts", "months"),
          signal,
        }),
    }),
  /** Reports issued of the year, the latest first. */
  reports: ({ siteId, year }: YearOfSite) =>
    queryOptions({
      queryKey: ["year-file", "reports", siteId, year],
      queryFn: ({ signal }) =>
        api.get("/year-reports", {
          query: { siteId, year },
          schema: ownReply<z.infer<typeof YearReportPage>>("rows", "can"),
          signal,
        }),
    }),
  names: ({ siteId, year }: YearOfSite, kind: Gap) =>
    queryOptions({
      queryKey: ["year-file", "names", siteId, year, kind],
      queryFn: ({ signal }) =>
        api.get("/exports/gap-names", {
          query: { siteId, year, kind },
          schema: ownReply<z.infer<typeof GapNames>>("rows"),
          signal,
        }),
      select: ({ rows }) => rows,
    }),
  dictionary: (language: Locale) =>
    queryOptions({
      queryKey: ["year-file", "dictionary", language],
      // The columns are the file's own: read from what goes out with it, not told a second time.
      queryFn: async ({ signal }) => {
        const response = await fetch(dictionaryAddress(language), {
          signal,
          credentials: "same-origin",
        });
        if (!response.ok)
          throw new ApiError(response.status, `http-${response.status}`, {}, [], null, "");
        return parseDictionary(await response.text());
      },
      staleTime: Number.POSITIVE_INFINITY,
    }),
};

/** How workers are called in a file. */
export const WORKERS_AS = ["number", "name", "pseudonym"] as const;
export type WorkersAs = (typeof WORKERS_AS)[number];

export function yearFileAddress(
  { siteId, year }: YearOfSite,
  workers: WorkersAs,
  ending: "csv" | "zip" | "xlsx" = "csv",
): string {
  return `/api/exports/year.${ending}?${new URLSearchParams({ siteId, year: String(year), workers })}`;
}

/** Hands both files to the browser, which asks where to put them and shows how far they are. */
export function downloadYear(year: YearOfSite, workers: WorkersAs, language: Locale): void {
  download([yearFileAddress(year, workers), dictionaryAddress(language)]);
}

/** The same for the ZIP with all records, which brings its own dictionary. */
export function downloadRecords(year: YearOfSite, workers: WorkersAs): void {
  download([yearFileAddress(year, workers, "zip")]);
}

/** The same as a workbook, a sheet for each table. */
export function downloadWorkbook(year: YearOfSite, workers: WorkersAs): void {
  download([yearFileAddress(year, workers, "xlsx")]);
}
