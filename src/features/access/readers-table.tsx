import { useLingui } from "@lingui/react";
import type { ReaderView } from "../../../shared/schemas/access";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { useLocale } from "../../lib/i18n";
import { untilText } from "../../lib/until-text";
import { readerWord, seesOfAccountWord, seesWord } from "./access-words";

/** Who can see something of somebody, by which grant, and until when. */
export function ReadersTable({
  caption,
  readers,
  of,
  error,
  onRetry,
}: {
  caption: string;
  /** Undefined while it loads. */
  readers: readonly ReaderView[] | undefined;
  of: "record" | "account";
  error: unknown;
  onRetry: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const sees = of === "record" ? seesWord : seesOfAccountWord;
  const until = ({ endsAt, timeZone }: ReaderView) =>
    endsAt === null ? i18n.t("no end set") : untilText(i18n, endsAt, timeZone ?? "UTC", locale);
  const columns: DataColumn<ReaderView>[] = [
    { id: "name", head: i18n.t("Name"), isRowHead: true, cell: ({ name }) => <bdi>{name}</bdi> },
    {
      id: "role",
      head: i18n.t("As"),
      cell: (reader) => (
        <>
          {readerWord(i18n, reader)}
          {reader.siteName !== null && <span className="access-note">{reader.siteName}</span>}
          <span className="access-sees">{sees(i18n, reader)}</span>
        </>
      ),
    },
    { id: "sees", head: i18n.t("Sees"), cell: (reader) => sees(i18n, reader), hidesOnPhone: true },
    { id: "until", head: i18n.t("Until"), cell: until },
  ];
  return (
    <DataTable
      caption={caption}
      columns={columns}
      rows={readers ?? []}
      rowKey={({ userId, role, siteName, crewName, employerName, year }) =>
        [userId, role, siteName, crewName, employerName, year].join(" ")
      }
      state={error ? "failed" : readers === undefined ? "loading" : "ready"}
      error={error}
      onRetry={onRetry}
      stacksOnPhone
      empty={<Empty title={i18n.t("Nobody.")} />}
    />
  );
}
