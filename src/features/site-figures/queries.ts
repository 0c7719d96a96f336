import { keepPreviousData, queryOptions } from "@tanstack/react-query";
import { SiteFiguresView } from "../../../shared/schemas/site-figures";
import { api } from "../../lib/api";

export const siteFiguresQueries = {
  /** Without a year: the latest on record. */
  of: (siteId: string, year: number | null) =>
    queryOptions({
      queryKey: ["site-figures", siteId, year],
      queryFn: ({ signal }) =>
        api.get(`/sites/${siteId}/figures${year === null ? "" : `?year=${year}`}`, {
          schema: SiteFiguresView,
          signal,
        }),
      placeholderData: keepPreviousData,
    }),
};
