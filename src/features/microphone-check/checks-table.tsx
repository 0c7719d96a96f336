import { useLingui } from "@lingui/react";
import { formatInstant } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import type { MicrophoneCheckView } from "../../../shared/schemas/microphone-check";
import { DataTable, type DataTableProps } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { checkStateWord, earWord } from "./check-words";

/** Checks of one worker, the latest first. */
export function ChecksTable({
  timeZone,
  ...table
}: { timeZone: string } & Pick<
  DataTableProps<MicrophoneCheckView>,
  "rows" | "state" | "error" | "onRetry" | "more"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <DataTable<MicrophoneCheckView>
      {...table}
      caption={i18n.t("Checks, latest first")}
      rowKey={({ id }) => id}
      stacksOnPhone
      empty={<Empty title={i18n.t("No check of this worker yet.")} />}
      columns={[
        {
          id: "when",
          head: i18n.t("Sent in"),
          isRowHead: true,
          cell: ({ id, workerId, createdAt }) => (
            <TextLink to={paths.microphoneResult(workerId, id)}>
              {formatInstant(createdAt, timeZone, locale)}
            </TextLink>
          ),
        },
        { id: "model", head: i18n.t("Protector"), cell: ({ modelName }) => modelName },
        { id: "ear", head: i18n.t("Ear"), cell: ({ ear }) => earWord(i18n, ear) },
        { id: "state", head: i18n.t("State"), cell: ({ state }) => checkStateWord(i18n, state) },
        {
          id: "par",
          head: i18n.t("Rating"),
          unit: "dB",
          kind: "figure",
          cell: ({ analysis }) =>
            analysis?.ear.isRelative
              ? i18n.t("relative only")
              : formatLevel(analysis?.parDb ?? null, locale),
        },
      ]}
    />
  );
}
