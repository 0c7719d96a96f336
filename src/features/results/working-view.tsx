import { useLingui } from "@lingui/react";
import { Fragment, type ReactNode } from "react";
import type {
  MathPart,
  Working,
  WorkingEquation,
  WorkingStep,
  WorkingTable,
  WorkingValue,
} from "../../../shared/acoustics/working";
import { scientificParts } from "../../../shared/format/figures";
import { withinSentence } from "../../../shared/format/words";
import {
  Equation,
  Fraction,
  Power,
  PutIn,
  Relation,
  Result,
  Sum,
  Sym,
} from "../../components/equation";
import { ShareBar } from "../../components/share-bar";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import {
  type Decimals,
  isLimitAt,
  limitText,
  mathText,
  printedMath,
  sourceTexts,
  workingText,
  workingValueText,
} from "./working-words";

const NUMERIC: ReadonlySet<WorkingValue["kind"]> = new Set([
  "level",
  "difference",
  "minutes",
  "share",
  "dose",
  "scientific",
  "number",
]);

function Value({ value, decimals }: { value: WorkingValue; decimals?: Decimals }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (value.kind === "verdict")
    return (
      <Verdict verdict={value.verdict} isQuiet>
        {workingValueText(i18n, locale, value)}
      </Verdict>
    );
  if (value.kind === "math")
    return (
      <span className="test-line">
        <MathLine {...printedMath(i18n, value.parts, true)} />
      </span>
    );
  if (value.kind === "scientific") {
    const parts = scientificParts(value.number, locale);
    if (!parts) return <>–</>;
    return (
      <span className="no-wrap">
        {parts.mantissa} × 10<sup>{String(parts.exponent).replace("-", "−")}</sup>
      </span>
    );
  }
  if (value.kind === "protector-word")
    return (
      <span
        className={
          value.word === "too-little" || value.word === "too-much" ? "is-fault" : undefined
        }
      >
        {workingValueText(i18n, locale, value)}
      </span>
    );
  if (value.kind === "reason")
    return <span className="not-assessed">{workingValueText(i18n, locale, value)}</span>;
  if (value.kind === "list" && value.values.some(({ kind }) => kind === "text"))
    return (
      <ul className="duties">
        {value.values.map((one) => (
          <li key={workingValueText(i18n, locale, one)}>{workingValueText(i18n, locale, one)}</li>
        ))}
      </ul>
    );
  return <>{workingValueText(i18n, locale, value, decimals)}</>;
}

const RELATIONS = /^(=|≤|<|>|≥|≈)$/;

function MathLine({
  parts,
  decimals,
}: {
  parts: readonly MathPart[];
  decimals?: Decimals;
}): ReactNode {
  return parts.map((part, index) => (
    // biome-ignore lint/suspicious/noArrayIndexKey: the parts of an equation have no identity but their place
    <MathPiece key={index} part={part} isLimit={isLimitAt(parts, index)} decimals={decimals} />
  ));
}

function MathPiece({
  part,
  isLimit,
  decimals,
}: {
  part: MathPart;
  isLimit: boolean;
  decimals: Decimals | undefined;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  switch (part.kind) {
    case "sign":
      if (RELATIONS.test(part.text)) return <Relation>{part.text}</Relation>;
      return part.text === "," ? ", " : ` ${part.text} `;
    case "symbol":
      return (
        <Sym sub={part.sub}>
          {part.base}
          {part.isAtEar ? "′" : ""}
        </Sym>
      );
    case "value":
      return part.isResult ? (
        <Result>
          <Value value={part.value} decimals={decimals} />
          {part.value.kind === "level" || part.value.kind === "difference" ? " dB" : ""}
        </Result>
      ) : (
        <PutIn>
          {isLimit ? (
            limitText(i18n, locale, part.value)
          ) : (
            <Value value={part.value} decimals={decimals} />
          )}
        </PutIn>
      );
    case "sum":
      return <Sum />;
    case "fraction":
      return (
        <Fraction
          over={<MathLine parts={part.over} decimals={decimals} />}
          under={<MathLine parts={part.under} decimals={decimals} />}
        />
      );
    case "power":
      return (
        <Power base={part.base}>
          <MathLine parts={part.exponent} decimals={decimals} />
        </Power>
      );
  }
}

function Cell({ value, isBlank }: { value: WorkingValue | null; isBlank: boolean }) {
  if (value !== null) return <Value value={value} />;
  return isBlank ? null : "–";
}

function ColumnTitle({ column }: { column: WorkingTable["columns"][number] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <>
      {column.title && workingText(i18n, locale, column.title)}
      {column.title && column.symbol && " "}
      {column.symbol && <MathLine parts={column.symbol} />}
    </>
  );
}

/** On a phone each row stands as a list of its cells, each with its column's name before it. */
function StepTable({ table, caption }: { table: WorkingTable; caption: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const title = table.title && workingText(i18n, locale, table.title);
  const name = title ? `${caption}: ${title}` : caption;
  return (
    <>
      {title && <h3 className="working-table-title">{title}</h3>}
      <section
        className="working-scroll"
        aria-label={i18n.t("Table: {title}", { title: name })}
        // biome-ignore lint/a11y/noNoninteractiveTabindex: a table wider than its frame is scrolled by keys
        tabIndex={0}
      >
        {/* Laid out as blocks on a phone a table loses its roles, so that they are said. */}
        {/* biome-ignore-start lint/a11y/noRedundantRoles: see above */}
        <table className="working-table" role="table">
          <caption className="sr-only">{name}</caption>
          <thead role="rowgroup">
            <tr role="row">
              {table.columns.map((column) => (
                <th
                  key={column.id}
                  scope="col"
                  role="columnheader"
                  className={column.isNumeric ? "is-right" : undefined}
                >
                  {column.title || column.symbol ? (
                    <ColumnTitle column={column} />
                  ) : (
                    <span className="sr-only">{i18n.t("Remark")}</span>
                  )}
                </th>
              ))}
            </tr>
          </thead>
          <tbody role="rowgroup">
            {table.rows.map((row) => (
              <tr
                key={row.id}
                role="row"
                className={
                  row.isTotal ? "is-total" : row.isEmphasized ? "is-emphasized" : undefined
                }
              >
                {row.cells.map((cell, index) => {
                  const column = table.columns[index];
                  const key = column?.id ?? index;
                  const isNumber =
                    cell !== null &&
                    (NUMERIC.has(cell.kind) || cell.kind === "list") &&
                    column?.isNumeric;
                  const isBlank = !column?.isNumeric || row.isTotal;
                  const className = [
                    column?.isNumeric && "is-right",
                    column?.isNumeric && (isNumber || cell === null) && "mono",
                    cell === null && isBlank && "is-blank",
                    !column?.isNumeric && "is-prose",
                  ]
                    .filter(Boolean)
                    .join(" ");
                  return index === 0 ? (
                    <th key={key} scope="row" role="rowheader">
                      <Cell value={cell} isBlank={isBlank} />
                    </th>
                  ) : (
                    <td key={key} role="cell" className={className || undefined}>
                      {column && (column.title || column.symbol) && (
                        <span className="cell-label" aria-hidden="true">
                          <ColumnTitle column={column} />
                        </span>
                      )}
                      <span className="cell-value">
                        <Cell value={cell} isBlank={isBlank} />
                      </span>
                    </td>
                  );
                })}
              </tr>
            ))}
          </tbody>
        </table>
        {/* biome-ignore-end lint/a11y/noRedundantRoles: see above */}
      </section>
    </>
  );
}

function Tables({ tables, caption }: { tables: readonly WorkingTable[]; caption: string }) {
  return tables.map((table) => (
    <StepTable
      key={`${table.title?.id ?? ""} ${table.columns.map((column) => column.id).join(" ")}`}
      table={table}
      caption={caption}
    />
  ));
}

/** What several equations in a row are about is said once. */
function Equations({ equations }: { equations: readonly WorkingEquation[] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const labelOf = (equation: WorkingEquation | undefined) =>
    equation?.label ? workingValueText(i18n, locale, equation.label) : "";
  return equations.map((equation, index) => {
    const label = labelOf(equation);
    return (
      <Fragment key={equation.number}>
        {label !== "" && label !== labelOf(equations[index - 1]) && (
          <p className="equation-label">{label}</p>
        )}
        <Equation number={equation.number} spoken={mathText(i18n, locale, equation.parts)}>
          <MathLine {...printedMath(i18n, equation.parts)} />
        </Equation>
      </Fragment>
    );
  });
}

/** The lines that head a working: the ear, the protector, the noise without it, each figure of its own. Each is judged apart. */
export function WorkingLines({ working }: { working: Working }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <table className="working-lines">
      <caption className="sr-only">{i18n.t("The result, line by line")}</caption>
      <tbody>
        {working.lines.map((line) => {
          const { outcome } = line;
          const isQuiet = line.id === "without-protection";
          return (
            <tr key={line.id} className={isQuiet ? "is-quiet" : undefined}>
              <th scope="row">{workingText(i18n, locale, line.title)}</th>
              <td className="working-lines-level">
                <span className="mono">
                  {line.level ? workingValueText(i18n, locale, line.level) : "–"}
                </span>
                {line.level && line.uncertainty && (
                  <span className="figure-u">
                    ±{workingValueText(i18n, locale, line.uncertainty)}
                  </span>
                )}
              </td>
              <td>
                {outcome?.kind === "verdict" ? (
                  <Verdict verdict={outcome.verdict} isQuiet={isQuiet}>
                    {workingValueText(i18n, locale, outcome)}
                  </Verdict>
                ) : (
                  outcome && (
                    <b>
                      <Value value={outcome} />
                    </b>
                  )
                )}
              </td>
              <td className="working-lines-remark">
                {line.remark && workingText(i18n, locale, line.remark)}
              </td>
            </tr>
          );
        })}
      </tbody>
    </table>
  );
}

/** One numbered step, with what it rests on in the margin. */
export function WorkingStepView({ step, children }: { step: WorkingStep; children: ReactNode }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const title = workingText(i18n, locale, step.title);
  const id = `step-${step.number}`;
  const tables = <Tables tables={step.tables} caption={title} />;
  const equations = <Equations equations={step.equations} />;
  const isUncertainty = step.shares.length > 0;
  const sources = sourceTexts(i18n, step.sources);
  return (
    <section className="working-step" aria-labelledby={id}>
      <div className="working-main">
        <span className="working-number" aria-hidden="true">
          {step.number}
        </span>
        <div className="working-content">
          <h2 id={id}>{title}</h2>
          {isUncertainty ? (
            <>
              {equations}
              <ShareBar
                kind="uncertainty"
                lead={i18n.t("Share of u²")}
                shares={step.shares.map(({ label, pct }) => ({
                  label: withinSentence(workingText(i18n, locale, label), locale),
                  sharePct: pct,
                }))}
              />
              {tables}
            </>
          ) : (
            <>
              {tables}
              {equations}
            </>
          )}
          {step.details.map((detail) => {
            const detailTitle = workingText(i18n, locale, detail.title);
            return (
              <details key={detail.id} className="working-detail">
                <summary>{detailTitle}</summary>
                <Tables tables={detail.tables} caption={detailTitle} />
                <Equations equations={detail.equations} />
              </details>
            );
          })}
          {step.notes.map((note) => (
            <p key={workingText(i18n, locale, note)} className="working-note">
              {workingText(i18n, locale, note)}
            </p>
          ))}
        </div>
      </div>
      <aside
        className="working-margin"
        aria-label={i18n.t("What step {number} rests on", { number: step.number })}
      >
        {sources.length > 0 && (
          <p>
            <b>{i18n.t("Source.")}</b> {sources.join("; ")}.
          </p>
        )}
        {children}
      </aside>
    </section>
  );
}
