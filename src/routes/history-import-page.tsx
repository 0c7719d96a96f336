import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect, useRef, useState } from "react";
import { useParams } from "react-router-dom";
import { formatInstant } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatNumber } from "../../shared/format/number";
import type { Locale } from "../../shared/i18n";
import type { HistoryHead, HistoryImportView } from "../../shared/schemas/history";
import { type FacedShift, likelyCovers, shiftDoubt } from "../../shared/schemas/run-doubts";
import { Button, ButtonLink } from "../components/button";
import { Failed } from "../components/failed";
import { Field } from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { FirstLines } from "../features/histories/first-lines";
import { HistoryReportView } from "../features/histories/import-report";
import { draftFaultText, importStateText } from "../features/histories/import-words";
import {
  historyImportQueries,
  isAtWork,
  useCancelImport,
  useReadImport,
  useStoreImport,
} from "../features/histories/imports";
import { draftOf, type MappingDraft, toMapping } from "../features/histories/mapping";
import { MappingForm } from "../features/histories/mapping-form";
import { doubtSentence } from "../features/outings/doubt-words";
import { ApiError } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/histories.css";
import { MeasuringWays } from "./measuring-frame";

/** A file on its way in: what its columns are, what was found in it, and whether it is stored. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const found = useQuery(historyImportQueries.one(id));
  const view = found.data;
  return (
    <>
      <PageBody
        margin={
          view && (
            <MarginNote title={i18n.t("The file")}>
              <Leaders
                items={[
                  {
                    key: "instrument",
                    label: i18n.t("Instrument"),
                    value: `${view.instrumentName}, ${view.serialNumber}`,
                  },
                  { key: "worker", label: i18n.t("Worn by"), value: view.workerName ?? "" },
                  {
                    key: "size",
                    label: i18n.t("Size"),
                    value: `${formatNumber(view.sizeBytes / 1024, 0, locale)} kB`,
                  },
                  {
                    key: "sent",
                    label: i18n.t("Sent in"),
                    value: formatInstant(view.createdAt, view.timeZone, locale),
                  },
                ]}
              />
              {view.head?.proposedFrom === "instrument" && (
                <p>
                  {i18n.t("The columns are mapped as they were for this instrument’s last file.")}
                </p>
              )}
            </MarginNote>
          )
        }
      >
        <PageHead
          way={<MeasuringWays />}
          title={view?.fileName ?? i18n.t("Import a time history")}
          lead={
            view &&
            (isFileRefused(view)
              ? i18n.t("The file is refused")
              : importStateText(i18n, view.state))
          }
        />
        {found.isError && <Failed error={found.error} onRetry={() => void found.refetch()} />}
        {view && <ImportSteps key={view.id} view={view} />}
      </PageBody>
      <Folio>
        <TextLink to={paths.historyImports}>{i18n.t("All imports")}</TextLink>
      </Folio>
    </>
  );
}

/** Not only asked about: no answer lets this file in. */
const isFileRefused = ({ state, report }: HistoryImportView): boolean =>
  state === "refused" && (report?.issues.some(({ severity }) => severity === "refused") ?? false);

function ImportSteps({ view }: { view: HistoryImportView }) {
  const { i18n } = useLingui();
  const cancel = useCancelImport(view.id);
  const isOver = view.state === "stored" || view.state === "cancelled";
  return (
    <>
      {isAtWork(view.state) && <AtWork view={view} />}
      {view.state === "stored" && view.historyId !== null && (
        <p className="review-actions">
          <ButtonLink kind="primary" to={paths.history(view.historyId)}>
            {i18n.t("Open the history")}
          </ButtonLink>
        </p>
      )}
      {view.state === "cancelled" && <p>{i18n.t("Nothing of this file is kept.")}</p>}
      {view.head && !isOver && <Mapping view={view} head={view.head} />}
      {view.report && view.state === "stored" && (
        <Section id="found" title={i18n.t("What was found")}>
          <HistoryReportView
            report={view.report}
            timeZone={view.timeZone}
            answers={new Set(view.answers)}
          />
        </Section>
      )}
      {!isOver && view.can.change && (
        <div className="review-actions">
          <Button isBusy={cancel.isPending} onClick={() => cancel.mutate({})}>
            {i18n.t("Cancel the import")}
          </Button>
          <FormProblem error={cancel.error} />
        </div>
      )}
    </>
  );
}

function AtWork({ view }: { view: HistoryImportView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const word = importStateText(i18n, view.state);
  return (
    <div className="import-progress">
      <progress max={100} value={view.progressPct} aria-label={word} />
      <Status>{`${word}: ${formatNumber(view.progressPct, 0, locale)} %`}</Status>
    </div>
  );
}

function Mapping({ view, head }: { view: HistoryImportView; head: HistoryHead }) {
  const { i18n } = useLingui();
  const [draft, setDraft] = useState<MappingDraft>(() =>
    draftOf(head, view.mapping ?? head.proposed),
  );
  const [answers, setAnswers] = useState<ReadonlySet<string>>(() => new Set(view.answers));
  const [isFaultShown, setFaultShown] = useState(false);
  const read = useReadImport(view.id);
  const outcome = useRef<HTMLDivElement>(null);
  const wasAtWork = useRef(false);
  const mapping = toMapping(draft);
  const isReadOnly = isAtWork(view.state) || !view.can.change;
  /** Another mapping than the one that the report is about. */
  const isChanged =
    typeof mapping === "string" || JSON.stringify(mapping) !== JSON.stringify(view.mapping);

  useEffect(() => {
    if (wasAtWork.current && !isAtWork(view.state)) outcome.current?.focus();
    wasAtWork.current = isAtWork(view.state);
  }, [view.state]);

  function order(accepted: ReadonlySet<string>) {
    setFaultShown(true);
    if (typeof mapping !== "string") read.mutate({ mapping, answers: [...accepted] });
  }

  function answer(code: string, isAccepted: boolean) {
    const next = new Set(answers);
    if (isAccepted) next.add(code);
    else next.delete(code);
    setAnswers(next);
  }

  const asked = (view.report?.issues ?? []).filter(({ severity }) => severity === "asked");
  const isAnswered = asked.every(({ code }) => answers.has(code));
  const isRefused = isFileRefused(view);
  return (
    <>
      <Section id="columns" title={i18n.t("What the columns are")}>
        <fieldset className="bare" disabled={isReadOnly}>
          <MappingForm
            head={head}
            draft={draft}
            onChange={(next) => {
              setDraft(next);
              read.reset();
            }}
          />
        </fieldset>
      </Section>
      <Section id="first-lines" title={i18n.t("How the first lines are read")}>
        {typeof mapping === "string" ? (
          <p
            className={isFaultShown ? "field-error" : undefined}
            role={isFaultShown ? "alert" : undefined}
          >
            {draftFaultText(i18n, mapping)}
          </p>
        ) : (
          <FirstLines head={head} mapping={mapping} />
        )}
        {view.can.change && (
          <div className="review-actions">
            <Button
              kind={view.report && !isChanged ? "plain" : "primary"}
              isBusy={read.isPending || isAtWork(view.state)}
              onClick={() => order(new Set())}
            >
              {i18n.t("Read the whole file")}
            </Button>
          </div>
        )}
        <FormProblem error={read.error} />
      </Section>
      <div ref={outcome} tabIndex={-1} className="import-outcome" aria-live="polite">
        {view.state === "failed" && (
          <p className="field-error">
            {i18n.t("Reading it ended too often before it was done. Try again, or cancel it.")}
          </p>
        )}
        {view.report && !isChanged && (
          <Section
            id="report"
            title={
              isRefused
                ? i18n.t("The file is refused")
                : view.state === "ready"
                  ? i18n.t("Nothing stands in the way")
                  : i18n.t("Something is open")
            }
          >
            <HistoryReportView
              report={view.report}
              timeZone={view.timeZone}
              answers={answers}
              onAnswer={
                view.can.change && view.state === "refused" && !isRefused ? answer : undefined
              }
            />
            {view.can.change && view.state === "refused" && !isRefused && (
              <div className="review-actions">
                <Button
                  kind="primary"
                  isBusy={!isAnswered || read.isPending}
                  onClick={() => order(answers)}
                >
                  {i18n.t("Go on with these answers")}
                </Button>
              </div>
            )}
            {view.can.change && view.state === "ready" && <StoreForm view={view} />}
          </Section>
        )}
      </div>
    </>
  );
}

/** What of a shift is missing, and what lies beyond it, at either end. */
function offText(i18n: I18n, shift: FacedShift, locale: Locale): string[] {
  const { startOffMin = null, endOffMin = null, insideMin } = shift;
  if (startOffMin === null || endOffMin === null || insideMin === 0) return [];
  const length = (minutes: number) => ({ duration: formatDuration(Math.abs(minutes), locale) });
  return [
    startOffMin >= LEAST_TOLD_MIN &&
      i18n.t("{duration} are missing at its beginning.", length(startOffMin)),
    startOffMin <= -LEAST_TOLD_MIN &&
      i18n.t("{duration} lie before it begins.", length(startOffMin)),
    endOffMin <= -LEAST_TOLD_MIN && i18n.t("{duration} are missing at its end.", length(endOffMin)),
    endOffMin >= LEAST_TOLD_MIN && i18n.t("{duration} lie after its end.", length(endOffMin)),
  ].filter((text) => text !== false);
}

const LEAST_TOLD_MIN = 1;

function StoreForm({ view }: { view: HistoryImportView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { report, shift } = view;
  const durationMin = report ? (report.valuesCount * (report.intervalMs ?? 0)) / 60_000 : 0;
  const [covers, setCovers] = useState(() => likelyCovers(shift, durationMin));
  const [isMissing, setMissing] = useState(false);
  const [reason, setReason] = useState("");
  const store = useStoreImport(view.id);
  const refused =
    store.error instanceof ApiError
      ? store.error.issues.filter(({ path }) => path === "keptReason")
      : [];
  const ofShift = covers === null ? null : shiftDoubt({ covers, shift, durationMin });
  const doubts = ofShift
    ? [ofShift, ...refused.filter(({ code }) => code !== ofShift.code)]
    : refused;
  const isDoubtful =
    doubts.length > 0 ||
    (report?.channels ?? []).some(({ overRange, underRange }) => overRange + underRange > 0);
  const choices = [
    ["shift", i18n.t("the shift")],
    ["projected", i18n.t("a part; the rest was like it")],
    ["part", i18n.t("a part; only evidence")],
  ] as const;
  return (
    <form
      className="form"
      noValidate
      aria-label={i18n.t("Store the history")}
      onSubmit={(event) => {
        event.preventDefault();
        setMissing(covers === null);
        if (covers === null) return;
        const keptReason = !isDoubtful || reason.trim() === "" ? null : reason.trim();
        store.mutate({ covers, keptReason });
      }}
    >
      <Field
        label={i18n.t("It covers")}
        isGroup
        note={
          shift
            ? [
                i18n.t("{duration} long; the shift lasts from {from} to {to}.", {
                  duration: formatDuration(durationMin, locale),
                  from: shift.from,
                  to: shift.to,
                }),
                ...offText(i18n, shift, locale),
              ].join(" ")
            : i18n.t("No shift of the worker is known for that day.")
        }
        error={isMissing && covers === null ? i18n.t("Choose what it covers.") : undefined}
      >
        {() =>
          choices.map(([value, label]) => (
            <label key={value} className="choice">
              <input
                type="radio"
                name="covers"
                checked={covers === value}
                onChange={() => {
                  setCovers(value);
                  store.reset();
                }}
              />
              <span>{label}</span>
            </label>
          ))
        }
      </Field>
      {isDoubtful && (
        <Field
          label={i18n.t("Why it is kept")}
          note={i18n.t("Whatever uses this run then loses the standard’s name.")}
          error={
            doubts.length > 0
              ? doubts
                  .map(({ code, params }) => doubtSentence(i18n, code, params, locale))
                  .join(" ")
              : undefined
          }
        >
          {(wires) => (
            <textarea
              {...wires}
              className="input"
              rows={2}
              value={reason}
              onChange={(event) => setReason(event.target.value)}
            />
          )}
        </Field>
      )}
      {refused.length === 0 && <FormProblem error={store.error} />}
      <div className="form-actions">
        <Button type="submit" kind="primary" isBusy={store.isPending}>
          {i18n.t("Store all of it")}
        </Button>
      </div>
    </form>
  );
}
