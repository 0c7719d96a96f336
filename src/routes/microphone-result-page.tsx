import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useNavigate, useParams } from "react-router-dom";
import { formatDate, formatInstant } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import { withinSentence } from "../../shared/format/words";
import {
  isKeepable as canBeKept,
  type MicrophoneCheckView,
} from "../../shared/schemas/microphone-check";
import { localDate } from "../../shared/time/zone";
import { Button, ButtonLink } from "../components/button";
import { Failed } from "../components/failed";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { fitQueries } from "../features/fits/queries";
import { CheckResult } from "../features/microphone-check/check-result";
import {
  calibrationWord,
  checkStateWord,
  correctionWord,
  earWord,
  failureText,
} from "../features/microphone-check/check-words";
import { KeepCheckForm } from "../features/microphone-check/keep-form";
import { checkQueries, useCancelCheck, useSwapCheck } from "../features/microphone-check/queries";
import { protectorQueries } from "../features/protectors/queries";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/microphone-check.css";

/** One check: on its way, or what was found at the ear, and whether it is kept as a fit test. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { checkId = "" } = useParams();
  const found = useQuery(checkQueries.one(checkId));
  const [isKeeping, setKeeping] = useState(false);
  const view = found.data;
  const isKeepable =
    view?.can.change &&
    view.state === "analysed" &&
    view.analysis !== null &&
    canBeKept(view.analysis) &&
    !isKeeping;
  return (
    <>
      <PageBody margin={view && <Facts view={view} />}>
        <PageHead
          way={
            view && (
              <>
                <TextLink to={paths.worker(view.workerId)}>{view.workerName}</TextLink>{" "}
                <TextLink to={paths.microphoneCheck(view.workerId)}>
                  {i18n.t("Two-microphone checks")}
                </TextLink>
              </>
            )
          }
          title={
            view
              ? `${view.modelName}, ${withinSentence(earWord(i18n, view.ear), locale)}`
              : i18n.t("Check")
          }
          lead={view && `${checkStateWord(i18n, view.state)}.`}
          actions={
            isKeepable && (
              <Button kind="primary" onClick={() => setKeeping(true)}>
                {i18n.t("Keep as a fit test")}
              </Button>
            )
          }
        />
        {found.isError && <Failed error={found.error} onRetry={() => void found.refetch()} />}
        {view && isKeeping && view.state === "analysed" && (
          <Keep view={view} onLeave={() => setKeeping(false)} />
        )}
        {view && <Course view={view} />}
        {view?.analysis && (
          <Section id="found" title={i18n.t("Found at this ear")}>
            <CheckResult analysis={view.analysis}>
              <Swap view={view} />
            </CheckResult>
          </Section>
        )}
      </PageBody>
      <Folio>
        {view && <TextLink to={paths.worker(view.workerId)}>{view.workerName}</TextLink>}
      </Folio>
    </>
  );
}

function Course({ view }: { view: MicrophoneCheckView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const cancel = useCancelCheck(view.id);
  const { state, failure, workerId, modelId, ear } = view;
  const word = checkStateWord(i18n, state);
  const again = `${paths.microphoneCheck(workerId)}?model=${modelId}&ear=${ear}`;
  if (state === "analysing")
    return (
      <>
        <div className="import-progress">
          <progress max={100} value={view.progressPct} aria-label={word} />
          <Status>{`${word}: ${formatNumber(view.progressPct, 0, locale)} %`}</Status>
        </div>
        {view.can.change && (
          <p>
            <Button isBusy={cancel.isPending} onClick={() => cancel.mutate({})}>
              {i18n.t("Cancel")}
            </Button>
          </p>
        )}
        <FormProblem error={cancel.error} />
      </>
    );
  return (
    <>
      {state === "failed" && failure && (
        <p className="check-caution">{failureText(i18n, failure.code, failure.params, locale)}</p>
      )}
      {state === "cancelled" && <p>{i18n.t("Nothing of these recordings is kept.")}</p>}
      {(state === "failed" || state === "cancelled") && view.can.change && (
        <p className="after-table">
          <ButtonLink to={again}>{i18n.t("Try again")}</ButtonLink>
        </p>
      )}
      {state === "kept" && (
        <p className="check-kept">
          <TextLink to={`${paths.worker(workerId)}#fits`}>
            {i18n.t("It stands among the worker’s fits.")}
          </TextLink>{" "}
          {view.can.change && (
            <TextLink
              to={`${paths.microphoneCheck(workerId)}?model=${modelId}&ear=${ear === "left" ? "right" : "left"}`}
            >
              {i18n.t("Check the other ear")}
            </TextLink>
          )}
        </p>
      )}
    </>
  );
}

function Swap({ view }: { view: MicrophoneCheckView }) {
  const { i18n } = useLingui();
  const swap = useSwapCheck(view.id);
  if (!view.can.change || view.state !== "analysed") return null;
  if (!view.analysis?.warnings.includes("channels-swapped")) return null;
  return (
    <>
      <p className="after-table">
        <Button isBusy={swap.isPending} onClick={() => swap.mutate({})}>
          {i18n.t("They were: take outside for inside")}
        </Button>
      </p>
      <FormProblem error={swap.error} />
    </>
  );
}

function Keep({ view, onLeave }: { view: MicrophoneCheckView; onLeave: () => void }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const navigate = useNavigate();
  const user = useUser();
  const { workerId, modelId, siteId, ear, analysis } = view;
  const isRated = analysis !== null && analysis.parDb !== null;
  const model = useQuery(protectorQueries.one(modelId));
  const desk = useQuery(fitQueries.desk(workerId));
  const tests = useInfiniteQuery(fitQueries.tests({ workerId, modelId }));
  const timeZone = user.sites.find(({ id }) => id === siteId)?.timeZone ?? "UTC";
  const failed = [model, desk, tests].find(({ isError }) => isError);
  if (failed) return <Failed error={failed.error} onRetry={() => void failed.refetch()} />;
  if (!model.data || !desk.data || !tests.data)
    return <p className="loading-line">{i18n.t("Being loaded…")}</p>;
  const others = tests.data.pages
    .flatMap(({ rows }) => rows)
    .filter(
      ({ isVoid, method, facts, parDb }) =>
        !isVoid &&
        method === "two-microphones" &&
        (parDb !== null) === isRated &&
        (facts.bands?.[ear] ?? null) === null &&
        (ear === "left" ? facts.leftDb : facts.rightDb).length === 0,
    )
    .map(({ id, testedOn }) => ({
      value: id,
      testedOn,
      label: i18n.t("the other ear’s test of {date}", { date: formatDate(testedOn, locale) }),
    }));
  return (
    <Section id="keep" title={i18n.t("Keep as a fit test")}>
      <KeepCheckForm
        checkId={view.id}
        today={localDate(new Date(), timeZone)}
        sizes={model.data.data.sizes}
        needDb={desk.data.need.needDb}
        others={others}
        isRated={isRated}
        hasActivePassed={analysis?.active?.hasPassed ?? false}
        onKept={({ workerId: id }) => {
          onLeave();
          void navigate(paths.microphoneResult(id, view.id), { replace: true });
        }}
        onCancel={onLeave}
      />
    </Section>
  );
}

function Facts({ view }: { view: MicrophoneCheckView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const timeZone = user.sites.find(({ id }) => id === view.siteId)?.timeZone ?? "UTC";
  const { analysis, calibration, correction, spectrum } = view;
  const figure = (value: number | null, digits: number, unit: string) =>
    value === null ? i18n.t("not found") : `${formatNumber(value, digits, locale)} ${unit}`;
  return (
    <>
      <MarginNote title={i18n.t("The recordings")} isRuled>
        {view.files.map((name, position) => (
          // biome-ignore lint/suspicious/noArrayIndexKey: two files can have one name, and their order is what they are
          <p key={position}>{name}</p>
        ))}
        {analysis?.parts
          .filter(({ durationS }) => durationS !== null)
          .map((part) => (
            <div key={part.active}>
              {analysis.parts.length > 1 && (
                <p className="beneath">
                  {part.active === "off" ? i18n.t("Active part off") : i18n.t("Active part on")}
                </p>
              )}
              <Leaders
                items={[
                  {
                    key: "length",
                    label: i18n.t("Length"),
                    value: figure(part.durationS, 1, "s"),
                  },
                  {
                    key: "rate",
                    label: i18n.t("Sampling"),
                    value: figure(part.sampleRateHz && part.sampleRateHz / 1000, 1, "kHz"),
                  },
                  {
                    key: "delay",
                    label: i18n.t("Inside behind by"),
                    value: figure(part.delayS === null ? null : part.delayS * 1000, 2, "ms"),
                  },
                ]}
              />
            </div>
          ))}
        <p>
          {[view.authorName, formatInstant(view.createdAt, timeZone, locale)]
            .filter(Boolean)
            .join(", ")}
        </p>
        {view.files.length > 0 && view.state !== "analysing" && (
          <p>{i18n.t("Their sound is deleted.")}</p>
        )}
      </MarginNote>
      <MarginNote title={i18n.t("Calibration")}>
        <p>{calibrationWord(i18n, calibration)}</p>
      </MarginNote>
      <MarginNote title={i18n.t("Correction to the open ear")}>
        <p>{correctionWord(i18n, correction)}</p>
      </MarginNote>
      <MarginNote title={i18n.t("Rated in the noise of")}>
        <p>
          {spectrum ? (
            <TextLink to={paths.task(spectrum.taskId)}>{spectrum.taskName}</TextLink>
          ) : (
            i18n.t("the reference: pink noise")
          )}
        </p>
      </MarginNote>
    </>
  );
}
