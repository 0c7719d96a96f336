import type { I18n } from "@lingui/core";
import { I18nProvider, useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { isLocale, LOCALE_NAMES, LOCALES } from "../../shared/i18n";
import type { IssueSlip } from "../../shared/schemas/choice";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { PageBody, PageHead } from "../components/page";
import { IssueSlipPage } from "../features/choosing/issue-slip";
import { choiceQueries } from "../features/choosing/queries";
import { slipWords } from "../features/choosing/slip-words";
import { useUser } from "../features/session/session";
import { ProtectorWays } from "./protector-frame";
import "../styles/choosing.css";
import "../styles/field-sheet.css";

/** What goes along with a protector: a page for each worker, to be signed. */
export function Component() {
  const { i18n } = useLingui();
  const [search, setSearch] = useSearchParams();
  const workerIds = search.get("workers") ?? "";
  const { name } = useUser();
  const slips = useQuery(choiceQueries.slips(workerIds));
  const asked = search.get("language");
  const language = isLocale(asked) ? asked : null;
  const languages = language ? [language] : (slips.data ?? []).map(({ worker }) => worker.language);
  const words = useQuery(slipWords(LOCALES.filter((locale) => languages.includes(locale))));
  const data = words.data && slips.data;
  const error = slips.error ?? words.error;
  /** In the language asked for, else in the worker's. */
  function wordsFor({ worker }: IssueSlip): I18n {
    const locale = language ?? (isLocale(worker.language) ? worker.language : null);
    return (locale && words.data?.get(locale)) ?? i18n;
  }
  return (
    <div className="field-sheets">
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Issue slips")}
          lead={
            data &&
            i18n.t(
              "{count, plural, one {# page} other {# pages}} of A4, with what is assigned today.",
              {
                count: data.length,
              },
            )
          }
          actions={
            data && (
              <Button kind="primary" onClick={() => window.print()}>
                {i18n.t("Print")}
              </Button>
            )
          }
        />
        {workerIds === "" && (
          <Empty title={i18n.t("Nobody is named.")}>
            {i18n.t("Slips are printed from a worker’s page, or after choosing for a group.")}
          </Empty>
        )}
        {workerIds !== "" && (
          <FilterRow label={i18n.t("Language")}>
            <FilterSelect
              label={i18n.t("Language of the slips")}
              value={language ?? ""}
              choices={[
                { value: "", label: i18n.t("each worker’s own") },
                ...LOCALES.map((locale) => ({ value: locale, label: LOCALE_NAMES[locale] })),
              ]}
              onChange={(chosen) =>
                setSearch(
                  (before) => {
                    const next = new URLSearchParams(before);
                    if (chosen === "") next.delete("language");
                    else next.set("language", chosen);
                    return next;
                  },
                  { replace: true },
                )
              }
            />
          </FilterRow>
        )}
        {error && (
          <Failed
            error={error}
            onRetry={() => {
              void slips.refetch();
              void words.refetch();
            }}
          />
        )}
        {data?.map((slip) => (
          <I18nProvider key={slip.worker.id} i18n={wordsFor(slip)}>
            <IssueSlipPage slip={slip} issuedBy={name} />
          </I18nProvider>
        ))}
      </PageBody>
    </div>
  );
}
