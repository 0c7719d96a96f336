import type { I18n } from "@lingui/core";
import { queryOptions } from "@tanstack/react-query";
import { createI18n, type Locale } from "../../../shared/i18n";

/** What a slip's words stand in: its own, the rules' and everybody's. */
const PARTS = ["base", "rules", "register"] as const;

/** The words of slips in some languages: a slip is for its worker, whatever the office reads. */
export const slipWords = (locales: readonly Locale[]) =>
  queryOptions({
    queryKey: ["slip-words", locales],
    queryFn: async (): Promise<ReadonlyMap<Locale, I18n>> =>
      new Map(
        await Promise.all(
          locales.map(async (locale) => [locale, await createI18n(locale, PARTS)] as const),
        ),
      ),
    staleTime: Number.POSITIVE_INFINITY,
    // Not data that could be compared piece by piece with what was there before.
    structuralSharing: false,
  });
