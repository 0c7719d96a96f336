import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { Fragment, useId, useState } from "react";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import { formatShortDate } from "../../../shared/format/date";
import { formatNumber } from "../../../shared/format/number";
import type { GapsView } from "../../../shared/schemas/waiting";
import { Failed } from "../../components/failed";
import { TextButton, TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { GAPS, gapMeaning, gapWord } from "./gap-words";
import { type Gap, type GapName, type YearOfSite, yearFileQueries } from "./queries";

const NAMES_AT_ONCE = 40;

/** What is missing in a year: counts, and the names behind each when they are asked for. */
export function GapsTable({
  year,
  counts,
  caption,
}: {
  year: YearOfSite;
  /** Without: they are being read. */
  counts: GapsView["counts"] | undefined;
  caption: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const id = useId();
  const [open, setOpen] = useState<Gap | null>(null);
  return (
    <div className="table-frame">
      <table className="data-table gaps-table" aria-busy={counts === undefined}>
        <caption className="sr-only">{caption}</caption>
        <tbody>
          {GAPS.map((kind) => {
            const gap = counts?.find((one) => one.kind === kind);
            const count = gap?.count;
            const isOpen = open === kind;
            return (
              <Fragment key={kind}>
                <tr>
                  <td className={`gap-count${count === 0 ? " is-zero" : ""}`}>
                    {count === undefined ? (
                      <span className="loading-line" />
                    ) : (
                      formatNumber(count, 0, locale)
                    )}
                  </td>
                  <th scope="row">{gapWord(i18n, kind)}</th>
                  <td className="gap-meaning">{gapMeaning(i18n, kind, gap?.hasNoInterval)}</td>
                  <td className="is-right">
                    {count !== undefined && count > 0 && (
                      <TextButton
                        aria-expanded={isOpen}
                        aria-controls={`${id}-${kind}`}
                        aria-label={i18n.t("Names: {gap}", { gap: gapWord(i18n, kind) })}
                        onClick={() => setOpen(isOpen ? null : kind)}
                      >
                        {kind === "not-assessed" ? i18n.t("Days") : i18n.t("Names")}
                      </TextButton>
                    )}
                  </td>
                </tr>
                {isOpen && (
                  <tr id={`${id}-${kind}`}>
                    <td colSpan={4} className="gap-names">
                      <Names year={year} kind={kind} />
                    </td>
                  </tr>
                )}
              </Fragment>
            );
          })}
        </tbody>
      </table>
    </div>
  );
}

function Names({ year, kind }: { year: YearOfSite; kind: Gap }) {
  const { i18n } = useLingui();
  const names = useQuery(yearFileQueries.names(year, kind));
  const [count, setCount] = useState(NAMES_AT_ONCE);
  if (names.isError) return <Failed error={names.error} onRetry={() => void names.refetch()} />;
  if (names.isPending)
    return (
      <p role="status">
        <span className="loading-line" />
        <span className="sr-only">{i18n.t("Loading")}</span>
      </p>
    );
  return (
    <>
      <ul>
        {names.data.slice(0, count).map((row) => (
          <NameRow key={`${row.id} ${row.date}`} kind={kind} row={row} />
        ))}
      </ul>
      {names.data.length > count && (
        <TextButton onClick={() => setCount(count * 3)}>{i18n.t("and more")}</TextButton>
      )}
    </>
  );
}

function NameRow({ kind, row }: { kind: Gap; row: GapName }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const reason = kind === "not-assessed" ? asReason(row.note) : null;
  const note =
    kind !== "not-assessed"
      ? row.note
      : reason
        ? reasonText(i18n, reason)
        : i18n.t("not worked out yet");
  return (
    <li>
      <TextLink to={paths.worker(row.id)}>{row.name}</TextLink>
      <span className="mono">{row.employeeNumber}</span>
      {row.date !== null && <span>{formatShortDate(row.date, locale)}</span>}
      {note && <span>{note}</span>}
    </li>
  );
}
