import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect } from "react";
import { useLocation, useSearchParams } from "react-router-dom";
import { isTooDeepForOwnFit } from "../../../shared/acoustics/protection/attenuation";
import type { Reason } from "../../../shared/acoustics/types";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import { formatLevel, formatLevelWithUnit } from "../../../shared/format/level";
import { isolate } from "../../../shared/i18n/isolate";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { AtEarView } from "../../../shared/schemas/at-ear";
import type { ProtectorView } from "../../../shared/schemas/protector";
import { Empty } from "../../components/empty";
import { Failed } from "../../components/failed";
import { FilterRow, FilterSelect } from "../../components/filter-row";
import { TextButton, TextLink } from "../../components/link";
import { Section } from "../../components/page";
import { protectorWordText } from "../../components/protector-word";
import { useLocale } from "../../lib/i18n";
import { references } from "../../lib/references";
import { paths } from "../../paths";
import { ActiveInNoise } from "./active-in-noise";
import { DelayGain } from "./delay-gain";
import { methodInItsWay } from "./method-words";
import { AllowanceLine, MethodsTable, SpreadLine } from "./methods-table";
import { NominalDays } from "./nominal-days";
import { firstTask, partnersOf, worn } from "./pairs";
import { Programme } from "./programme";
import { atEarQueries } from "./queries";
import "../../styles/at-ear.css";

/** As in an address that leads here. */
const SECTION = "at-ear";

/** A protector in a task's noise: by every method, with its active part, with a programme, over the nominal day. */
export function AtEar({
  protector,
  sites,
}: {
  protector: Pick<ProtectorView, "id" | "kind">;
  sites: readonly { readonly id: string; readonly name: string }[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [search, setSearch] = useSearchParams();
  const { hash } = useLocation();
  useEffect(() => {
    if (hash === `#${SECTION}`) document.getElementById(SECTION)?.scrollIntoView();
  }, [hash]);
  const tasks = useQuery(references.everyTask());
  const register = useQuery(references.protectors());
  const offered = (tasks.data?.rows ?? []).filter(
    ({ id, isArchived, level }) => id === search.get("task") || (!isArchived && level !== null),
  );
  const taskId = search.get("task") ?? firstTask(offered)?.id ?? "";
  const partners = partnersOf(protector, register.data?.rows ?? []);
  const partnerId = partners.find(({ id }) => id === search.get("with"))?.id;
  const workerId = search.get("worker") ?? undefined;
  // A pair is asked for once it is known which of the two lies inside.
  const isReady = !search.has("with") || register.data !== undefined;
  const asked = { ...worn(protector, partnerId), taskId: isReady ? taskId : "", workerId };
  const { data, error, isPlaceholderData, refetch } = useQuery(atEarQueries.one(asked));
  const put = (name: string, value: string | null) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === null || value === "") next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true, preventScrollReset: true },
    );
  const view = error ? undefined : data;
  const whyNone = view ? reasonOfAll(view) : null;
  return (
    <Section title={i18n.t("At the ear, method by method")} id={SECTION}>
      {tasks.data && offered.length === 0 ? (
        <Empty title={i18n.t("No task has a level yet.")}>
          {i18n.t("What a protector leaves depends on the noise.")}{" "}
          <TextLink to={paths.tasks}>{i18n.t("Tasks")}</TextLink>
        </Empty>
      ) : (
        <>
          <FilterRow label={i18n.t("In which noise")}>
            <FilterSelect
              label={i18n.t("Task")}
              value={taskId}
              choices={offered.map(({ id, name, level, siteId }) => ({
                value: id,
                label: [
                  name,
                  level ? `${formatLevel(level.levelDb, locale)} dB(A)` : i18n.t("no level yet"),
                  sites.length > 1 && sites.find((site) => site.id === siteId)?.name,
                ]
                  .filter(Boolean)
                  .join(", "),
              }))}
              onChange={(value) => put("task", value)}
            />
            {partners.length > 0 && (
              <FilterSelect
                label={i18n.t("Worn together with")}
                value={partnerId ?? ""}
                choices={[
                  { value: "", label: i18n.t("nothing else") },
                  ...partners.map(({ id, name }) => ({ value: id, label: name })),
                ]}
                onChange={(value) => put("with", value)}
              />
            )}
          </FilterRow>
          {view && <Lead view={view} onLeaveWorker={() => put("worker", null)} />}
          {error && workerId !== undefined && (
            <p className="spread-line">
              <TextButton onClick={() => put("worker", null)}>
                {i18n.t("Look at it without the worker")}
              </TextButton>
            </p>
          )}
          {view?.level === null ? (
            <Empty title={i18n.t("Not assessed: this task has no level yet.")}>
              <TextLink to={paths.task(view.task.id)}>{i18n.t("Enter its level")}</TextLink>
            </Empty>
          ) : whyNone ? (
            <Empty title={i18n.t("Not assessed by any method.")}>
              {i18n.t("Why: {reason}.", { reason: reasonText(i18n, whyNone) })}
            </Empty>
          ) : (
            <div aria-busy={isPlaceholderData || undefined}>
              <MethodsTable
                view={view}
                state={error ? "failed" : view ? "ready" : "loading"}
                error={error}
                onRetry={() => void refetch()}
              />
              {view && <SpreadLine view={view} />}
              {view && <AllowanceLine view={view} />}
            </div>
          )}
          {tasks.error && <Failed error={tasks.error} onRetry={() => void tasks.refetch()} />}
        </>
      )}
      {view && <Further key={`${asked.innerId} ${view.worker?.id}`} view={view} />}
    </Section>
  );
}

/** The one reason for which no method says anything: a table would only repeat it. An own fit's absence is no reason. */
function reasonOfAll({ methods }: AtEarView): Reason | null {
  if (methods.some(({ atEarDb }) => atEarDb !== null)) return null;
  const reasons = new Set(
    methods.flatMap(({ method, reason }) => (method === "own-fit" ? [] : [reason])),
  );
  const [only = null] = reasons;
  return reasons.size === 1 ? asReason(only) : null;
}

/** What the methods are asked about, and what the one that governs says. */
function Lead({ view, onLeaveWorker }: { view: AtEarView; onLeaveWorker: () => void }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { level, inner, outer, worker, whileWorn } = view;
  const governing = view.methods.find(({ governs }) => governs);
  const ruleSet = ruleSetVersion(view.ruleSetKey, view.ruleSetVersion);
  return (
    <p className="at-ear-lead">
      {outer && i18n.t("{inner} under {outer}.", { inner: inner.name, outer: outer.name })}{" "}
      {level &&
        i18n.t("Outside {level} dB(A), LC − LA {difference}.", {
          level: formatLevel(level.levelDb, locale),
          difference: formatLevelWithUnit(level.lcMinusLaDb, locale),
        })}{" "}
      {governing && whileWorn.offDb !== null && (
        <b>
          {whileWorn.word
            ? i18n.t("{method} governs: {level} dB(A) at the ear, {word}.", {
                method: methodInItsWay(i18n, governing),
                level: formatLevel(whileWorn.offDb, locale),
                word: protectorWordText(i18n, whileWorn.word),
              })
            : i18n.t("{method} governs: {level} dB(A) at the ear.", {
                method: methodInItsWay(i18n, governing),
                level: formatLevel(whileWorn.offDb, locale),
              })}
        </b>
      )}{" "}
      {whileWorn.mostDb !== null && (
        <b>
          {i18n.t(
            "The task’s level is an average that left something out: at the ear it can be as much as {most}.",
            { most: formatLevel(whileWorn.mostDb, locale) },
          )}
        </b>
      )}{" "}
      {ruleSet &&
        i18n.t("{site}: {rules}.", { site: view.task.siteName, rules: i18n._(ruleSet.title) })}
      {worker && (
        <>
          {" "}
          {worker.ownFitDb === null
            ? i18n.t("For {name}: no own fit counts.", { name: isolate(worker.name) })
            : worker.labelLess7Db === null
              ? i18n.t("For {name}, own fit {fit} dB.", {
                  name: isolate(worker.name),
                  fit: formatLevel(worker.ownFitDb, locale),
                })
              : i18n.t("For {name}, own fit {fit} dB; by the label, rating − 7: {less7} dB.", {
                  name: isolate(worker.name),
                  fit: formatLevel(worker.ownFitDb, locale),
                  less7: formatLevel(worker.labelLess7Db, locale),
                })}{" "}
          {worker.ownFitDb !== null &&
            ruleSet &&
            isTooDeepForOwnFit(ruleSet.protection, level?.lcMinusLaDb ?? null) &&
            i18n.t("In so deep a noise it can only lower the label.")}{" "}
          <TextButton onClick={onLeaveWorker}>{i18n.t("Without the worker")}</TextButton>
        </>
      )}
    </p>
  );
}

function Further({ view }: { view: AtEarView }) {
  const { i18n } = useLingui();
  const active = view.outer === null ? view.inner.active : null;
  return (
    <>
      {active && (
        <>
          <h3 className="at-ear-head" id="active-in-noise">
            {i18n.t("The active part in this noise")}
          </h3>
          <ActiveInNoise view={view} active={active} />
          <h3 className="at-ear-head" id="delay-gain">
            {i18n.t("Try delay and gain")}
          </h3>
          <DelayGain key={view.inner.modelId} view={view} active={active} />
        </>
      )}
      <h3 className="at-ear-head" id="programme">
        {i18n.t("A programme under it")}
      </h3>
      <Programme view={view} />
      <h3 className="at-ear-head" id="nominal-days">
        {i18n.t("Over the nominal day")}
      </h3>
      <NominalDays view={view} />
    </>
  );
}
