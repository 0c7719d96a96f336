import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { formatInstant, formatShortDate } from "../../../shared/format/date";
import { formatLevelWithUnit } from "../../../shared/format/level";
import type { RecordingView } from "../../../shared/schemas/recording";
import { DataTable } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { recordingQueries } from "./queries";
import { recordingStateText } from "./recording-words";

/** LAeq of the first channel that has one against 20 µPa. */
const levelOf = ({ analysis }: RecordingView): number | null =>
  analysis?.channels.find(({ isAbsolute, isSilent }) => isAbsolute && !isSilent)?.laeqDb ?? null;

/** Recordings, latest first: all, or those whose sound is kept, with why and until when. */
export function RecordingsTable({ isKept = false }: { isKept?: boolean }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const list = useInfiniteQuery(recordingQueries.list(isKept ? { isKept: "yes" } : {}));
  const caption = isKept ? i18n.t("Sound that is kept") : i18n.t("Recordings");
  return (
    <DataTable<RecordingView>
      caption={caption}
      rows={list.data?.pages.flatMap((page) => page.rows) ?? []}
      rowKey={({ id }) => id}
      state={list.isPending ? "loading" : list.isError ? "failed" : "ready"}
      error={list.error}
      onRetry={() => void list.refetch()}
      empty={isKept ? i18n.t("No sound is kept.") : i18n.t("No recording has come in yet.")}
      stacksOnPhone
      more={{
        hasMore: list.hasNextPage,
        isLoading: list.isFetchingNextPage,
        onMore: () => void list.fetchNextPage(),
      }}
      columns={[
        {
          id: "file",
          head: i18n.t("File"),
          isRowHead: true,
          cell: ({ id, fileName }) => <TextLink to={paths.recording(id)}>{fileName}</TextLink>,
        },
        { id: "task", head: i18n.t("Task"), cell: ({ taskName }) => taskName },
        ...(isKept
          ? [
              {
                id: "why",
                head: i18n.t("Why"),
                cell: ({ keepReason }: RecordingView) => keepReason,
              },
              {
                id: "until",
                head: i18n.t("Deleted on"),
                cell: ({ deleteOn }: RecordingView) =>
                  deleteOn && formatShortDate(deleteOn, locale),
              },
            ]
          : [
              {
                id: "sent",
                head: i18n.t("Sent in"),
                cell: ({ createdAt, timeZone }: RecordingView) =>
                  formatInstant(createdAt, timeZone, locale),
              },
              {
                id: "level",
                head: i18n.t("LAeq"),
                cell: (one: RecordingView) => formatLevelWithUnit(levelOf(one), locale),
              },
              {
                id: "state",
                head: i18n.t("State"),
                cell: ({ state }: RecordingView) => recordingStateText(i18n, state),
              },
            ]),
      ]}
    />
  );
}
