import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams, useSearchParams } from "react-router-dom";
import type { OctaveBandValues } from "../../shared/acoustics/types";
import { formatDate, formatInstant, formatShortDate } from "../../shared/format/date";
import { formatLevel, formatLevelWithUnit } from "../../shared/format/level";
import { formatNumber } from "../../shared/format/number";
import {
  gearWords,
  gradeWord,
  instrumentClassWord,
  metricWord,
  settingsWords,
  zoneWord,
} from "../../shared/words/register-words";
import { Button, ButtonLink } from "../components/button";
import { RecomputeProgress } from "../components/change-preview";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextButton, TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { areaQueries } from "../features/areas/queries";
import { impulseTypeWord } from "../features/tasks/impulse-words";
import { LevelForm } from "../features/tasks/level-form";
import { LevelSource, SurveyOfLevel } from "../features/tasks/level-source";
import { taskQueries } from "../features/tasks/queries";
import { Spectrum } from "../features/tasks/spectrum";
import { SpectrumSource } from "../features/tasks/spectrum-source";
import { TaskHeadForm } from "../features/tasks/task-head-form";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { RuleWays } from "./register-frame";
import { useSiteChoice } from "./site-choice";

/** One task: its noise in force, all its levels with source and reason, and their correction. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const [search, setSearch] = useSearchParams();
  const choice = useSiteChoice();
  const [isChanged, setIsChanged] = useState(false);
  const { data: task, error, refetch } = useQuery(taskQueries.one(id));
  const areas = useQuery(areaQueries.list());
  if (!task)
    return (
      <PageBody>
        <PageHead way={<RuleWays />} title={error ? i18n.t("Task") : " "} />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const { level, can } = task;
  const editing = can.change ? search.get("edit") : null;
  const corrected = task.levels.find((found) => found.id === search.get("level")) ?? null;
  const open = (edit: string, levelId?: string) =>
    setSearch(levelId ? { edit, level: levelId } : { edit }, { preventScrollReset: false });
  const close = () => setSearch({});
  const timeZone = choice.sites.find((site) => site.id === task.siteId)?.timeZone ?? "UTC";
  const siteName = choice.siteName(task.siteId);
  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("In force")} isRuled>
              {level ? (
                <Leaders
                  items={[
                    {
                      key: "level",
                      label: i18n.t("Level"),
                      value: `${formatLevel(level.levelDb, locale)} dB(A)`,
                    },
                    {
                      key: "lc",
                      label: i18n.t("LC − LA"),
                      value: formatLevelWithUnit(level.lcMinusLaDb, locale),
                    },
                    {
                      key: "max",
                      label: i18n.t("LASmax"),
                      value: formatLevelWithUnit(level.lasMaxDb, locale),
                    },
                    {
                      key: "peak",
                      label: level.peak
                        ? i18n.t("Peak, {weighting}", { weighting: level.peak.weighting })
                        : i18n.t("Peak"),
                      value: formatLevelWithUnit(level.peak?.levelDb ?? null, locale),
                    },
                    { key: "samples", label: i18n.t("Samples"), value: level.samplesDb.length },
                  ]}
                />
              ) : (
                <p className="not-assessed">{i18n.t("no level yet")}</p>
              )}
            </MarginNote>
            {level && (level.impulseType !== null || level.peak !== null) && (
              <MarginNote title={i18n.t("Kind of impulse")}>
                <p className={level.impulseType === null ? "not-assessed" : undefined}>
                  {level.impulseType === null
                    ? i18n.t("not stated: a peak at the ear is not assessed")
                    : impulseTypeWord(i18n, level.impulseType)}
                </p>
              </MarginNote>
            )}
            {level?.surveyId && (
              <MarginNote title={i18n.t("Where it comes from")}>
                <LevelSource level={level} />
              </MarginNote>
            )}
            <MarginNote title={i18n.t("Area")}>
              <p>{task.areaName ?? i18n.t("None")}</p>
              <p>{zoneWord(i18n, task.zone)}</p>
            </MarginNote>
            <MarginNote title={i18n.t("Asked for beside a protector")}>
              <p>{gearWords(i18n, task.requiredGear) ?? i18n.t("None")}</p>
            </MarginNote>
            <MarginNote title={i18n.t("Rest on it")}>
              <p>
                {i18n.t(
                  "{count, plural, =0 {no shift yet} one {# shift} other {{figure} shifts}}",
                  {
                    count: task.shiftsCount,
                    figure: formatNumber(task.shiftsCount, 0, locale),
                  },
                )}
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={<RuleWays />}
          title={task.name}
          lead={
            level
              ? i18n.t("{level} dB(A), {metric}, {grade}, since {date}. {site}", {
                  level: formatLevel(level.levelDb, locale),
                  metric: metricWord(i18n, level.metric),
                  grade: gradeWord(i18n, level.grade),
                  date: formatDate(level.effectiveFrom, locale),
                  site: siteName,
                })
              : i18n.t("Its noise is not known yet: days with it are not assessed. {site}", {
                  site: siteName,
                })
          }
          actions={
            can.change &&
            editing === null && (
              <>
                <Button kind="primary" onClick={() => open("level")}>
                  {i18n.t("New level")}
                </Button>
                <Button onClick={() => open("name")}>{i18n.t("Rename, move or archive")}</Button>
                {level && (
                  <ButtonLink to={paths.chooseFor(id)}>{i18n.t("Choose a protector")}</ButtonLink>
                )}
              </>
            )
          }
        />
        {isChanged && <RecomputeProgress />}
        {editing === "name" && (
          <Section title={i18n.t("Name and area")} id="task-head">
            <TaskHeadForm
              task={task}
              siteId={task.siteId}
              sites={[]}
              areasOf={(siteId) =>
                (areas.data?.rows ?? [])
                  .filter(
                    (area) =>
                      area.siteId === siteId && (!area.isArchived || area.id === task.areaId),
                  )
                  .map((area) => ({ value: area.id, label: area.name }))
              }
              onSaved={close}
              onLeave={close}
            />
          </Section>
        )}
        {editing === "level" && (
          <Section
            title={
              corrected
                ? i18n.t("Correction of the level from {date} on", {
                    date: formatDate(corrected.effectiveFrom, locale),
                  })
                : i18n.t("New level from a date on")
            }
            id="level-form"
          >
            <LevelForm
              key={corrected?.id ?? "new"}
              task={task}
              from={corrected ?? level}
              effectiveFrom={corrected?.effectiveFrom ?? choice.todayAt(task.siteId)}
              onLeave={close}
              onSaved={() => {
                setIsChanged(true);
                close();
              }}
            />
          </Section>
        )}
        {level && (
          <Section title={i18n.t("Spectrum in force")} id="spectrum">
            {level.octaveBandsDb ? (
              <>
                <Spectrum octaveBandsDb={level.octaveBandsDb as OctaveBandValues} />
                <SpectrumSource level={level} />
              </>
            ) : (
              <Empty title={i18n.t("No octave bands were measured.")}>
                {i18n.t(
                  "Without them a protector is judged by its single numbers, and an active part gets no credit.",
                )}
              </Empty>
            )}
          </Section>
        )}
        {can.change && (
          <p>
            <TextLink to={`${paths.recordings}?task=${task.id}&site=${task.siteId}`}>
              {i18n.t("Send a recording of this task in")}
            </TextLink>
          </p>
        )}
        <Section title={i18n.t("All levels")} id="levels">
          <DataTable
            caption={i18n.t("All levels of this task")}
            rows={task.levels}
            rowKey={(found) => found.id}
            isSelected={(found) => found.id === level?.id}
            isTwoLine
            empty={<Empty title={i18n.t("No level yet.")} />}
            columns={[
              {
                id: "from",
                head: i18n.t("Holds from"),
                isRowHead: true,
                cell: (found) => (
                  <span className="two-lines">
                    {formatShortDate(found.effectiveFrom, locale)}
                    <span className="beneath">
                      {found.id === level?.id
                        ? i18n.t("in force")
                        : task.levels.some(
                              (other) =>
                                other.effectiveFrom === found.effectiveFrom &&
                                other.number > found.number,
                            )
                          ? i18n.t("corrected")
                          : ""}
                    </span>
                  </span>
                ),
              },
              {
                id: "level",
                head: i18n.t("Level"),
                unit: "dB(A)",
                kind: "figure",
                cell: (found) => formatLevel(found.levelDb, locale),
              },
              {
                id: "metric",
                head: i18n.t("Metric and grade"),
                cell: (found) => (
                  <span className="two-lines">
                    {metricWord(i18n, found.metric)}
                    <span className="beneath">
                      {[
                        gradeWord(i18n, found.grade),
                        found.metric.kind === "lavg"
                          ? settingsWords(i18n, found.metric.settings, locale)
                          : null,
                        found.instrument ? instrumentClassWord(i18n, found.instrument) : null,
                      ]
                        .filter(Boolean)
                        .join("; ")}
                    </span>
                  </span>
                ),
              },
              {
                id: "why",
                head: i18n.t("Where it comes from, and why"),
                cell: (found) => (
                  <span className="two-lines">
                    {[found.sourceNote || null, found.reason].filter(Boolean).join(". ") ||
                      i18n.t("first level")}
                    {found.surveyId && <SurveyOfLevel level={found} />}
                    {found.recordingId && (
                      <TextLink to={paths.recording(found.recordingId)}>
                        {found.recordingName}
                      </TextLink>
                    )}
                    {found.keptReasons.map((reason) => (
                      <b key={reason}>{i18n.t("kept: {reason}", { reason })}</b>
                    ))}
                    <span className="beneath">
                      {[found.authorName, formatInstant(found.createdAt, timeZone, locale)]
                        .filter(Boolean)
                        .join(", ")}
                    </span>
                  </span>
                ),
              },
              ...(can.change
                ? [
                    {
                      id: "correct",
                      head: <span className="sr-only">{i18n.t("What can be done")}</span>,
                      kind: "right" as const,
                      cell: (found: (typeof task.levels)[number]) => (
                        <TextButton
                          aria-label={i18n.t("Correct the level from {date} on", {
                            date: formatDate(found.effectiveFrom, locale),
                          })}
                          onClick={() => open("level", found.id)}
                        >
                          {i18n.t("Correct")}
                        </TextButton>
                      ),
                    },
                  ]
                : []),
            ]}
          />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "A correction is a new revision with its reason; nothing is overwritten. {count} shifts rest on this task.",
          {
            count: formatNumber(task.shiftsCount, 0, locale),
          },
        )}
      </Folio>
    </>
  );
}
