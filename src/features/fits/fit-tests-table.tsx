import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import { hasToPass } from "../../../shared/acoustics/protection/fit-rating";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { isolate } from "../../../shared/i18n/isolate";
import type { FitTestView } from "../../../shared/schemas/fit";
import { oneEarWord } from "../../../shared/words/register-words";
import { type DataColumn, DataTable, type DataTableProps } from "../../components/data-table";
import { TextButton, TextLink } from "../../components/link";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { paths } from "../../paths";
import { CorrectFit, StrikeFit } from "./fit-change";
import {
  activeWord,
  fitMethodWord,
  isFault,
  notRatedWord,
  outcomeWord,
  saysWord,
  singleTrialWord,
} from "./fit-words";

/** Fits by date: who, which device, what came off, and whether that was enough. */
export function FitTestsTable({
  hidesWorker = false,
  actions,
  ...table
}: {
  hidesWorker?: boolean;
  /** What else can be done with a row. */
  actions?: (test: FitTestView) => ReactNode;
} & Pick<
  DataTableProps<FitTestView>,
  "rows" | "state" | "error" | "onRetry" | "more" | "empty" | "isSelected"
>) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [changing, setChanging] = useState<{ id: string; how: "correct" | "strike" } | null>(null);
  const [said, setSaid] = useState("");
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const open = (id: string, how: "correct" | "strike") => {
    setSaid("");
    setChanging({ id, how });
  };
  /** The form goes, and the focus on it: to what was done, or back to the button. */
  const leave = (sentence: string) => {
    setChanging(null);
    setSaid(sentence);
    moveFocus(sentence === "" ? `[data-${changing?.how}="${changing?.id}"]` : "[data-fit-said]");
  };
  const changed = table.rows.find(({ id }) => id === changing?.id);
  const canAct = table.rows.some(({ can }) => can.change);
  const device: DataColumn<FitTestView> = {
    id: "device",
    head: i18n.t("Protector"),
    isRowHead: hidesWorker,
    cell: ({ modelId, modelName, size }) => (
      <span className="two-lines">
        <TextLink className="is-quiet is-name" to={paths.protector(modelId)}>
          {modelName}
        </TextLink>
        {size !== null && <span className="beneath">{i18n.t("size {size}", { size })}</span>}
      </span>
    ),
  };
  const columns: DataColumn<FitTestView>[] = [
    ...(hidesWorker
      ? []
      : [
          {
            id: "worker",
            head: i18n.t("Worker"),
            isRowHead: true,
            cell: ({ workerId, workerName, employeeNumber }) => (
              <span className="two-lines">
                <TextLink className="is-quiet is-name" to={paths.fittingOf(workerId)}>
                  {workerName}
                </TextLink>
                <span className="beneath">{employeeNumber}</span>
              </span>
            ),
          } satisfies DataColumn<FitTestView>,
        ]),
    device,
    {
      id: "date",
      head: i18n.t("Tested"),
      cell: ({ testedOn, method }) => (
        <span className="two-lines">
          {formatShortDate(testedOn, locale)}
          <span className="beneath">{fitMethodWord(i18n, method)}</span>
        </span>
      ),
    },
    {
      id: "ears",
      head: i18n.t("Left, right"),
      unit: "dB",
      kind: "figure",
      hidesOnPhone: true,
      cell: ({ leftDb, rightDb }) =>
        `${formatLevel(leftDb, locale)} ${formatLevel(rightDb, locale)}`,
    },
    {
      id: "par",
      head: i18n.t("PAR"),
      unit: "dB",
      kind: "figure",
      cell: (test) => (
        <span className="two-lines">
          {test.isVoid ? (
            <s>{formatLevel(test.parDb, locale)}</s>
          ) : (
            <b>{formatLevel(test.parDb, locale)}</b>
          )}
          <span className="beneath">
            {notRatedWord(i18n, test) ?? i18n.t("at {pct} %", { pct: test.confidencePct })}
          </span>
          <Less7 db={test.parDb === null ? null : test.labelLess7Db} />
        </span>
      ),
    },
    {
      id: "need",
      head: i18n.t("Needed"),
      unit: "dB",
      kind: "figure",
      cell: ({ needDb }) =>
        needDb === null || hasToPass(needDb) ? formatLevel(needDb, locale) : i18n.t("nothing"),
    },
    {
      id: "word",
      head: i18n.t("What it says"),
      cell: (test) => (
        <span className="two-lines">
          <span className={isFault(test) ? "is-fault" : undefined}>
            {test.isVoid ? "–" : saysWord(i18n, test)}
          </span>
          <span className="beneath">
            {[
              oneEarWord(i18n, test),
              singleTrialWord(i18n, test),
              outcomeWord(i18n, test),
              test.activePassed !== null && test.parDb !== null && activeWord(i18n, test),
              test.dueOn !== null &&
                i18n.t("again by {date}", { date: formatShortDate(test.dueOn, locale) }),
            ]
              .filter(Boolean)
              .join(", ")}
          </span>
          {test.struckReason !== null && (
            <span className="beneath">
              {[test.struckReason, test.authorName]
                .filter((part) => part !== null)
                .map(isolate)
                .join(", ")}
            </span>
          )}
        </span>
      ),
    },
    ...(canAct
      ? [
          {
            id: "action",
            head: <span className="sr-only">{i18n.t("Change")}</span>,
            kind: "right",
            cell: (test: FitTestView) => (
              <span className="note-links is-end">
                {actions?.(test)}
                {test.can.change && (
                  <>
                    {test.parDb !== null && (
                      <TextButton
                        data-correct={test.id}
                        aria-label={i18n.t("Correct the fit of {protector}", {
                          protector: test.modelName,
                        })}
                        onClick={() => open(test.id, "correct")}
                      >
                        {i18n.t("Correct")}
                      </TextButton>
                    )}
                    <TextButton
                      data-strike={test.id}
                      aria-label={i18n.t("Strike out the fit of {protector}", {
                        protector: test.modelName,
                      })}
                      onClick={() => open(test.id, "strike")}
                    >
                      {i18n.t("Strike out")}
                    </TextButton>
                  </>
                )}
              </span>
            ),
          } satisfies DataColumn<FitTestView>,
        ]
      : []),
  ];
  return (
    <div ref={place}>
      <DataTable<FitTestView>
        {...table}
        caption={i18n.t("Fit tests, the latest first")}
        rowKey={({ id }) => id}
        columns={columns}
        isTwoLine
        stacksOnPhone
      />
      {changed && changing?.how === "correct" && (
        <CorrectFit
          key={changed.id}
          test={changed}
          onSaved={() =>
            leave(i18n.t("The fit of {protector} is corrected.", { protector: changed.modelName }))
          }
          onLeave={() => leave("")}
        />
      )}
      {changed && changing?.how === "strike" && (
        <StrikeFit
          key={changed.id}
          test={changed}
          onSaved={() =>
            leave(i18n.t("The fit of {protector} is struck out.", { protector: changed.modelName }))
          }
          onLeave={() => leave("")}
        />
      )}
      <p className="desk-said" data-fit-said tabIndex={-1}>
        <Status>{said}</Status>
      </p>
    </div>
  );
}

function Less7({ db }: { db: number | null }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (db === null) return null;
  return (
    <span className="beneath">
      {i18n.t("rating − 7: {level}", { level: formatLevel(db, locale) })}
    </span>
  );
}
