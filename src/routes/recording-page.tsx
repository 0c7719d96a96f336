import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatDate, formatInstant } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatNumber } from "../../shared/format/number";
import { recordingText } from "../../shared/recordings/recording-text";
import type { RecordingView } from "../../shared/schemas/recording";
import { localDate } from "../../shared/time/zone";
import { Button } from "../components/button";
import { RecomputeProgress } from "../components/change-preview";
import { Failed } from "../components/failed";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { AudioNote, KeepForm } from "../features/recordings/audio-note";
import { FaultQuestion } from "../features/recordings/fault-question";
import { isAtWork, recordingQueries, useCancelRecording } from "../features/recordings/queries";
import { RecordingLevelsView } from "../features/recordings/recording-levels";
import {
  calibrationText,
  megabytes,
  recordingStateText,
  sampleFormatText,
  toneText,
} from "../features/recordings/recording-words";
import { UseForm } from "../features/recordings/use-form";
import { taskQueries } from "../features/tasks/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/histories.css";
import "../styles/recordings.css";
import "../styles/register.css";
import { MeasuringWays } from "./measuring-frame";

/** One recording: on its way, asked about, or with its levels, its spectra and what they are used for. */
export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const found = useQuery(recordingQueries.one(id));
  const [open, setOpen] = useState<"use" | "keep" | null>(null);
  const [isUsed, setUsed] = useState(false);
  const view = found.data;
  const close = () => setOpen(null);
  return (
    <>
      <PageBody margin={view && <Facts view={view} onKeep={() => setOpen("keep")} />}>
        <PageHead
          way={<MeasuringWays />}
          title={view?.fileName ?? i18n.t("Recording")}
          lead={view && <Lead view={view} />}
          actions={
            view?.can.change &&
            view.state === "analysed" &&
            open === null && (
              <Button kind="primary" onClick={() => setOpen("use")}>
                {i18n.t("Use for this task")}
              </Button>
            )
          }
        />
        {found.isError && <Failed error={found.error} onRetry={() => void found.refetch()} />}
        {isUsed && <RecomputeProgress />}
        {view && open === "keep" && (
          <Section id="keep" title={i18n.t("Keep the sound")}>
            <KeepForm view={view} onLeave={close} />
          </Section>
        )}
        {view && open === "use" && (
          <Use
            view={view}
            onLeave={close}
            onSaved={() => {
              setUsed(true);
              close();
            }}
          />
        )}
        {view && <Course view={view} />}
        {view?.analysis && (
          <Section id="levels" title={i18n.t("Levels and spectrum")}>
            <RecordingLevelsView analysis={view.analysis} />
          </Section>
        )}
      </PageBody>
      <Folio>
        <TextLink to={paths.recordings}>{i18n.t("All recordings")}</TextLink>
      </Folio>
    </>
  );
}

function Lead({ view }: { view: RecordingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { usedFrom, state, taskName } = view;
  const last = usedFrom.at(-1);
  if (last !== undefined)
    return i18n.t("{task} rests on it from {date} on.", {
      task: taskName,
      date: formatDate(last, locale),
    });
  return i18n.t("{task}. {state}.", { task: taskName, state: recordingStateText(i18n, state) });
}

function Facts({ view, onKeep }: { view: RecordingView; onKeep: () => void }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { analysis, calibration } = view;
  return (
    <>
      <MarginNote title={i18n.t("The recording")} isRuled>
        <p>
          <TextLink to={paths.task(view.taskId)}>{view.taskName}</TextLink>
        </p>
        <Leaders
          items={[
            ...(analysis
              ? [
                  {
                    key: "length",
                    label: i18n.t("Length"),
                    value:
                      analysis.durationS < 60
                        ? `${formatNumber(analysis.durationS, 1, locale)} s`
                        : formatDuration(analysis.durationS / 60, locale),
                  },
                  {
                    key: "rate",
                    label: i18n.t("Sampling"),
                    value: `${formatNumber(analysis.sampleRateHz / 1000, 1, locale)} kHz`,
                  },
                  {
                    key: "bits",
                    label: i18n.t("Samples"),
                    value: sampleFormatText(i18n, analysis.sampleFormat),
                  },
                ]
              : []),
            {
              key: "size",
              label: i18n.t("Size"),
              value: `${megabytes(view.sizeBytes, locale)} MB`,
            },
          ]}
        />
        <p>
          {[view.authorName, formatInstant(view.createdAt, view.timeZone, locale)]
            .filter(Boolean)
            .join(", ")}
        </p>
      </MarginNote>
      <MarginNote title={i18n.t("Calibration")}>
        <p>{calibrationText(i18n, calibration, locale)}</p>
        {calibration.kind === "tone" && <p>{toneText(i18n, calibration.tone, locale)}</p>}
      </MarginNote>
      <MarginNote title={i18n.t("The sound")}>
        <AudioNote view={view} onKeep={onKeep} />
      </MarginNote>
    </>
  );
}

/** How far it is, what it needs, why it ended. */
function Course({ view }: { view: RecordingView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const cancel = useCancelRecording(view.id);
  const { state, failure, accepted, analysis } = view;
  const word = recordingStateText(i18n, state);
  const isOpen = isAtWork(state) || state === "asked";
  return (
    <>
      {isAtWork(state) && (
        <div className="import-progress">
          <progress max={100} value={view.progressPct} aria-label={word} />
          <Status>{`${word}: ${formatNumber(view.progressPct, 0, locale)} %`}</Status>
        </div>
      )}
      {state === "asked" && <FaultQuestion key={failure?.code} view={view} />}
      {state === "failed" && failure && (
        <p className="recording-refused">{recordingText(i18n, failure.code, failure.params)}</p>
      )}
      {state === "cancelled" && <p>{i18n.t("Nothing of this recording is kept.")}</p>}
      {analysis?.faults.map(({ code, params }) => (
        <p key={code} className="recording-refused">
          {recordingText(i18n, code, params)}{" "}
          {i18n.t("Used all the same: {reason}", {
            reason: accepted.find((one) => one.code === code)?.reason ?? "",
          })}
        </p>
      ))}
      {analysis?.channels.some(({ isAbsolute }) => !isAbsolute) && (
        <p className="recording-word">
          {i18n.t(
            "Without a calibration its levels are relative to full scale: they say how the noise is spread, and not how loud it is.",
          )}
        </p>
      )}
      {isOpen && view.can.change && (
        <div className="review-actions">
          <Button isBusy={cancel.isPending} onClick={() => cancel.mutate({})}>
            {i18n.t("Cancel and discard it")}
          </Button>
          <FormProblem error={cancel.error} />
        </div>
      )}
    </>
  );
}

function Use({
  view,
  onLeave,
  onSaved,
}: {
  view: RecordingView;
  onLeave: () => void;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const task = useQuery(taskQueries.one(view.taskId));
  if (task.error) return <Failed error={task.error} onRetry={() => void task.refetch()} />;
  if (!task.data) return null;
  const { level, levels } = task.data;
  const isShaped = level !== null && level.metric.kind !== "lavg";
  const isAbsolute = view.analysis?.channels.some((one) => one.isAbsolute && !one.isSilent);
  return (
    <Section id="use" title={i18n.t("Use for {task}", { task: view.taskName })}>
      {isAbsolute || isShaped ? (
        <UseForm
          view={view}
          own={level && { levelDb: level.levelDb, isLaeq: isShaped }}
          needsReason={levels.length > 0}
          today={localDate(new Date(), view.timeZone)}
          onLeave={onLeave}
          onSaved={onSaved}
        />
      ) : (
        <p>
          {level
            ? recordingText(i18n, "level-not-laeq", {})
            : recordingText(i18n, "task-has-no-level", {})}
        </p>
      )}
    </Section>
  );
}
