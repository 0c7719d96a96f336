import { useLingui } from "@lingui/react";
import { bandBelow } from "../../../shared/acoustics/protection/adequacy";
import { formatLevel, formatLimit } from "../../../shared/format/level";
import { actionValueDb, ruleSetVersion } from "../../../shared/rule-sets";
import type { AtEarView, MethodRow } from "../../../shared/schemas/at-ear";
import { type DataColumn, DataTable } from "../../components/data-table";
import { DropStrip, StripGround, StripScale } from "../../components/drop-strip";
import { useLocale } from "../../lib/i18n";
import { useIsPhone } from "../../lib/use-is-phone";
import { methodInItsWay, startWord, whyNot } from "./method-words";

const rowKey = ({ method, protectedPct, derating, reachedBy }: MethodRow) =>
  [method, protectedPct, derating, reachedBy].join(" ");

/** A flat allowance that the rule set has is on every level but that of an own fit and a derated one. */
export function AllowanceLine({ view }: { view: AtEarView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const allowanceDb =
    ruleSetVersion(view.ruleSetKey, view.ruleSetVersion)?.protection.allowanceDb ?? 0;
  if (allowanceDb === 0) return null;
  return (
    <p className="picture-legend">
      {i18n.t(
        "Every level has the rule set’s {allowance} dB on it, but for an own fit and for a US number that is derated: one takes the other’s place.",
        { allowance: formatLimit(allowanceDb, locale) },
      )}
    </p>
  );
}

/**
 * Every method with what it leaves at the ear: figures, and a tick each on the scale that all strips have, under one
 * another, so that their spread is seen at a glance.
 */
export function MethodsTable({
  view,
  state,
  error,
  onRetry,
}: {
  view: AtEarView | undefined;
  state: "ready" | "loading" | "failed";
  error: unknown;
  onRetry: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isPhone = useIsPhone();
  const ruleSet = view && ruleSetVersion(view.ruleSetKey, view.ruleSetVersion);
  const actionDb = ruleSet ? actionValueDb(ruleSet) : null;
  const targetBand = actionDb === null ? null : bandBelow(actionDb);
  const widthPx = isPhone ? 200 : 260;
  const ground = <StripGround limits={[]} targetBand={targetBand} widthPx={widthPx} />;
  const columns: DataColumn<MethodRow>[] = [
    {
      id: "method",
      head: i18n.t("Method"),
      isRowHead: true,
      cell: (row) => (
        <span className="two-lines">
          {row.governs ? <b>{methodInItsWay(i18n, row)}</b> : methodInItsWay(i18n, row)}
          {row.atEarDb !== null && <span className="beneath">{startWord(i18n, row)}</span>}
        </span>
      ),
    },
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("while worn, dB(A)"),
      kind: "figure",
      cell: ({ atEarDb, governs }) =>
        governs ? <b>{formatLevel(atEarDb, locale)}</b> : formatLevel(atEarDb, locale),
    },
    {
      id: "spread",
      head: <StripScale limits={[]} targetBand={targetBand} widthPx={widthPx} />,
      kind: "strip",
      widthPx,
      filler: ground,
      cell: ({ atEarDb, governs, isOfRule }) =>
        atEarDb === null ? (
          ground
        ) : (
          <DropStrip
            variant="row"
            widthPx={widthPx}
            isHidden
            outsideDb={null}
            outsideUDb={null}
            outsideBound="exact"
            atEarDb={atEarDb}
            atEarBound="exact"
            atEarUDb={null}
            atEarActiveDb={null}
            atEarAsWorkedDb={null}
            whileWornDb={governs ? atEarDb : null}
            k={0.9}
            limits={[]}
            targetBand={targetBand}
            isExpected={!isOfRule}
            hasProtector="no"
            word="good"
            verdict={null}
          />
        ),
    },
    {
      id: "off",
      head: i18n.t("Taken off"),
      unit: "dB",
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ reductionDb }) => formatLevel(reductionDb, locale),
    },
    {
      id: "says",
      head: i18n.t("What it counts for"),
      cell: (row) => <Says row={row} hasWorker={view?.worker !== null} />,
    },
  ];
  return (
    <div className="at-ear-methods">
      {isPhone && (
        <div className="at-ear-scale">
          <StripScale limits={[]} targetBand={targetBand} widthPx={widthPx} />
        </div>
      )}
      <DataTable<MethodRow>
        caption={i18n.t("Level at the ear by every method")}
        columns={columns}
        rows={view?.methods ?? []}
        rowKey={rowKey}
        state={state}
        error={error}
        onRetry={onRetry}
        isSelected={({ governs }) => governs}
        stacksOnPhone
      />
      <p className="picture-legend">
        {i18n.t(
          "A tick for each method: full as the rule set counts it, open where it counts it another way. Caret: the one that governs.",
        )}
      </p>
    </div>
  );
}

function Says({ row, hasWorker }: { row: MethodRow; hasWorker: boolean }) {
  const { i18n } = useLingui();
  if (row.atEarDb === null)
    return (
      <span className="not-assessed">
        {i18n.t("Not assessed: {reason}", { reason: whyNot(i18n, row, hasWorker) })}
      </span>
    );
  return (
    <>
      {row.governs ? (
        <b>{i18n.t("governs")}</b>
      ) : (
        row.isOfRule && i18n.t("as the rule set counts it")
      )}
      {row.wasClamped && ` ${i18n.t("(nothing comes off: it would have added)")}`}
    </>
  );
}

/** How far the methods lie apart, and a warning where that is more than a word of the scale. */
export function SpreadLine({ view }: { view: AtEarView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (view.spreadDb === null) return null;
  const spread = formatLevel(view.spreadDb, locale);
  return view.isSpreadLarge ? (
    <p className="spread-line is-large">
      {i18n.t(
        "The methods as the rule set counts them lie {spread} dB apart. That is a lot: look at the data sheet before anything rests on one of them.",
        { spread },
      )}
    </p>
  ) : (
    <p className="spread-line">
      {i18n.t("{spread} dB between the methods as the rule set counts them.", { spread })}
    </p>
  );
}
