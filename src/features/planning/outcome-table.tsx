import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { isolate } from "../../../shared/i18n/isolate";
import type { Tried } from "../../../shared/schemas/tried";
import { DataTable } from "../../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  OutsideLines,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../../components/day-figures";
import { LevelFigure } from "../../components/level-figure";
import { TextLink } from "../../components/link";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

export interface OutcomeRow {
  workerId: string;
  workerName: string;
  employeeNumber: string;
  before: Tried;
  after: Tried;
  /** The latest day judged since; absent where nothing is held against it. */
  since?: {
    date: string;
    outsideDb: number | null;
    atEarDb: number | null;
    verdict: Tried["verdict"];
  } | null;
}

const STRIP_PX = 220;
/** Nothing is stored of a day that is tried: the worker's id stands in for a result's. */
const asDay = (workerId: string, { figures }: Tried) =>
  figures && { ...figures, resultId: workerId, origin: "computed" as const };

/** Each worker's expected day as it is and with the changes, and what has been found since. */
export function OutcomeTable({
  rows,
  showsSince,
}: {
  rows: readonly OutcomeRow[];
  showsSince: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const days = rows.map(({ workerId, after }) => asDay(workerId, after));
  const frame = useTableFrame(days);
  return (
    <DataTable<OutcomeRow>
      caption={i18n.t("Each worker’s day, as it is expected and with the changes")}
      rows={rows}
      rowKey={({ workerId }) => workerId}
      isTwoLine
      stacksOnPhone
      columns={[
        {
          id: "worker",
          head: i18n.t("Worker"),
          isRowHead: true,
          sortValue: ({ workerName }) => workerName,
          cell: ({ workerId, workerName, employeeNumber }) => (
            <span className="two-lines">
              <TextLink to={paths.worker(workerId)}>{isolate(workerName)}</TextLink>
              <span className="beneath">{employeeNumber}</span>
            </span>
          ),
        },
        {
          id: "before",
          head: i18n.t("As it is"),
          sortValue: ({ before }) => before.atEarDb ?? before.outsideDb,
          cell: ({ before }) => <TriedLevels tried={before} />,
        },
        {
          id: "after",
          head: i18n.t("With the changes"),
          sortValue: ({ after }) => after.atEarDb ?? after.outsideDb,
          cell: ({ after }) => <TriedLevels tried={after} />,
        },
        {
          id: "ear",
          head: i18n.t("At the ear"),
          kind: "right",
          hidesOnPhone: true,
          cell: ({ workerId, after }) => {
            const day = asDay(workerId, after);
            return day && <AtEarFigure figures={day} />;
          },
        },
        {
          id: "strip",
          head: <TableStripScale frame={frame} widthPx={STRIP_PX} />,
          kind: "strip",
          widthPx: STRIP_PX,
          hidesOnPhone: true,
          filler: <TableStripGround frame={frame} widthPx={STRIP_PX} />,
          cell: ({ workerId, after }) => {
            const day = asDay(workerId, after);
            return day ? (
              <DayStrip figures={day} widthPx={STRIP_PX} />
            ) : (
              <TableStripGround frame={frame} widthPx={STRIP_PX} />
            );
          },
        },
        {
          id: "outside",
          head: i18n.t("Without protection"),
          kind: "right",
          hidesOnPhone: true,
          cell: ({ workerId, after }) => {
            const day = asDay(workerId, after);
            return day && <OutsideLines figures={day} />;
          },
        },
        ...(showsSince
          ? [
              {
                id: "since",
                head: i18n.t("Found since"),
                cell: ({ since, workerId }: OutcomeRow) =>
                  since ? (
                    <span className="two-lines">
                      <span>
                        <LevelFigure levelDb={since.atEarDb} isStrong />{" "}
                        <Verdict verdict={since.verdict} isQuiet />
                      </span>
                      <TextLink to={paths.result(workerId, since.date)}>
                        {formatShortDate(since.date, locale)}
                      </TextLink>
                    </span>
                  ) : (
                    <span className="beneath">{i18n.t("no day since")}</span>
                  ),
              },
            ]
          : []),
      ]}
    />
  );
}

function TriedLevels({ tried: { verdict, cannot, figures } }: { tried: Tried }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <span className="two-lines">
      <Verdict verdict={verdict} isQuiet />
      {figures && (
        <span className="beneath">
          {i18n.t("at the ear {atEar}, outside {outside}", {
            atEar: formatLevel(figures.atEarDb, locale, figures.atEarBound),
            outside: formatLevel(figures.outsideDb, locale, figures.outsideBound),
          })}
        </span>
      )}
      {cannot && (
        <span className="is-fault">
          {cannot.why === "not-enough-time"
            ? i18n.t("Change {place}: the day has not so many minutes of it.", {
                place: cannot.changeIndex + 1,
              })
            : i18n.t("Change {place}: not in this day.", { place: cannot.changeIndex + 1 })}
        </span>
      )}
    </span>
  );
}
