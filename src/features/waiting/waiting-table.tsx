import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { type ReactNode, useMemo } from "react";
import { factsToday, handoutsOf, remedyOf } from "../../../shared/findings/facts";
import { findingStateWord, findingWord } from "../../../shared/findings/words";
import { withinSentence } from "../../../shared/format/words";
import type { FindingRow } from "../../../shared/schemas/finding";
import { type DataColumn, DataTable } from "../../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../../components/day-figures";
import { FindingDue } from "../../components/finding-due";
import { FindingWords } from "../../components/finding-words";
import { TextLink } from "../../components/link";
import { useKeepFindingOrder } from "../../lib/finding-order";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import type { DueGroup, WaitingItem } from "./due";

function groupLabel(i18n: I18n, group: DueGroup): string {
  switch (group) {
    case "overdue":
      return i18n.t("Overdue");
    case "before-noise":
      return i18n.t("Before they work in noise again");
    case "today":
      return i18n.t("Today");
    case "this-week":
      return i18n.t("This week");
    case "later":
      return i18n.t("Later");
  }
}

/** The address where a finding is acted on, and the verb that leads there. */
function actionOf(i18n: I18n, finding: FindingRow): { label: string; to: string } {
  const { kind, worker, facts, today, id } = finding;
  const remedy = today?.is === "in-order" ? null : remedyOf(factsToday(finding));
  switch (kind) {
    case "no-protector":
    case "over-limit-at-ear":
    case "dual-protection":
    case "protects-too-little":
    case "protects-too-much":
      return worker && remedy
        ? { label: i18n.t("Assign"), to: paths.assign(worker.id, handoutsOf(remedy)[0]) }
        : { label: i18n.t("Open it"), to: paths.finding(id) };
    case "reading-missing":
      return { label: i18n.t("Add"), to: paths.newRun };
    case "instrument":
      return facts.calibrationFailedOn
        ? { label: i18n.t("Open it"), to: paths.finding(id) }
        : { label: i18n.t("Book"), to: paths.instruments };
    case "fit-failed":
    case "fit-due":
      return worker
        ? { label: i18n.t("Test the fit"), to: paths.fittingOf(worker.id) }
        : { label: i18n.t("Open it"), to: paths.finding(id) };
    default:
      return { label: i18n.t("Open it"), to: paths.finding(id) };
  }
}

export function WaitingTable({
  items,
  todayAt,
  state,
  error,
  onRetry,
  empty,
}: {
  items: readonly WaitingItem[];
  todayAt: (siteId: string) => string;
  state: "ready" | "loading" | "failed";
  error?: unknown;
  onRetry: () => void;
  empty: ReactNode;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const days = useMemo(() => items.map(({ finding }) => finding.figures), [items]);
  const frame = useTableFrame(days);
  useKeepFindingOrder(
    items.flatMap(({ finding, also }) => [finding.id, ...also.map(({ id }) => id)]),
  );
  const columns: DataColumn<WaitingItem>[] = [
    {
      id: "due",
      head: i18n.t("Due"),
      cell: ({ finding }) => (
        <FindingDue dueOn={finding.dueOn} today={todayAt(finding.siteId)} isNearby />
      ),
    },
    {
      id: "wrong",
      head: <TwoLineHead first={i18n.t("What is wrong,")} second={i18n.t("and its state")} />,
      isRowHead: true,
      cell: ({ finding, also }) => (
        <span className="two-lines">
          <TextLink className="is-quiet" to={paths.finding(finding.id)}>
            {findingWord(i18n, finding.kind)}
          </TextLink>
          <span className="beneath">
            {findingStateWord(i18n, finding.state)}
            {finding.wentUp && `; ${i18n.t("went up to {name}", { name: finding.wentUp.name })}`}
          </span>
          {also.map((other) => (
            <TextLink key={other.id} className="is-quiet beneath" to={paths.finding(other.id)}>
              {i18n.t("and {what}", {
                what: withinSentence(findingWord(i18n, other.kind), locale),
              })}
            </TextLink>
          ))}
        </span>
      ),
    },
    { id: "who", head: i18n.t("Who"), cell: ({ finding }) => <Who finding={finding} /> },
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("day, dB"),
      cell: ({ finding }) => (finding.figures ? <AtEarFigure figures={finding.figures} /> : "–"),
    },
    {
      id: "strip",
      kind: "strip",
      head: <TableStripScale frame={frame} />,
      widthPx: 216,
      filler: <TableStripGround frame={frame} />,
      cell: ({ finding }) =>
        finding.figures ? (
          <DayStrip figures={finding.figures} isHidden />
        ) : (
          <TableStripGround frame={frame} />
        ),
    },
    {
      id: "outside",
      head: i18n.t("Without protection"),
      unit: i18n.t("day, dB"),
      cell: ({ finding }) => (finding.figures ? <OutsideFigure figures={finding.figures} /> : "–"),
    },
    {
      id: "todo",
      head: <TwoLineHead first={i18n.t("What to do, then")} second={i18n.t("what was noticed")} />,
      cell: ({ finding }) => <FindingWords finding={finding} />,
    },
    {
      id: "action",
      head: <span className="sr-only">{i18n.t("Action")}</span>,
      kind: "right",
      cell: ({ finding }) => {
        const { label, to } = actionOf(i18n, finding);
        return (
          <TextLink className="act" to={to}>
            {label}
            <span className="sr-only">{`: ${finding.worker?.name ?? finding.subjectName ?? ""}`}</span>
          </TextLink>
        );
      },
    },
  ];
  return (
    <div className="waiting-table stacked-table">
      <DataTable
        caption={i18n.t("What needs a person, most urgent first")}
        columns={columns}
        rows={items}
        rowKey={({ finding }) => finding.id}
        groupOf={({ group }) => ({ key: group, label: groupLabel(i18n, group) })}
        state={state}
        error={error}
        onRetry={onRetry}
        empty={empty}
        isTwoLine
      />
    </div>
  );
}

function TwoLineHead({ first, second }: { first: string; second: string }) {
  return (
    <>
      {first}
      <br />
      {second}
    </>
  );
}

function Who({ finding }: { finding: FindingRow }) {
  const { worker, subjectName, crewName } = finding;
  if (!worker) return <b>{subjectName ?? "–"}</b>;
  return (
    <span className="two-lines">
      <TextLink className="is-quiet is-name" to={paths.worker(worker.id)}>
        {worker.name}
      </TextLink>
      <span className="beneath">
        {[worker.employeeNumber, crewName].filter(Boolean).join(", ")}
      </span>
    </span>
  );
}
