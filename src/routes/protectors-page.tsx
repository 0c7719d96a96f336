import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatLevel } from "../../shared/format/level";
import { NO_FIGURE } from "../../shared/format/number";
import type { ProtectorView } from "../../shared/schemas/protector";
import { protectorKindWord } from "../../shared/words/register-words";
import { ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { protectorQueries } from "../features/protectors/queries";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { useIsPhone } from "../lib/use-is-phone";
import { paths } from "../paths";
import { ProtectorWays } from "./protector-frame";

type Group = "passive" | "active" | "archived";

const groupOf = ({ isArchived, data }: ProtectorView): Group =>
  isArchived ? "archived" : data.active ? "active" : "passive";
const ORDER: readonly Group[] = ["passive", "active", "archived"];

/** The register of protectors: kind, labelled data, and how many wear each today. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isPhone = useIsPhone();
  const isOfficer = hasRole(useUser(), "officer");
  const { data, isPending, error, refetch } = useQuery(protectorQueries.list());
  const rows = (data?.rows ?? []).toSorted(
    (a, b) => ORDER.indexOf(groupOf(a)) - ORDER.indexOf(groupOf(b)),
  );
  const groupLabel: Record<Group, string> = {
    passive: i18n.t("Cups and plugs"),
    active: i18n.t("With an active part"),
    archived: i18n.t("No longer given out"),
  };
  /** The heading says whether it has an active part, except of what is no longer given out. */
  const kindOf = ({ kind, isArchived, data: { active } }: ProtectorView) =>
    isArchived && active
      ? i18n.t("{kind}, with an active part", { kind: protectorKindWord(i18n, kind) })
      : protectorKindWord(i18n, kind);
  const percentile = ({ data: { percentile: pair } }: ProtectorView) =>
    pair &&
    i18n.t("{most} to {few}", {
      most: formatLevel(pair.mostDb, locale),
      few: formatLevel(pair.fewDb, locale),
    });
  const label = (id: "usRatingDb" | "snrDb" | "hDb" | "mDb" | "lDb" | "slc80Db", head: string) => ({
    id,
    head,
    unit: "dB",
    kind: "figure" as const,
    hidesOnPhone: true,
    sortValue: (row: ProtectorView) => row.data[id],
    cell: (row: ProtectorView) => formatLevel(row.data[id], locale),
  });
  return (
    <>
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Protectors")}
          lead={
            data &&
            i18n.t(
              "{models, plural, one {# protector} other {# protectors}} on the register, assigned to {wearers, plural, one {# person} other {# people}} today.",
              {
                models: rows.filter((row) => !row.isArchived).length,
                wearers: data.wearersToday,
              },
            )
          }
          actions={
            isOfficer && (
              <ButtonLink kind="primary" to={paths.newProtector}>
                {i18n.t("New protector")}
              </ButtonLink>
            )
          }
        />
        <DataTable<ProtectorView>
          caption={i18n.t("Protectors")}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          rows={rows}
          rowKey={({ id }) => id}
          groupOf={(row) => ({ key: groupOf(row), label: groupLabel[groupOf(row)] })}
          empty={
            <Empty title={i18n.t("No protector is on the register yet.")}>
              {isOfficer && (
                <TextLink to={paths.newProtector}>{i18n.t("Add the first one")}</TextLink>
              )}
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Protector"),
              isRowHead: true,
              sortValue: (row) => row.name,
              cell: (row) => (
                <span className="two-lines">
                  <TextLink to={paths.protector(row.id)}>{row.name}</TextLink>
                  {isPhone && <span className="beneath">{kindOf(row)}</span>}
                </span>
              ),
            },
            {
              id: "kind",
              head: i18n.t("Kind"),
              hidesOnPhone: true,
              sortValue: (row) => protectorKindWord(i18n, row.kind),
              cell: kindOf,
            },
            label("usRatingDb", i18n.t("US number")),
            {
              id: "percentile",
              head: i18n.t("Most to few users"),
              unit: "dB",
              kind: "figure",
              hidesOnPhone: true,
              sortValue: ({ data: { percentile: pair } }) => pair?.mostDb ?? null,
              cell: (row) => percentile(row) ?? NO_FIGURE,
            },
            label("snrDb", i18n.t("SNR")),
            label("hDb", i18n.t("H")),
            label("mDb", i18n.t("M")),
            label("lDb", i18n.t("L")),
            label("slc80Db", i18n.t("SLC80")),
            {
              id: "bands",
              head: i18n.t("Octave bands"),
              hidesOnPhone: true,
              cell: ({ data: { bands } }) =>
                bands === null ? (
                  <span className="not-assessed">{i18n.t("not stated")}</span>
                ) : bands.meanDb[0] === null ? (
                  i18n.t("125 Hz to 8 kHz")
                ) : (
                  i18n.t("63 Hz to 8 kHz")
                ),
            },
            ...(isPhone
              ? [
                  {
                    id: "label",
                    head: i18n.t("Label"),
                    unit: "dB",
                    kind: "right" as const,
                    cell: ({ data: { snrDb, usRatingDb } }: ProtectorView) => (
                      <span className="two-lines">
                        {snrDb !== null && (
                          <span>
                            {i18n.t("SNR {level}", { level: formatLevel(snrDb, locale) })}
                          </span>
                        )}
                        {usRatingDb !== null && (
                          <span>
                            {i18n.t("US {level}", { level: formatLevel(usRatingDb, locale) })}
                          </span>
                        )}
                      </span>
                    ),
                  },
                ]
              : []),
            {
              id: "wearers",
              head: i18n.t("Assigned today"),
              hidesOnPhone: true,
              unit: i18n.t("people"),
              kind: "figure",
              sortValue: (row) => row.wearersToday,
              cell: (row) => (
                <span className={row.wearersToday === 0 ? "is-zero" : undefined}>
                  {row.wearersToday}
                </span>
              ),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "Labelled data as certificate and test report state them; a figure that is not stated stays empty.",
        )}
      </Folio>
    </>
  );
}
