import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import type { z } from "zod";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import { formatLevelChange } from "../../../shared/format/level";
import { NO_FIGURE } from "../../../shared/format/number";
import type { Audibility } from "../../../shared/schemas/warning-signal";
import { type DataColumn, DataTable } from "../../components/data-table";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import "../../styles/signals.css";

type Row = z.infer<typeof Audibility>;
type Heard = Row["off"];

/** It may be missed with the active part off or on: what is worn is safe only if both are. */
export const mayBeMissed = ({ off, on }: Row): boolean =>
  off.word === "not-audible" || on?.word === "not-audible";

/** Heard, lost and not assessed, of all tasks and what is worn there. */
export function tallyOf(rows: readonly Row[]) {
  const words = rows.map((row) => (mayBeMissed(row) ? "not-audible" : row.off.word));
  const count = (word: Heard["word"]) => words.filter((one) => one === word).length;
  return {
    heard: count("audible"),
    lost: count("not-audible"),
    open: count("not-assessed"),
  };
}

/** Where there is no such part: a phone leaves the cell out. */
const NOTHING_HERE = <span className="nothing-here">{NO_FIGURE}</span>;

/** Task by task, bare and under what is worn there: whether the signal stays audible, and by how much. */
export function AudibilityTable({ rows, empty }: { rows: readonly Row[]; empty: ReactNode }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const hasActive = rows.some(({ on }) => on !== null);
  const heardIn = (
    id: "off" | "on",
    head: string,
    of: (row: Row) => Heard | null,
  ): DataColumn<Row>[] => [
    {
      id,
      head,
      cell: (row) => {
        const heard = of(row);
        return heard ? <HeardWord heard={heard} reason={row.reason} /> : NOTHING_HERE;
      },
    },
    {
      id: `${id}-above`,
      head: i18n.t("Above"),
      unit: "dB",
      kind: "figure",
      cell: (row) => {
        const heard = of(row);
        return heard ? formatLevelChange(heard.aboveDb, locale) : NOTHING_HERE;
      },
    },
    {
      id: `${id}-band`,
      head: i18n.t("Best band"),
      unit: "Hz",
      kind: "figure",
      hidesOnPhone: true,
      cell: (row) => of(row)?.bestBandHz ?? NO_FIGURE,
    },
  ];
  return (
    <div className="audibility">
      <DataTable<Row>
        caption={i18n.t("Whether the signal is heard")}
        rows={rows}
        rowKey={({ taskId, protectorId, protectorName }) =>
          `${taskId} ${protectorId} ${protectorName}`
        }
        groupOf={({ taskId, taskName }) => ({
          key: taskId,
          label: <TextLink to={paths.task(taskId)}>{taskName}</TextLink>,
        })}
        empty={empty}
        stacksOnPhone
        columns={[
          {
            id: "worn",
            head: i18n.t("Worn there"),
            isRowHead: true,
            cell: ({ protectorId, protectorName }) =>
              protectorId === null ? (
                i18n.t("nothing")
              ) : (
                <TextLink className="is-quiet" to={paths.protector(protectorId)}>
                  {protectorName}
                </TextLink>
              ),
          },
          ...heardIn(
            "off",
            hasActive ? i18n.t("Active part off") : i18n.t("Heard"),
            ({ off }) => off,
          ),
          ...(hasActive ? heardIn("on", i18n.t("Active part on"), ({ on }) => on) : []),
        ]}
      />
    </div>
  );
}

function HeardWord({ heard: { word }, reason }: { heard: Heard; reason: string | null }) {
  const { i18n } = useLingui();
  const why = asReason(reason);
  if (word === "audible") return i18n.t("Stays audible");
  if (word === "not-audible") return <b>{i18n.t("May not be heard")}</b>;
  return (
    <span className="not-assessed">
      {why
        ? i18n.t("Not assessed: {reason}", { reason: reasonText(i18n, why) })
        : i18n.t("Not assessed")}
    </span>
  );
}
