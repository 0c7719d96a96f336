import { useLingui } from "@lingui/react";
import { LOCALE_NAMES } from "../../../shared/i18n/index";
import type { SiteView } from "../../../shared/schemas/site";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextButton } from "../../components/link";
import { ruleSetKeys } from "./rule-set-keys";

export function SitesTable({
  sites,
  state,
  error,
  onRetry,
  onEdit,
}: {
  sites: readonly SiteView[];
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
  onEdit: (id: string) => void;
}) {
  const { i18n } = useLingui();
  const columns: DataColumn<SiteView>[] = [
    {
      id: "name",
      head: i18n.t("Name"),
      isRowHead: true,
      cell: ({ id, name, can }) =>
        can.change ? <TextButton onClick={() => onEdit(id)}>{name}</TextButton> : name,
    },
    {
      id: "rules",
      head: i18n.t("Governing rules"),
      cell: ({ settings }) => {
        const ruleSet = ruleSetKeys.find(({ key }) => key === settings.governingRuleSet);
        return ruleSet ? i18n._(ruleSet.title) : settings.governingRuleSet;
      },
    },
    { id: "zone", head: i18n.t("Time zone"), cell: ({ timeZone }) => timeZone },
    {
      id: "language",
      head: i18n.t("Language"),
      cell: ({ language }) => LOCALE_NAMES[language],
      hidesOnPhone: true,
    },
    {
      id: "delay",
      head: i18n.t("Before notices go"),
      unit: i18n.t("min"),
      kind: "figure",
      cell: ({ noticeDelayMin }) => noticeDelayMin,
      hidesOnPhone: true,
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Sites")}
      columns={columns}
      rows={sites}
      rowKey={({ id }) => id}
      stacksOnPhone
      state={state}
      error={error}
      onRetry={onRetry}
      empty={<Empty title={i18n.t("There is no site yet.")} />}
    />
  );
}
