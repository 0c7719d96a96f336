import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { formatNumber } from "../../../shared/format/number";
import type { TrainingRow } from "../../../shared/schemas/training";
import { DataTable, type DataTableProps } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

/** Trainings that were held, the latest first. */
export function TrainingsTable({
  showsSite,
  ...table
}: { showsSite: boolean } & Pick<
  DataTableProps<TrainingRow>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <DataTable<TrainingRow>
      {...table}
      caption={i18n.t("Trainings held, the latest first")}
      rowKey={({ id }) => id}
      isTwoLine
      stacksOnPhone
      columns={[
        {
          id: "date",
          head: i18n.t("Held on"),
          cell: ({ heldOn, siteName }) => (
            <span className="two-lines">
              {formatShortDate(heldOn, locale)}
              {showsSite && <span className="beneath">{siteName}</span>}
            </span>
          ),
        },
        {
          id: "title",
          head: i18n.t("Title"),
          isRowHead: true,
          cell: ({ id, title, struckReason }) => (
            <span className="two-lines">
              <TextLink to={paths.training(id)}>{title}</TextLink>
              {struckReason !== null && (
                <span className="beneath">
                  {i18n.t("struck out: {reason}", { reason: struckReason })}
                </span>
              )}
            </span>
          ),
        },
        {
          id: "duration",
          head: i18n.t("Duration"),
          kind: "figure",
          cell: ({ durationMin }) => formatDuration(durationMin, locale),
        },
        {
          id: "attendees",
          head: i18n.t("Who was there"),
          kind: "figure",
          cell: ({ attendees }) => formatNumber(attendees, 0, locale),
        },
        {
          id: "material",
          head: i18n.t("What was shown"),
          cell: ({ fileId, fileName }) =>
            fileId === null ? (
              "–"
            ) : (
              <a className="link" href={`/api/files/${fileId}`} download>
                {fileName}
              </a>
            ),
        },
      ]}
    />
  );
}
