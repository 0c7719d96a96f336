import { useLingui } from "@lingui/react";
import { type ReactNode, useState } from "react";
import { findingStateWord, findingWord } from "../../../shared/findings/words";
import { formatDate, formatInstant, formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { withinSentence } from "../../../shared/format/words";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { DrawnRecord, DrawView } from "../../../shared/schemas/draw";
import { fieldCheckDriftDb, isWithinTolerance } from "../../../shared/schemas/run-doubts";
import { letterStateWord } from "../../../shared/words/letter-words";
import { toldWord } from "../../../shared/words/told-word";
import { AtEarFigure, OutsideFigure } from "../../components/day-figures";
import { TextButton, TextLink } from "../../components/link";
import { Section } from "../../components/page";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { paths } from "../../paths";
import { markWord } from "./draw-words";
import { MarkForm } from "./mark-form";

/** One drawn record from what it rests on to what came of it, and its mark. */
export function DrawnRecordLine({ draw, record }: { draw: DrawView; record: DrawnRecord }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [isMarking, setIsMarking] = useState(false);
  const [place, moveFocus] = useMoveFocus<HTMLElement>();
  const { figures, mark, position, worker } = record;
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const mayMark = draw.can.mark && draw.signed === null;
  return (
    <Section
      id={`record-${position}`}
      title={
        <>
          {position}. <bdi>{worker.name}</bdi> {worker.employeeNumber},{" "}
          {formatDate(figures.date, locale)}
        </>
      }
    >
      <dl className="record-line">
        <dt>{i18n.t("Run or level")}</dt>
        <dd>
          <Lines none={i18n.t("None: it rests on the levels of tasks.")}>
            {[
              ...record.runs.map((run) => (
                <TextLink key={run.id} to={paths.run(run.id)}>
                  {i18n.t("{date}, {instrument}, {duration}", {
                    date: formatShortDate(run.date, locale),
                    instrument: run.instrumentName,
                    duration: formatDuration(run.durationMin, locale),
                  })}
                </TextLink>
              )),
              ...record.levels.map((level) => (
                <TextLink key={`${level.taskId} ${level.from}`} to={paths.task(level.taskId)}>
                  {i18n.t("Level of {task} from {date}", {
                    task: level.taskName,
                    date: formatShortDate(level.from, locale),
                  })}
                </TextLink>
              )),
            ]}
          </Lines>
        </dd>
        <dt>{i18n.t("Field check")}</dt>
        <dd>
          <Lines none={i18n.t("Without a run there is none.")}>
            {record.runs.map((run) => (
              <FieldCheck key={run.id} run={run} />
            ))}
          </Lines>
        </dd>
        <dt>{i18n.t("Computation")}</dt>
        <dd>
          <TextLink to={paths.storedResult(figures.resultId)}>
            {i18n.t("{rules}, version {version}; method version {method}; {at}", {
              rules: ruleSet ? i18n._(ruleSet.title) : figures.ruleSetKey,
              version: figures.ruleSetVersion,
              method: record.methodVersion,
              at: formatInstant(record.computedAt, draw.timeZone, locale),
            })}
          </TextLink>
          {!record.isCurrent && (
            <p>
              <b>{i18n.t("Another result has taken its place since it was drawn.")}</b>
            </p>
          )}
          <div className="record-figures">
            <div>
              <span className="beneath">{i18n.t("Without protection, dB")}</span>
              <OutsideFigure figures={figures} />
            </div>
            <div>
              <span className="beneath">{i18n.t("At the ear, dB")}</span>
              <AtEarFigure figures={figures} />
            </div>
          </div>
        </dd>
        <dt>{i18n.t("Notice")}</dt>
        <dd>
          <Lines none={i18n.t("Nobody was told by mail, and no letter was written.")}>
            {[
              ...record.notices.map(({ id, name, state, at }) => (
                <span key={id}>
                  <bdi>{name}</bdi>: {toldWord(i18n, state)}
                  {at !== null && `, ${formatInstant(at, draw.timeZone, locale)}`}
                </span>
              )),
              ...record.letters.map(({ id, state, dueOn }) => (
                <TextLink key={id} to={paths.letter(id)}>
                  {i18n.t("Letter of results, due {date}: {state}", {
                    date: formatShortDate(dueOn, locale),
                    state: withinSentence(letterStateWord(i18n, state), locale),
                  })}
                </TextLink>
              )),
            ]}
          </Lines>
        </dd>
        <dt>{i18n.t("Finding")}</dt>
        <dd>
          <Lines none={i18n.t("None on that day.")}>
            {record.findings.map(({ id, kind, state }) => (
              <TextLink key={id} to={paths.finding(id)}>
                {findingWord(i18n, kind)}, {withinSentence(findingStateWord(i18n, state), locale)}
              </TextLink>
            ))}
          </Lines>
        </dd>
        <dt>{i18n.t("Mark")}</dt>
        <dd ref={place}>
          {mark === null ? (
            <p>{markWord(i18n, null)}</p>
          ) : (
            <p>
              <b>{markWord(i18n, mark.word)}</b>
              {mark.note !== "" && `: ${mark.note}`}{" "}
              <span className="beneath">
                <bdi>{mark.authorName}</bdi>, {formatInstant(mark.at, draw.timeZone, locale)}
              </span>
            </p>
          )}
          {mayMark &&
            (mark === null || isMarking ? (
              <MarkForm
                draw={draw}
                record={record}
                onDone={() => {
                  setIsMarking(false);
                  moveFocus(":scope > button");
                }}
              />
            ) : (
              <TextButton
                onClick={() => {
                  setIsMarking(true);
                  moveFocus("input:checked");
                }}
              >
                {i18n.t("Mark it anew")}
                <span className="sr-only"> {position}</span>
              </TextButton>
            ))}
        </dd>
      </dl>
    </Section>
  );
}

function Lines({ children, none }: { children: ReactNode[]; none: string }) {
  if (children.length === 0) return none;
  return (
    <ul>
      {children.map((child, index) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: the lines stand as they came and never move
        <li key={index}>{child}</li>
      ))}
    </ul>
  );
}

function FieldCheck({ run }: { run: DrawnRecord["runs"][number] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { checkBeforeDb, checkAfterDb, keptReason } = run;
  const driftDb = fieldCheckDriftDb(checkBeforeDb, checkAfterDb);
  const values = {
    before: formatLevel(checkBeforeDb, locale),
    after: formatLevel(checkAfterDb, locale),
  };
  return (
    <>
      {driftDb === null
        ? i18n.t("{before} dB before, {after} dB after: not both on record", values)
        : isWithinTolerance(driftDb)
          ? i18n.t("{before} dB before, {after} dB after: within 0.5 dB", values)
          : i18n.t("{before} dB before, {after} dB after: more than 0.5 dB apart", values)}
      {keptReason !== null && `; ${i18n.t("kept because: {reason}", { reason: keptReason })}`}
    </>
  );
}
