import { useLingui } from "@lingui/react";
import { type ReactNode, useId, useState } from "react";
import { isolate } from "../../../shared/i18n/isolate";
import type { CrewSheetRow } from "../../../shared/schemas/crew";
import { StripScale } from "../../components/drop-strip";
import { TextButton } from "../../components/link";
import type { StripFrame } from "../../components/strip-of-day";
import { useLocale } from "../../lib/i18n";
import { lentWords } from "./beside-name";
import { numberWord } from "./number-words";
import type { PartName, SheetPart } from "./sheet-parts";
import { type NextSheet, SheetRow } from "./sheet-row";

/** Of those with nothing to do, so many stand here at once. */
const SHOWN_AT_ONCE = 3;

/** Title, date and the head of the figures; the rest follows once it is read. */
export function SheetFrame({
  name,
  title,
  lead,
  frame,
  children,
}: {
  name: PartName;
  title: ReactNode;
  lead: ReactNode;
  frame: StripFrame | null;
  children: ReactNode;
}) {
  const { i18n } = useLingui();
  const titleId = useId();
  return (
    <section className="sheet-part" data-part={name} aria-labelledby={titleId}>
      <h2 className="sheet-title" id={titleId}>
        {title}
      </h2>
      <p className="sheet-lead">{lead}</p>
      <div className="sheet-figures sheet-scale">
        <span>
          {i18n.t("At the ear")}
          {name === "expected" && <em className="block">{i18n.t("expected")}</em>}
        </span>
        <StripScale
          limits={frame?.limits ?? []}
          targetBand={frame?.targetBand ?? null}
          widthPx={200}
        />
        <span>{i18n.t("Without protection")}</span>
      </div>
      {children}
    </section>
  );
}

export function SheetRows({
  part,
  rows,
  crewId,
  timeZone,
  frame,
  nextSheetOf = () => null,
  onStale,
}: {
  part: PartName;
  rows: SheetPart;
  crewId: string;
  timeZone: string;
  frame: StripFrame | null;
  nextSheetOf?: (row: CrewSheetRow) => NextSheet | null;
  onStale: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [showsAll, setShowsAll] = useState(false);
  const common = { part, frame, crewId, timeZone, onStale };
  const count = rows.quiet.length;
  const shown = showsAll ? rows.quiet : rows.quiet.slice(0, SHOWN_AT_ONCE);
  const more = count - shown.length;
  const number = numberWord(i18n, count);
  return (
    <>
      <ul>
        {rows.flagged.map((row) => (
          <SheetRow
            key={row.worker.id}
            {...common}
            row={row}
            isFlagged
            nextSheet={nextSheetOf(row)}
          />
        ))}
      </ul>
      {rows.open.length > 0 && (
        <>
          <h3 className="sheet-group">
            {i18n.t("Not assessed: {number}", { number: numberWord(i18n, rows.open.length) })}
          </h3>
          <ul>
            {rows.open.map((row) => (
              <SheetRow key={row.worker.id} {...common} row={row} isFlagged={false} />
            ))}
          </ul>
        </>
      )}
      {count > 0 && (
        <>
          <h3 className="sheet-group">
            {part === "expected"
              ? i18n.t("Nothing to do: {number}", { number })
              : i18n.t("Under: {number}", { number })}
          </h3>
          <ul>
            {shown.map((row) => (
              <SheetRow key={row.worker.id} {...common} row={row} isFlagged={false} />
            ))}
          </ul>
          {count > SHOWN_AT_ONCE && (
            <TextButton
              className="sheet-more"
              aria-expanded={showsAll}
              onClick={() => setShowsAll(!showsAll)}
            >
              {showsAll
                ? i18n.t("Show fewer")
                : i18n.t("and {number} more", { number: numberWord(i18n, more) })}
            </TextButton>
          )}
        </>
      )}
      {rows.absent.length > 0 && (
        <p className="sheet-absent">
          {i18n.t("Absent: {names}", {
            names: rows.absent.map(({ worker }) => isolate(worker.name)).join(", "),
          })}
        </p>
      )}
      {rows.lent.map(
        ({ worker, lentTo }) =>
          lentTo && (
            <p key={worker.id} className="sheet-absent">
              {i18n.t("{name}: {what}", {
                name: isolate(worker.name),
                what: lentWords(i18n, locale, lentTo),
              })}
            </p>
          ),
      )}
    </>
  );
}

/** Hairlines where the rows will stand. */
export function SheetLoading() {
  const { i18n } = useLingui();
  return (
    <div aria-busy="true">
      {["first", "second", "third"].map((key) => (
        <div key={key} className="sheet-row is-loading" aria-hidden="true">
          <span className="loading-line" />
          <span className="loading-line" />
        </div>
      ))}
      <p className="sr-only" role="status">
        {i18n.t("Loading")}
      </p>
    </div>
  );
}
