import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import type { TrustRun } from "../../../shared/schemas/follow-up";
import { RUN_DOUBTS, type RunDoubtCode } from "../../../shared/schemas/run-doubts";
import { doubtWord } from "../../../shared/words/run-words";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

const isDoubt = (code: string): code is RunDoubtCode =>
  (RUN_DOUBTS as readonly string[]).includes(code);

function checkWords(i18n: I18n, locale: Locale, run: TrustRun): string {
  const { checkBeforeDb, checkAfterDb } = run;
  if (checkBeforeDb === null || checkAfterDb === null) return i18n.t("not made before and after");
  return i18n.t("{before} before, {after} after", {
    before: formatLevel(checkBeforeDb, locale),
    after: formatLevel(checkAfterDb, locale),
  });
}

function unusualWords(i18n: I18n, run: TrustRun): string {
  const doubts = run.doubts.map((code) => (isDoubt(code) ? doubtWord(i18n, code) : code));
  return [
    ...doubts,
    run.keptReason && i18n.t("kept: {reason}", { reason: run.keptReason }),
    run.unusual,
  ]
    .filter(Boolean)
    .join("; ");
}

/** The runs that say whether a finding can be trusted: the day's own, and the latest five of the task that decides. */
export function TrustTable({ runs, mayOpen }: { runs: readonly TrustRun[]; mayOpen: boolean }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <DataTable<TrustRun>
      caption={i18n.t("Runs behind it: the day’s own, and the same task’s last five")}
      rows={runs}
      rowKey={({ runId }) => runId}
      isTwoLine
      stacksOnPhone
      groupOf={(run) =>
        run.isOfTheDay
          ? { key: "day", label: i18n.t("Of this day") }
          : {
              key: run.taskName ?? "",
              label: i18n.t("{task}: the last five", { task: run.taskName ?? "–" }),
            }
      }
      empty={
        <Empty title={i18n.t("No run stands behind it.")}>
          {i18n.t("Nothing was measured on this day, and no run was taken of the task alone.")}
        </Empty>
      }
      columns={[
        {
          id: "date",
          head: i18n.t("Day"),
          isRowHead: true,
          cell: ({ runId, date, workerName }) => (
            <span className="two-lines">
              {mayOpen ? (
                <TextLink to={paths.run(runId)}>{formatShortDate(date, locale)}</TextLink>
              ) : (
                formatShortDate(date, locale)
              )}
              {workerName && <span className="beneath">{isolate(workerName)}</span>}
            </span>
          ),
        },
        {
          id: "level",
          head: i18n.t("Level"),
          unit: i18n.t("dB"),
          kind: "figure",
          cell: ({ averageDb, exchangeRateDb }) =>
            averageDb === null ? (
              "–"
            ) : (
              <span className="two-lines">
                {formatLevel(averageDb, locale)}
                <span className="beneath">
                  {exchangeRateDb === 3
                    ? "LAeq"
                    : i18n.t("LAVG, {rate} dB", {
                        rate: formatNumber(exchangeRateDb ?? 0, 0, locale),
                      })}
                </span>
              </span>
            ),
        },
        {
          id: "check",
          head: i18n.t("Field check"),
          unit: i18n.t("dB"),
          cell: (run) => checkWords(i18n, locale, run),
        },
        {
          id: "unusual",
          head: i18n.t("What was unusual"),
          cell: (run) => unusualWords(i18n, run) || i18n.t("nothing noted"),
        },
      ]}
    />
  );
}
