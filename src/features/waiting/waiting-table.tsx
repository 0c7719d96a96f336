import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { type ReactNode, useMemo } from "react";
import { remedyOf } from "../../../shared/findings/facts";
import { noticedSentence, orderSentence, remedyFigure } from "../../../shared/findings/sentences";
import { findingStateWord, findingWord } from "../../../shared/findings/words";
import { formatDayMonth, formatWeekday } from "../../../shared/format/date";
import { withinSentence } from "../../../shared/format/words";
import type { FindingRow } from "../../../shared/schemas/finding";
import { addDays } from "../../../shared/time/zone";
import { type DataColumn, DataTable } from "../../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../../components/day-figures";
import { TextLink } from "../../components/link";
import { protectorWordText } from "../../components/protector-word";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import type { Due, DueGroup, WaitingItem } from "./due";

function groupLabel(i18n: I18n, group: DueGroup): string {
  switch (group) {
    case "before-noise":
      return i18n.t("Before they work in noise again");
    case "before-shift-ends":
      return i18n.t("Before the shift ends");
    case "this-week":
      return i18n.t("This week");
    case "later":
      return i18n.t("Later");
  }
}

/** The address where a finding is acted on, and the verb that leads there. */
function actionOf(
  i18n: I18n,
  { kind, worker, facts, id }: FindingRow,
): { label: string; to: string } {
  const assign = () => {
    const models = remedyOf(facts)?.modelIds ?? [];
    return worker
      ? `${paths.worker(worker.id)}?assign=${models.join(",")}#protectors`
      : paths.finding(id);
  };
  switch (kind) {
    case "no-protector":
    case "over-limit-at-ear":
    case "dual-protection":
    case "protects-too-little":
      return worker && remedyOf(facts)
        ? { label: i18n.t("Assign"), to: assign() }
        : { label: i18n.t("Plan"), to: paths.finding(id) };
    case "protects-too-much":
      return worker && remedyOf(facts)
        ? { label: i18n.t("Choose"), to: assign() }
        : { label: i18n.t("Open"), to: paths.finding(id) };
    case "reading-missing":
      return { label: i18n.t("Add"), to: paths.newRun };
    case "instrument":
      return { label: i18n.t("Book"), to: paths.instruments };
    default:
      return { label: i18n.t("Open"), to: paths.finding(id) };
  }
}

function DueCell({ due, today }: { due: Due; today: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (due.kind === "now") return <b>{i18n.t("now")}</b>;
  if (due.kind === "time") return <span className="mono">{due.time}</span>;
  if (due.kind === "none") return <>–</>;
  const isNear = due.date >= addDays(today, -6) && due.date <= addDays(today, 6);
  return (
    <span className="two-lines">
      <span className="mono">
        {isNear ? formatWeekday(due.date, locale) : formatDayMonth(due.date, locale)}
      </span>
      {due.isLate && <b className="beneath-ink">{i18n.t("late")}</b>}
    </span>
  );
}

export function WaitingTable({
  items,
  today,
  state,
  error,
  onRetry,
  empty,
}: {
  items: readonly WaitingItem[];
  today: string;
  state: "ready" | "loading" | "failed";
  error?: unknown;
  onRetry: () => void;
  empty: ReactNode;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const days = useMemo(() => items.map(({ finding }) => finding.figures), [items]);
  const frame = useTableFrame(days);
  const columns: DataColumn<WaitingItem>[] = [
    { id: "due", head: i18n.t("Due"), cell: ({ due }) => <DueCell due={due} today={today} /> },
    {
      id: "wrong",
      head: <TwoLineHead first={i18n.t("What is wrong,")} second={i18n.t("and its state")} />,
      isRowHead: true,
      cell: ({ finding, also }) => (
        <span className="two-lines">
          <TextLink className="is-quiet" to={paths.finding(finding.id)}>
            {findingWord(i18n, finding.kind)}
          </TextLink>
          <span className="beneath">{findingStateWord(i18n, finding.state)}</span>
          {also && (
            <TextLink className="is-quiet beneath" to={paths.finding(also.id)}>
              {i18n.t("and {what}", {
                what: withinSentence(findingWord(i18n, also.kind), locale),
              })}
            </TextLink>
          )}
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
      cell: ({ finding }) => {
        const figure = remedyFigure(locale, finding.facts, (word) => protectorWordText(i18n, word));
        const order = orderSentence(i18n, locale, finding.kind, finding.facts);
        return (
          <span className="two-lines">
            <b>{figure ? i18n.t("{order}: {figure}", { order, figure }) : order}</b>
            <span className="beneath">
              {noticedSentence(i18n, locale, finding.kind, finding.facts)}
            </span>
          </span>
        );
      },
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
