import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatChance } from "../../../shared/format/dose";
import { formatLevel, formatUncertainty } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import { withoutStop } from "../../../shared/format/words";
import type { BudgetView, GroupBudgetView } from "../../../shared/schemas/group";
import { noBudgetWords, sourceWord } from "../../../shared/surveys/words";
import { instrumentClassWord, strategyWord } from "../../../shared/words/register-words";
import { DataTable } from "../../components/data-table";
import { ShareBar } from "../../components/share-bar";
import { useLocale } from "../../lib/i18n";

type Item = BudgetView["items"][number];
type Narrowing = BudgetView["narrowings"][number];

/** Below this share a part stands with the rest: the picture would only show a line, the table a row of noughts. */
const SMALL_SHARE_PCT = 1;
const MOST_NARROWINGS = 3;
/** A change that narrows U by less is not worth the measuring. */
const WORTH_NAMING_DB = 0.05;

/** "3 more samples of Grinding", "a class 1 instrument". */
export function changeWords(
  i18n: I18n,
  { change }: Pick<Narrowing, "change">,
  taskName: (id: string) => string,
): string {
  switch (change.kind) {
    case "more-samples":
      return change.taskId === null
        ? i18n.t("{count} more samples", { count: change.count })
        : i18n.t("{count} more samples of {task}", {
            count: change.count,
            task: taskName(change.taskId),
          });
    case "instrument":
      return change.instrument === "class-1-meter"
        ? i18n.t("a class 1 instrument")
        : instrumentClassWord(i18n, change.instrument);
    case "duration":
      return i18n.t("the duration of {task} known twice as well", {
        task: taskName(change.taskId),
      });
  }
}

function KeptReasons({ reasons }: { reasons: readonly string[] }) {
  const { i18n } = useLingui();
  return reasons.map((reason) => (
    <p key={reason} className="group-kept">
      <b>{i18n.t("Kept: {reason}.", { reason: withoutStop(reason) })}</b>{" "}
      {i18n.t("The result no longer bears the standard’s name.")}
    </p>
  ));
}

/** A survey whose samples are those of the levels in force: its budget stands above already. */
export function AsInForce({
  budget,
  keptReasons,
}: {
  budget: BudgetView;
  keptReasons: readonly string[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <>
      <p className="group-figure">
        {i18n.t("The same as with the levels in force:")}{" "}
        <b className="mono">{formatLevel(budget.lexDb, locale)}</b>{" "}
        <span className="mono">{formatUncertainty(budget.expandedDb, locale)}</span> dB LEX,8h.
      </p>
      <KeptReasons reasons={keptReasons} />
    </>
  );
}

/** Parts that the table names; those too small to matter stand together as the rest, null. */
function budgetRows(
  items: BudgetView["items"],
): { of: Item | null; contributionDb: number; sharePct: number }[] {
  const named = items.filter(({ sharePct }) => sharePct >= SMALL_SHARE_PCT);
  const rest = items.filter(({ sharePct }) => sharePct < SMALL_SHARE_PCT);
  const [only] = rest;
  const rows = named.map((of) => ({ of, ...of }));
  if (!only) return rows;
  return [
    ...rows,
    {
      of: rest.length === 1 ? only : null,
      // Contributions add by their squares.
      contributionDb: Math.hypot(...rest.map(({ contributionDb }) => contributionDb)),
      sharePct: rest.reduce((sum, { sharePct }) => sum + sharePct, 0),
    },
  ];
}

/** A group's level with its uncertainty: the budget as a picture and a table, and what would narrow it most. */
export function GroupBudget({
  of,
  taskName,
}: {
  of: GroupBudgetView;
  taskName: (id: string) => string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const kept = <KeptReasons reasons={of.keptReasons} />;
  const { budget } = of;
  if (!budget)
    return (
      <>
        <p className="not-assessed">
          {noBudgetWords(i18n, of.reason ?? "", of.lackingTaskIds.map(taskName).join(", "))}
        </p>
        {kept}
      </>
    );
  const labelOf = ({ source, taskId }: Item) =>
    taskId === null || taskId === ""
      ? sourceWord(i18n, source)
      : i18n.t("{source}, {task}", { source: sourceWord(i18n, source), task: taskName(taskId) });
  const parts = budgetRows(budget.items);
  const nameOf = (part: (typeof parts)[number]) =>
    part.of ? labelOf(part.of) : i18n.t("the rest");
  const [dominant] = budget.items;
  const [best, ...more] = budget.narrowings.slice(0, MOST_NARROWINGS);
  const others = more.filter(({ decreaseDb }) => decreaseDb >= WORTH_NAMING_DB);
  // Changes of a hundredth are told apart here; the level itself is not that well known.
  const fine = (uncertaintyDb: number) => `±${formatNumber(uncertaintyDb, 2, locale)}`;
  const narrowed = (one: Narrowing) =>
    i18n.t("{change}: {after} instead of {before}", {
      change: changeWords(i18n, one, taskName),
      after: fine(one.expandedDb),
      before: fine(budget.expandedDb),
    });
  return (
    <div className="group-basis">
      <p className="group-figure">
        <b className="mono">{formatLevel(budget.lexDb, locale)}</b>{" "}
        <span className="mono">{formatUncertainty(budget.expandedDb, locale)}</span>{" "}
        {i18n.t("dB LEX,8h, {strategy}", { strategy: strategyWord(i18n, budget.strategy) })}
        {dominant && (
          <>
            . {i18n.t("What dominates:")} <b>{labelOf(dominant)}</b>
          </>
        )}
        .
      </p>
      {budget.isScatterLarge && budget.scatterDb !== null && (
        <p className="group-kept">
          <b>
            {i18n.t(
              "The samples scatter by {scatter} dB, more than 3.5: the standard asks to plan anew, or to divide the group.",
              { scatter: formatLevel(budget.scatterDb, locale) },
            )}
          </b>
        </p>
      )}
      {kept}
      {of.belowRangeCount > 0 && (
        <p className="group-kept">
          <b>
            {i18n.t(
              "{count, plural, one {# sample lies below its threshold and is taken at it} other {# samples lie below their threshold and are taken at it}}: the level is an upper estimate, and the scatter may be greater than stated.",
              { count: of.belowRangeCount },
            )}
          </b>{" "}
          {i18n.t("ISO 9612 has no rule for such samples.")}
        </p>
      )}
      <ShareBar
        kind="uncertainty"
        lead={i18n.t("Share of u²")}
        shares={parts.map((part) => ({ label: nameOf(part), sharePct: part.sharePct }))}
      />
      {best && best.decreaseDb < WORTH_NAMING_DB ? (
        <p className="group-kept">
          {i18n.t("More measuring would gain little. The most would be {narrowing}.", {
            narrowing: narrowed(best),
          })}
        </p>
      ) : best ? (
        <p className="group-kept">
          {i18n.t("What would narrow it most:")} <b>{narrowed(best)}</b>.
          {others.length > 0 && ` ${i18n.t("Then:")} ${others.map(narrowed).join("; ")}.`}
        </p>
      ) : (
        <p className="group-kept">{i18n.t("Nothing that can be measured would narrow it.")}</p>
      )}
      <div className="budget-table">
        <DataTable<(typeof parts)[number]>
          caption={i18n.t("Uncertainty budget")}
          rows={parts}
          rowKey={({ of: item }) => (item ? `${item.source} ${item.taskId}` : "rest")}
          columns={[
            {
              id: "source",
              head: i18n.t("Part"),
              isRowHead: true,
              cell: nameOf,
            },
            {
              id: "contribution",
              head: "c·u",
              unit: "dB",
              kind: "figure",
              cell: ({ contributionDb }) => formatNumber(contributionDb, 2, locale),
            },
            {
              id: "share",
              head: i18n.t("Share of u²"),
              kind: "figure",
              cell: ({ sharePct }) => formatChance(sharePct, locale),
            },
          ]}
        />
      </div>
      <p className="table-foot">
        {i18n.t("u = {u} dB; U = 1.65 · u, one-sided 95 %. ISO 9612:2009, Annex C.", {
          u: formatNumber(budget.combinedDb, 2, locale),
        })}
      </p>
    </div>
  );
}
