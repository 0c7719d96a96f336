import { useLingui } from "@lingui/react";
import { useMutation, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatDate, formatInstant } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { ShiftView, ShiftVoid } from "../../shared/schemas/shift";
import { Button } from "../components/button";
import { Failed } from "../components/failed";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { CorrectShift, taskWords, unaccountedWords } from "../features/results/shift-form";
import { type Shift, shiftQuery, useShiftSaved } from "../features/results/shift-queries";
import { OfficeLink } from "../features/session/office-link";
import { workerQueries } from "../features/workers/queries";
import { api } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/register.css";
import "../styles/runs.css";

export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(shiftQuery(id));
  if (data) return <ShiftSheet key={data.shiftId} shift={data} />;
  return (
    <PageBody>
      <PageHead
        title={i18n.t("Shift")}
        lead={error ? undefined : <span className="loading-line" />}
      />
      {error && <Failed error={error} onRetry={() => void refetch()} />}
    </PageBody>
  );
}

function ShiftSheet({ shift }: { shift: Shift }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [doing, setDoing] = useState<"correct" | "strike" | null>(null);
  const worker = useQuery({ ...workerQueries.one(shift.workerId), enabled: doing === "correct" });
  return (
    <>
      <PageBody>
        <PageHead
          way={
            <>
              <OfficeLink to={paths.workers}>{i18n.t("Workers")}</OfficeLink> /{" "}
              <TextLink to={paths.worker(shift.workerId)}>{shift.workerName}</TextLink>
            </>
          }
          title={i18n.t("Shift of {date}", { date: formatDate(shift.date, locale) })}
          lead={
            shift.isVoid ? (
              <b>{i18n.t("Struck: it was never worked and counts for nothing.")}</b>
            ) : (
              <>
                {i18n.t("From {start}, {length}. Time not accounted for: {rest}.", {
                  start: shift.localStart,
                  length: formatDuration(shift.lengthMin, locale),
                  rest: unaccountedWords(i18n, locale, shift.unaccounted),
                })}{" "}
                <TextLink to={paths.result(shift.workerId, shift.date)}>
                  {i18n.t("How the day was judged")}
                </TextLink>
              </>
            )
          }
          actions={
            shift.can.correct &&
            !shift.isVoid &&
            doing === null && (
              <>
                <Button onClick={() => setDoing("correct")}>{i18n.t("Correct")}</Button>
                <Button onClick={() => setDoing("strike")}>{i18n.t("Strike")}</Button>
              </>
            )
          }
        />
        {doing === "correct" && worker.data && (
          <Section title={i18n.t("Correct this shift")} id="correct">
            <CorrectShift shift={shift} siteId={worker.data.siteId} onDone={() => setDoing(null)} />
          </Section>
        )}
        {doing === "strike" && (
          <Section title={i18n.t("Strike this shift")} id="strike">
            <StrikeShift shift={shift} onDone={() => setDoing(null)} />
          </Section>
        )}
        {shift.note && <p className="after-table">{shift.note}</p>}
        <Section title={i18n.t("Revisions, latest first")} id="revisions">
          {shift.revisions.map((revision, index) => (
            <Revision
              key={revision.number}
              revision={revision}
              before={shift.revisions[index + 1]}
              timeZone={shift.timeZone}
            />
          ))}
        </Section>
      </PageBody>
      <Folio>
        {i18n.t("What was recorded stays; a correction is the next revision, with its reason.")}
      </Folio>
    </>
  );
}

function Revision({
  revision,
  before,
  timeZone,
}: {
  revision: Shift["revisions"][number];
  before: Shift["revisions"][number] | undefined;
  timeZone: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isChanged = (task: Shift["revisions"][number]["tasks"][number]) => {
    const earlier = before?.tasks.find(({ taskId }) => taskId === task.taskId);
    return (
      before !== undefined &&
      (earlier?.durationMin !== task.durationMin || earlier?.wornPct !== task.wornPct)
    );
  };
  return (
    <article className={`revision${revision.isVoid ? " is-void" : ""}`}>
      <h3>
        {i18n.t("Revision {number}", { number: revision.number })}{" "}
        <span className="by">
          {[revision.authorName, formatInstant(revision.at, timeZone, locale)]
            .filter(Boolean)
            .join(", ")}
        </span>
      </h3>
      {revision.reason && <p>“{revision.reason}”</p>}
      {revision.isVoid ? (
        <p>{i18n.t("Struck.")}</p>
      ) : (
        <p className="revision-tasks">
          <span
            className={before && before.lengthMin !== revision.lengthMin ? "changed" : undefined}
          >
            {i18n.t("Length {length}", { length: formatDuration(revision.lengthMin, locale) })}
          </span>
          {revision.tasks.map((task) => (
            <span key={task.taskId} className={isChanged(task) ? "changed" : undefined}>
              {taskWords(i18n, locale, task)}
            </span>
          ))}
        </p>
      )}
    </article>
  );
}

function StrikeShift({ shift, onDone }: { shift: Shift; onDone: () => void }) {
  const { i18n } = useLingui();
  const saved = useShiftSaved();
  const form = useSchemaForm(ShiftVoid, { defaultValues: { reason: "" } });
  const strike = useMutation({
    mutationFn: (reason: string) =>
      api.delete(`/shifts/${shift.shiftId}`, {
        body: { reason },
        schema: ShiftView,
        ifMatch: String(shift.revision),
      }),
    onSuccess: (next) => {
      saved(next);
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      aria-label={i18n.t("Strike this shift")}
      onSubmit={form.handleSubmit(({ reason }) => strike.mutate(reason))}
    >
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Why it is struck")}
        rows={2}
        note={i18n.t(
          "For a shift that was never worked. It stays on record; its day is worked out anew.",
        )}
      />
      <FormProblem error={strike.error} />
      <FormActions>
        <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike it")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}
