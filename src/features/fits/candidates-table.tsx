import { useLingui } from "@lingui/react";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import type { Candidate } from "../../../shared/schemas/fit";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextButton } from "../../components/link";
import { ProtectorWord } from "../../components/protector-word";
import { useLocale } from "../../lib/i18n";
import { decidedWord, exclusionWord, passWord } from "./fit-words";

/** The register in the order in which it suits this worker's noise, each with the comparison that decided. */
export function CandidatesTable({
  candidates,
  chosenId,
  onTry,
}: {
  candidates: readonly Candidate[];
  chosenId: string;
  onTry: (modelId: string) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const columns: DataColumn<Candidate>[] = [
    {
      id: "device",
      head: i18n.t("Device"),
      isRowHead: true,
      cell: (row) => (
        <span className="two-lines">
          <TextButton
            className="is-name"
            aria-label={i18n.t("Try {protector}", { protector: row.name })}
            onClick={() => onTry(row.modelId)}
          >
            {row.name}
          </TextButton>
          <span className="beneath">
            {row.excludedBy
              ? exclusionWord(i18n, row.excludedBy)
              : decidedWord(i18n, row.decidedBy)}
          </span>
        </span>
      ),
    },
    {
      id: "word",
      head: i18n.t("While worn"),
      cell: ({ word, wornDb }) => (
        <ProtectorWord
          word={word}
          beneath={wornDb === null ? undefined : `${formatLevel(wornDb, locale)} dB`}
        />
      ),
    },
    {
      id: "margin",
      head: i18n.t("Margin"),
      unit: "dB",
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ marginDb }) => formatLevelChange(marginDb, locale),
    },
    {
      id: "fit",
      head: i18n.t("Own fit"),
      cell: ({ lastFit }) =>
        lastFit === null ? (
          "–"
        ) : (
          <span className="two-lines">
            <span className="mono">{formatLevel(lastFit.parDb, locale)}</span>
            <span className={lastFit.hasPassed === false ? "is-fault" : "beneath"}>
              {passWord(i18n, lastFit.hasPassed)}
            </span>
          </span>
        ),
    },
    {
      id: "stock",
      head: i18n.t("In stock"),
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ stock, batteryMin, batteryLasts }) => (
        <span className="two-lines">
          {stock ?? "–"}
          {batteryMin !== null && (
            <span className={batteryLasts === false ? "is-fault" : "beneath"}>
              {i18n.t("battery {time}", { time: formatDuration(batteryMin, locale) })}
            </span>
          )}
        </span>
      ),
    },
  ];
  return (
    <DataTable<Candidate>
      caption={i18n.t("Devices in the order in which they suit this noise")}
      rows={candidates}
      rowKey={({ modelId }) => modelId}
      columns={columns}
      isTwoLine
      isSelected={({ modelId }) => modelId === chosenId}
      groupOf={({ excludedBy }) =>
        excludedBy
          ? { key: "out", label: i18n.t("Out of the question") }
          : { key: "in", label: i18n.t("To be tried") }
      }
      empty={<Empty title={i18n.t("No protector is on the register yet.")} />}
    />
  );
}
