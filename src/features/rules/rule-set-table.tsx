import { useLingui } from "@lingui/react";
import type { Criterion, RuleSetVersion } from "../../../shared/acoustics/types";
import { DataTable } from "../../components/data-table";
import { Sym } from "../../components/equation";
import { useLocale } from "../../lib/i18n";
import {
  comparatorWord,
  criterionSettings,
  criterionValue,
  datesWords,
  judgedWord,
  protectionFacts,
  quantityWord,
} from "./rule-words";

/** The standard's letter for a quantity, where it has one. */
function QuantitySymbol({ quantity }: { quantity: Criterion["quantity"] }) {
  if (quantity === "lex-8h") return <Sym sub="EX,8h">L</Sym>;
  if (quantity === "slow-maximum") return <Sym sub="AS,max">L</Sym>;
  return null;
}

/** A rule set as a ruled table: what is judged, against what, what follows, and where it is written. */
export function RuleSetTable({ ruleSet }: { ruleSet: RuleSetVersion }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <>
      <p className="review-lead">
        {i18n.t("{citation}, version {version}, {dates}.", {
          citation: ruleSet.citation,
          version: ruleSet.version,
          dates: datesWords(i18n, ruleSet, locale),
        })}{" "}
        {i18n._(ruleSet.sourceNote)}
      </p>
      <div className="rule-table">
        <DataTable<Criterion>
          caption={i18n.t("Criteria of {title}", { title: i18n._(ruleSet.title) })}
          rows={ruleSet.criteria}
          rowKey={({ id }) => id}
          stacksOnPhone
          columns={[
            {
              id: "criterion",
              head: i18n.t("Criterion"),
              isRowHead: true,
              cell: (criterion) => (
                <span className="two-lines">
                  {i18n._(criterion.label)}
                  {criterion.force === "should" && (
                    <span className="beneath">{i18n.t("should, no limit")}</span>
                  )}
                </span>
              ),
            },
            {
              id: "over",
              head: i18n.t("Over when"),
              cell: (criterion) => (
                <span className="two-lines">
                  <span>
                    {quantityWord(i18n, criterion.quantity)}{" "}
                    <QuantitySymbol quantity={criterion.quantity} />
                  </span>
                  <span>
                    {comparatorWord(i18n, criterion.comparator)}{" "}
                    <b className="whitespace-nowrap">{criterionValue(i18n, criterion, locale)}</b>
                  </span>
                </span>
              ),
            },
            {
              id: "judged",
              head: i18n.t("Judged"),
              cell: (criterion) => judgedWord(i18n, criterion.judged),
            },
            {
              id: "settings",
              head: i18n.t("Settings"),
              cell: (criterion) => (
                <span className="beneath">
                  {criterionSettings(i18n, criterion, locale).join(", ") || i18n.t("not stated")}
                </span>
              ),
            },
            {
              id: "duties",
              head: i18n.t("What the employer must do"),
              cell: (criterion) => (
                <ul>
                  {criterion.duties.map((duty) => (
                    <li key={duty}>{i18n._(duty)}.</li>
                  ))}
                </ul>
              ),
            },
            {
              id: "citation",
              head: i18n.t("Citation"),
              cell: (criterion) => (
                <span className="two-lines">
                  {criterion.citation}
                  {criterion.sourceStatus === "from-memory" && (
                    <span className="beneath italic">{i18n.t("from memory")}</span>
                  )}
                </span>
              ),
            },
          ]}
        />
      </div>
      <h3 className="mt-7 mb-2">{i18n.t("How a protector counts")}</h3>
      <dl className="facts">
        {protectionFacts(i18n, ruleSet.protection, locale).map(({ key, label, value }) => (
          <div key={key}>
            <dt>{label}</dt>
            <dd className={value === null ? "not-assessed" : undefined}>
              {value ?? i18n.t("not stated")}
            </dd>
          </div>
        ))}
        {ruleSet.notStated.map((words) => (
          <div key={words}>
            <dt>{i18n._(words)}</dt>
            <dd className="not-assessed">{i18n.t("not stated")}</dd>
          </div>
        ))}
      </dl>
    </>
  );
}
