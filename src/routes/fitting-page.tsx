import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import { useNavigate, useParams } from "react-router-dom";
import { barToIssue, barToTrial } from "../../shared/acoustics/protection/barred";
import { earNotTried, hasToPass } from "../../shared/acoustics/protection/fit-rating";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { FitTestView, FittingDesk } from "../../shared/schemas/fit";
import { localDate } from "../../shared/time/zone";
import { barWord } from "../../shared/words/register-words";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { SlipsLink } from "../components/slips-link";
import { Status } from "../components/status";
import { CandidatesTable } from "../features/fits/candidates-table";
import { FitForm, type FitFormHandle } from "../features/fits/fit-form";
import { FitTestsTable } from "../features/fits/fit-tests-table";
import { needReasonText } from "../features/fits/fit-words";
import { IssueForm, type ToIssue } from "../features/fits/issue-form";
import { IssuesTable } from "../features/fits/issues-table";
import { NumberForm, type NumberFormHandle } from "../features/fits/number-form";
import { fitQueries } from "../features/fits/queries";
import { Refusals } from "../features/fits/refusals";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { references } from "../lib/references";
import { paths } from "../paths";
import { ProtectorWays } from "./protector-frame";
import "../styles/candidates.css";
import "../styles/findings.css";
import "../styles/fits.css";
import "../styles/worker.css";

/** The fitting desk: from the number of whoever stands there to the device that goes out, and on to the next. */
export function Component() {
  const { i18n } = useLingui();
  const { workerId } = useParams();
  const navigate = useNavigate();
  const number = useRef<NumberFormHandle>(null);
  const [said, setSaid] = useState<string | null>(null);
  const desk = useQuery({ ...fitQueries.desk(workerId ?? ""), enabled: workerId !== undefined });
  const governing = desk.data && ruleSetVersion(desk.data.ruleSetKey, desk.data.ruleSetVersion);
  return (
    <>
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Fit and issue")}
          lead={i18n.t("Who is it, what takes enough off on this worker, and that goes out.")}
        />
        <NumberForm
          ref={number}
          onFound={(id) => {
            setSaid(null);
            void navigate(paths.fittingOf(id));
          }}
          onNobody={() => {
            setSaid(null);
            if (workerId !== undefined) void navigate(paths.fitting);
          }}
        />
        <p className="desk-said">
          <Status>{said}</Status>
        </p>
        {workerId === undefined ? null : desk.error && !desk.data ? (
          <Failed error={desk.error} onRetry={() => void desk.refetch()} />
        ) : desk.data ? (
          <AtDesk
            key={desk.data.worker.id}
            desk={desk.data}
            onSaid={setSaid}
            onIssued={(sentence) => {
              setSaid(sentence);
              void navigate(paths.fitting);
              number.current?.next();
            }}
          />
        ) : (
          <span className="loading-line" />
        )}
      </PageBody>
      <Folio>
        {governing &&
          i18n.t("{title}, rule set version {version}.", {
            title: i18n._(governing.title),
            version: governing.version,
          })}
      </Folio>
    </>
  );
}

function AtDesk({
  desk,
  onSaid,
  onIssued,
}: {
  desk: FittingDesk;
  /** What stands beside the number, for whoever looks up. */
  onSaid: (sentence: string | null) => void;
  onIssued: (sentence: string) => void;
}) {
  const { i18n } = useLingui();
  const user = useUser();
  const { worker, can } = desk;
  const navigate = useNavigate();
  const timeZone = user.sites.find(({ id }) => id === worker.siteId)?.timeZone ?? "UTC";
  const today = localDate(new Date(), timeZone);
  const form = useRef<FitFormHandle>(null);
  const issueAt = useRef<HTMLDivElement>(null);
  const [chosenId, setChosenId] = useState(
    desk.candidates.find((candidate) => barToTrial(candidate) === null)?.modelId ?? "",
  );
  const barOf = (modelId: string) => {
    const candidate = desk.candidates.find((one) => one.modelId === modelId);
    return candidate ? barToIssue(candidate, desk.candidates) : null;
  };
  const chosen = desk.candidates.find(({ modelId }) => modelId === chosenId);
  const chosenBar = barOf(chosenId);
  // A device that failed goes out from its own row, where what it falls short by is named.
  const chosenHasFailed = chosen?.lastFit?.hasPassed === false;
  const isOut = ({ modelId, size }: FitTestView) =>
    desk.issued.some(
      (one) => one.modelId === modelId && (one.size === null || size === null || one.size === size),
    );
  const activeCredit = { siteCredits: desk.creditsActivePart, checkedOf: () => null };
  const [toIssue, setToIssue] = useState<ToIssue | null>(null);
  const protectors = useQuery(references.protectors());
  const issues = useInfiniteQuery(fitQueries.issues({ workerId: worker.id, state: "open" }));
  // Why may be a medical reason: whoever hands devices out is an officer, and reads it.
  const refusals = useQuery({ ...fitQueries.refusals(worker.id), enabled: can.issue });
  const sizes = useMemo(
    () => new Map(protectors.data?.rows.map(({ id, data }) => [id, data.sizes] as const)),
    [protectors.data],
  );
  const sizesOf = useCallback((modelId: string) => sizes.get(modelId) ?? [], [sizes]);

  const isIssuing = toIssue !== null && can.issue && barOf(toIssue.modelId) === null;
  // biome-ignore lint/correctness/useExhaustiveDependencies: another device to issue is another form
  useEffect(() => {
    if (isIssuing) issueAt.current?.querySelector<HTMLElement>("select, input, textarea")?.focus();
  }, [isIssuing, toIssue]);

  return (
    <div className="desk">
      <h2 className="desk-who">
        <TextLink className="is-quiet" to={paths.worker(worker.id)}>
          {worker.name}
        </TextLink>{" "}
        <span className="beneath">
          {[worker.employeeNumber, worker.jobName, worker.siteName].filter(Boolean).join(", ")}
        </span>
      </h2>
      <Need desk={desk} />
      <Unwearable desk={desk} today={today} />
      <div className="desk-try">
        {can.test && (
          <Section title={i18n.t("Test the fit")} id="fit">
            <FitForm
              ref={form}
              desk={desk}
              today={today}
              sizesOf={sizesOf}
              onChoose={setChosenId}
              onRecorded={(fit) => {
                const hasFailed = fit.hasPassed === false;
                setToIssue(hasFailed ? null : { modelId: fit.modelId, size: fit.size, fit });
                onSaid(null);
              }}
            />
            <p className="after-table">
              <TextLink
                to={`${paths.microphoneCheck(worker.id)}${chosenId === "" ? "" : `?model=${chosenId}`}`}
              >
                {i18n.t("Check with two microphones")}
              </TextLink>
            </p>
          </Section>
        )}
        <Section title={i18n.t("What suits this noise")} id="candidates">
          <CandidatesTable
            caption={i18n.t("Devices in the order in which they suit this noise")}
            inHead={i18n.t("To be tried")}
            candidates={desk.candidates}
            refusals={refusals.data}
            activeCredit={activeCredit}
            foldsOnPhone
            chosen={chosenId}
            pickWord={i18n.t("Try")}
            pickLabel={(protector) => i18n.t("Try {protector}", { protector })}
            onPick={({ modelId }) => form.current?.choose(modelId)}
          />
          {desk.pairs.length > 0 && (
            <>
              <h3 className="desk-pairs">
                {i18n.t("Each of them leaves too little: two together")}
              </h3>
              <CandidatesTable
                caption={i18n.t("Two together, in the order in which they suit this noise")}
                inHead={i18n.t("A plug under a muff")}
                candidates={desk.pairs}
                refusals={refusals.data}
                activeCredit={activeCredit}
                chosen=""
                hasOwnFit={false}
                pickWord={can.issue ? i18n.t("Assign") : undefined}
                pickLabel={(pair) => i18n.t("Assign {protector}", { protector: pair })}
                onPick={({ modelId, outerModelId }) =>
                  void navigate(
                    paths.assign(worker.id, {
                      modelIds: outerModelId ? [modelId, outerModelId] : [modelId],
                      taskIds: [],
                    }),
                  )
                }
              />
              {can.issue && (
                <p className="beneath">
                  {i18n.t(
                    "Two are assigned together on the worker’s page; each is tried and handed out here by itself.",
                  )}
                </p>
              )}
            </>
          )}
        </Section>
      </div>
      {isIssuing && (
        <Section
          title={i18n.t("Issue {protector}", {
            protector: [
              desk.candidates.find(({ modelId }) => modelId === toIssue.modelId)?.name ?? "",
              toIssue.size !== null && i18n.t("size {size}", { size: toIssue.size }),
            ]
              .filter(Boolean)
              .join(", "),
          })}
          id="issue"
        >
          <OnWhichFit device={toIssue} />
          <div ref={issueAt}>
            <IssueForm
              key={`${toIssue.modelId} ${toIssue.fit?.id ?? ""}`}
              desk={desk}
              device={toIssue}
              today={today}
              onIssued={(issue, stockLeft) => {
                const device = [
                  issue.modelName,
                  issue.size !== null && i18n.t("size {size}", { size: issue.size }),
                ]
                  .filter(Boolean)
                  .join(", ");
                onIssued(
                  [
                    stockLeft === null
                      ? i18n.t("{device} is issued to {name}.", { device, name: issue.workerName })
                      : i18n.t("{device} is issued to {name}; {stock} left in stock.", {
                          device,
                          name: issue.workerName,
                          stock: stockLeft,
                        }),
                    issue.replacedName !== null &&
                      i18n.t("It replaces {protector}, {use}.", {
                        protector: issue.replacedName,
                        use: issue.useName ?? i18n.t("everywhere in noise"),
                      }),
                  ]
                    .filter(Boolean)
                    .join(" "),
                );
              }}
              onLeave={() => setToIssue(null)}
            />
          </div>
        </Section>
      )}
      <Section title={i18n.t("Tried and tested")} id="tests">
        <FitTestsTable
          hidesWorker
          rows={desk.tests}
          isSelected={({ id }) => id === toIssue?.fit?.id}
          actions={
            can.issue
              ? (fit) =>
                  !fit.isVoid &&
                  fit.parDb !== null &&
                  barOf(fit.modelId) === null && (
                    <TextButton
                      aria-label={
                        isOut(fit)
                          ? i18n.t("Issue another {protector}", { protector: fit.modelName })
                          : i18n.t("Issue {protector}", { protector: fit.modelName })
                      }
                      onClick={() => setToIssue({ modelId: fit.modelId, size: fit.size, fit })}
                    >
                      {isOut(fit) ? i18n.t("Issue another") : i18n.t("Issue this")}
                    </TextButton>
                  )
              : undefined
          }
          empty={<Empty title={i18n.t("Nothing was tested on this worker yet.")} />}
        />
        {can.issue && chosen && !toIssue && (
          <p className="after-table">
            {chosenBar !== null ? (
              `${chosen.name} ${barWord(i18n, chosenBar)}.`
            ) : chosenHasFailed ? (
              i18n.t("{protector} did not fit this worker when it was last tested.", {
                protector: chosen.name,
              })
            ) : (
              <Button onClick={() => setToIssue({ modelId: chosenId, size: null, fit: null })}>
                {i18n.t("Issue {protector} without a test", { protector: chosen.name })}
              </Button>
            )}
          </p>
        )}
      </Section>
      <Section title={i18n.t("With the worker now")} id="issued">
        <IssuesTable
          hidesWorker
          today={today}
          rows={issues.data?.pages.flatMap((page) => page.rows) ?? []}
          state={issues.isError ? "failed" : issues.data ? "ready" : "loading"}
          error={issues.error}
          onRetry={() => void issues.refetch()}
          empty={<Empty title={i18n.t("Nothing that was handed out is with this worker.")} />}
        />
        {desk.issued.length > 0 && (
          <p className="after-table">
            <SlipsLink workerIds={[worker.id]} />
          </p>
        )}
      </Section>
      {can.issue && (
        <Section title={i18n.t("Refusals and non-wear")} id="refusals">
          <Refusals workerId={worker.id} today={today} />
        </Section>
      )}
    </div>
  );
}

/** A fit that does not reach the need goes out only if somebody sees it. */
function OnWhichFit({ device: { fit } }: { device: ToIssue }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (!fit) return <p>{i18n.t("Without a fit test.")}</p>;
  const values = {
    par: formatLevel(fit.parDb, locale),
    need: formatLevel(fit.needDb, locale),
  };
  if (fit.needDb !== null && !hasToPass(fit.needDb))
    return (
      <p>{i18n.t("PAR {par} dB; nothing has to come off, so there is nothing to pass.", values)}</p>
    );
  const notTried = earNotTried(fit);
  if (fit.hasPassed === null && fit.needDb !== null && notTried !== null)
    return (
      <p>
        {notTried === "left"
          ? i18n.t(
              "PAR {par} dB at the right ear, {need} needed: not assessed while the left one is not measured.",
              values,
            )
          : i18n.t(
              "PAR {par} dB at the left ear, {need} needed: not assessed while the right one is not measured.",
              values,
            )}
      </p>
    );
  if (fit.hasPassed === null)
    return <p>{i18n.t("PAR {par} dB; what is needed is not known.", values)}</p>;
  return fit.hasPassed ? (
    <p>{i18n.t("PAR {par} dB, {need} needed: it fits.", values)}</p>
  ) : (
    <p>
      <b className="reversed">{i18n.t("Does not fit")}</b>{" "}
      {i18n.t("PAR {par} dB, {need} needed. Fit it anew, or try another.", values)}
    </p>
  );
}

/** What is assigned and was since said to be no good on this worker: nothing else asks for another. */
function Unwearable({ desk, today }: { desk: FittingDesk; today: string }) {
  const { i18n } = useLingui();
  const isBarred = (modelId: string | null) =>
    desk.candidates.find((one) => one.modelId === modelId)?.excludedBy?.code === "cannot-wear";
  return desk.assigned
    .filter(({ toDate }) => toDate === null || toDate >= today)
    .filter(({ innerModelId, outerModelId }) => isBarred(innerModelId) || isBarred(outerModelId))
    .map(({ name, taskId, areaId, fromDate }) => (
      <p key={`${name} ${taskId} ${areaId} ${fromDate}`} className="desk-unwearable">
        {i18n.t("{protector} is assigned to this worker, who cannot wear it. Issue another.", {
          protector: name,
        })}
      </p>
    ));
}

function Need({ desk: { need, worker } }: { desk: FittingDesk }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { needDb, outsideDb, targetDb, mostDb, taskName, reason } = need;
  const atMost = need.isUpperBound ? "upper" : "exact";
  const why = needReasonText(i18n, reason);
  return (
    <div className="desk-need">
      {needDb === null || outsideDb === null || targetDb === null ? (
        <p className="lead">{i18n.t("What this worker needs is not known.")}</p>
      ) : (
        <p className="lead">
          {hasToPass(needDb) ? (
            <b>
              {i18n.t("{need} dB have to come off.", {
                need: formatLevel(needDb, locale, atMost),
              })}
            </b>
          ) : (
            <b>{i18n.t("Nothing has to come off.")}</b>
          )}{" "}
          {taskName === null
            ? i18n.t("The shift has {outside} dB(A), and {target} may reach the ear.", {
                outside: formatLevel(outsideDb, locale, atMost),
                target: formatLimit(targetDb, locale),
              })
            : i18n.t("{task} has {outside} dB(A), and {target} may reach the ear.", {
                task: taskName,
                outside: formatLevel(outsideDb, locale),
                target: formatLimit(targetDb, locale),
              })}{" "}
          {mostDb !== null &&
            i18n.t("More than {most} would be too much.", { most: formatLevel(mostDb, locale) })}
        </p>
      )}
      {why && <p className="beneath">{why}</p>}
      {need.isTooDeepForOwnFit && (
        <p className="beneath">
          {i18n.t(
            "So deep a noise comes through more than a fit says, which is rated in pink noise: there it can only lower the label. A check with two microphones can be rated in this very noise.",
          )}
        </p>
      )}
      {worker.personalTargetDb !== null && (
        <p className="beneath">{i18n.t("A stricter target is set for this worker.")}</p>
      )}
    </div>
  );
}
