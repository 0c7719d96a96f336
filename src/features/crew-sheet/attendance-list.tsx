import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import { formatDay } from "../../../shared/format/date";
import { startsSentence } from "../../../shared/format/words";
import type { AttendanceView } from "../../../shared/schemas/attendance";
import { Empty } from "../../components/empty";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { LastDayForm } from "./attendance-forms";
import { useChangeAttendance } from "./attendance-queries";

type Span = AttendanceView["absences"][number];

/** Absences or loans of today and to come, each with its last day and a way to take it back. */
export function SpanList<One extends Span>({
  view,
  part,
  spans,
  wordsOf,
  empty,
  onTakenBack,
}: {
  view: AttendanceView;
  part: "absences" | "loans";
  spans: readonly One[];
  /** What is said of one before its days. */
  wordsOf: (span: One) => ReactNode;
  empty: string;
  /** One is gone, and the focus with it. */
  onTakenBack: () => void;
}) {
  if (spans.length === 0) return <Empty title={empty} />;
  return (
    <ul className="span-list">
      {spans.map((span) => (
        <SpanRow
          key={span.id}
          view={view}
          part={part}
          span={span}
          words={wordsOf(span)}
          onTakenBack={onTakenBack}
        />
      ))}
    </ul>
  );
}

function SpanRow({
  view,
  part,
  span,
  words,
  onTakenBack,
}: {
  view: AttendanceView;
  part: "absences" | "loans";
  span: Span;
  words: ReactNode;
  onTakenBack: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [isEnding, setEnding] = useState(false);
  const [place, moveFocus] = useMoveFocus<HTMLLIElement>();
  const takeBack = useChangeAttendance(view.crew.id, onTakenBack);
  const { worker, fromDate, toDate, revision } = span;
  const from = formatDay(fromDate, locale);
  const days =
    toDate === null
      ? i18n.t("from {from} until further notice", { from })
      : toDate === fromDate
        ? from
        : i18n.t("{from} to {to}", { from, to: formatDay(toDate, locale) });
  const hasBegun = fromDate < view.today;
  const leave = () => {
    setEnding(false);
    moveFocus("[data-last-day]");
  };
  return (
    <li className="sheet-row" ref={place}>
      <h3>{worker.name}</h3>
      {words}
      <p>{startsSentence(days, locale)}</p>
      {span.canChange && !isEnding && (
        <p className="span-ways">
          <TextButton
            data-last-day
            aria-label={i18n.t("Last day… {name}", { name: worker.name })}
            onClick={() => {
              setEnding(true);
              moveFocus("input");
            }}
          >
            {i18n.t("Last day…")}
          </TextButton>
          {(part === "absences" || !hasBegun) && (
            <TextButton
              aria-label={i18n.t("Take back: {name}", { name: worker.name })}
              onClick={() =>
                takeBack.start({
                  path: `${part}/${span.id}/strike`,
                  method: "post",
                  body: {},
                  revision,
                })
              }
            >
              {i18n.t("Take back")}
            </TextButton>
          )}
        </p>
      )}
      <FormProblem error={takeBack.error} />
      {isEnding && <LastDayForm view={view} part={part} span={span} onDone={leave} />}
    </li>
  );
}
