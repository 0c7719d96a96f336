import type { I18n } from "@lingui/core";
import type { z } from "zod";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { protectorWordText, verdictWord } from "../../shared/day/words";
import { citationOf, levelBasis } from "../../shared/findings/basis";
import { formatDate, formatShortDate, localDateOf } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel, formatLimit, formatUncertainty } from "../../shared/format/level";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import { mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { DayFigures } from "../../shared/schemas/finding";
import type { FitTestView, IssueView } from "../../shared/schemas/fit";
import type { LetterRow } from "../../shared/schemas/letter";
import type { WorkerTraining } from "../../shared/schemas/training";
import type { AssignmentView, HistoryPage } from "../../shared/schemas/worker";
import { decidedBy, otherOutside, outsideVerdict } from "../../shared/words/day-words";
import { letterStateNote, letterStateWord } from "../../shared/words/letter-words";
import { oneEarWord, passWord } from "../../shared/words/register-words";
import type { Actor } from "../lib/policy";
import { listAssignments } from "../queries/assignments";
import { listFitTests } from "../queries/fit-tests";
import { listIssues } from "../queries/issues";
import { lettersOfWorker } from "../queries/letters";
import { workerTraining } from "../queries/training";
import { workerHistory } from "../queries/worker-history";
import type { WorkerDetailRow } from "../queries/workers";
import type { Block, Cell, Report } from "./blocks";
import { frameOf, originOf } from "./frame";

type Day = z.input<typeof HistoryPage>["rows"][number];

const PAGE_ROWS = 200;

/** All pages of a list. */
async function allOf<Row>(
  page: (cursor: string | undefined) => Promise<{ rows: Row[]; next: string | null }>,
): Promise<Row[]> {
  const all: Row[] = [];
  let cursor: string | undefined;
  do {
    const { rows, next } = await page(cursor);
    all.push(...rows);
    cursor = next ?? undefined;
  } while (cursor);
  return all;
}

/** Everything on record of a worker, as far as the actor may see it, in the worker's language or the one asked for. */
export async function exposureRecord(
  actor: Actor,
  worker: WorkerDetailRow,
  language: string = worker.language,
): Promise<Report> {
  const locale = isLocale(language) ? language : "en";
  const i18n = await createI18n(locale);
  const workerId = worker.id;
  const origin = await originOf(actor.organizationId, worker.siteId);
  const days = await allOf((cursor) =>
    workerHistory(actor, workerId, { cursor, limit: PAGE_ROWS }),
  );
  const assignments = await listAssignments(actor, { workerId });
  const fits = await allOf((cursor) => listFitTests(actor, { workerId, cursor, limit: PAGE_ROWS }));
  const issues = await allOf((cursor) =>
    listIssues(actor, { workerId, cursor, limit: PAGE_ROWS, state: "all" }),
  );
  const training = await workerTraining(actor, workerId);
  const letters = await lettersOfWorker(actor, workerId);
  const blocks = [
    ...person(i18n, locale, worker),
    ...results(i18n, locale, days),
    ...protectors(i18n, locale, assignments, issues),
    ...fitTests(i18n, locale, fits),
    ...lettersOf(i18n, locale, letters, origin.timeZone),
    ...trainings(i18n, locale, training),
    ...rulesOf(i18n, days),
  ];
  const [latest, earliest] = [days[0], days.at(-1)];
  return {
    ...frameOf(i18n, locale, origin),
    title: i18n.t("Exposure record of {name}", { name: worker.name }),
    lead:
      latest && earliest
        ? i18n.t("{count, plural, one {# day} other {# days}} on record, {from} to {to}.", {
            count: days.length,
            from: formatDate(earliest.date, locale),
            to: formatDate(latest.date, locale),
          })
        : i18n.t("No day is on record."),
    blocks,
  };
}

function person(i18n: I18n, locale: Locale, worker: WorkerDetailRow): Block[] {
  return [
    {
      kind: "facts",
      rows: [
        [i18n.t("Worker"), isolate(worker.name)],
        [i18n.t("Employee number"), worker.employeeNumber],
        [i18n.t("Site"), isolate(worker.siteName)],
        [i18n.t("Job"), worker.jobName ?? i18n.t("none on record")],
        [
          i18n.t("Employed"),
          worker.leftOn
            ? i18n.t("{from} to {to}", {
                from: formatDate(worker.hiredOn, locale),
                to: formatDate(worker.leftOn, locale),
              })
            : i18n.t("since {date}", { date: formatDate(worker.hiredOn, locale) }),
        ],
        ...(worker.mustWear
          ? [
              [
                i18n.t("Personal requirement"),
                i18n.t("Must wear a protector whatever the level."),
              ] as const,
            ]
          : []),
        ...(worker.personalTargetDb === null
          ? []
          : [
              [
                i18n.t("Personal target"),
                i18n.t("At most {level} dB at the ear.", {
                  level: formatLimit(worker.personalTargetDb, locale),
                }),
              ] as const,
            ]),
      ],
    },
    {
      kind: "text",
      isQuiet: true,
      text: i18n.t(
        "“Without protection” is the noise of the whole day as an 8-hour level; “at the ear” is what was left of it under the protector, wearing time counted. Levels in dB(A), with the expanded uncertainty where one is stated. Each result has an id, by which its working can be opened.",
      ),
    },
  ];
}

/** A level ± its uncertainty, which belongs to an exact level alone. */
export const levelLine = (
  locale: Locale,
  levelDb: number | null,
  bound: DayFigures["outsideBound"],
  uncertaintyDb: number | null,
): string =>
  [
    formatLevel(levelDb, locale, bound),
    bound === "exact" && levelDb !== null ? formatUncertainty(uncertaintyDb, locale) : "",
  ]
    .filter((part) => part !== "")
    .join("\u00a0");

function outsideCell(i18n: I18n, locale: Locale, day: DayFigures): Cell {
  const { verdict, words } = outsideVerdict(i18n, locale, day);
  const ruleSet = ruleSetVersion(day.ruleSetKey, day.ruleSetVersion);
  const basis = ruleSet && levelBasis(i18n, locale, outsideCriterion(ruleSet));
  return {
    verdict,
    verdictLine: 1,
    lines: [
      levelLine(locale, day.outsideDb, day.outsideBound, day.uncertaintyDb),
      words,
      ...(basis && day.outsideDb !== null ? [basis] : []),
      ...otherOutside(i18n, locale, day).map((other) => other.words),
    ],
  };
}

function atEarCell(i18n: I18n, locale: Locale, day: DayFigures): Cell {
  const level = levelLine(locale, day.atEarDb, day.atEarBound, day.uncertaintyDb);
  const ruleSet = ruleSetVersion(day.ruleSetKey, day.ruleSetVersion);
  if (ruleSet && mainLimit(ruleSet).judged !== "at-the-ear" && day.atEarDb !== null)
    return { lines: [level, i18n.t("no limit at the ear")] };
  return {
    verdict: day.verdictAtEar,
    verdictLine: 1,
    lines: [level, verdictWord(i18n, day.verdictAtEar)],
    isStrong: day.verdictAtEar === "over",
  };
}

function protectorCell(i18n: I18n, locale: Locale, day: DayFigures): string {
  if (day.hasProtector === "no") return i18n.t("No protector");
  const word = day.word === null ? i18n.t("Not assessed") : protectorWordText(i18n, day.word);
  return [word, decidedBy(i18n, locale, day)].filter(Boolean).join("\n");
}

function results(i18n: I18n, locale: Locale, days: readonly Day[]): Block[] {
  return [
    { kind: "heading", text: i18n.t("Results, the latest first") },
    {
      kind: "table",
      summary: i18n.t("Results, the latest first"),
      empty: i18n.t("No day is on record."),
      columns: [
        { head: i18n.t("Day, length of shifts"), width: 14 },
        { head: i18n.t("Without protection"), width: 19 },
        { head: i18n.t("At the ear"), width: 17 },
        { head: i18n.t("Protector while worn"), width: 21 },
        { head: i18n.t("Result"), width: 29, isId: true },
      ],
      rows: days.map((day) => [
        `${formatShortDate(day.date, locale)}\n${formatDuration(day.shiftMin, locale)}`,
        outsideCell(i18n, locale, day),
        atEarCell(i18n, locale, day),
        protectorCell(i18n, locale, day),
        [
          day.resultId,
          `${day.ruleSetKey} ${day.ruleSetVersion}`,
          ...(day.origin === "imported" ? [i18n.t("imported, without its working")] : []),
          ...(day.isStale ? [i18n.t("out of date: about to be computed again")] : []),
        ].join("\n"),
      ]),
    },
  ];
}

function protectors(
  i18n: I18n,
  locale: Locale,
  assignments: readonly AssignmentView[],
  issues: readonly IssueView[],
): Block[] {
  const on = (date: string) => formatShortDate(date, locale);
  return [
    { kind: "heading", text: i18n.t("Protectors") },
    {
      kind: "table",
      summary: i18n.t("Protectors assigned"),
      empty: i18n.t("No protector was assigned."),
      columns: [
        { head: i18n.t("Protector"), width: 40 },
        { head: i18n.t("For"), width: 30 },
        { head: i18n.t("From"), width: 15 },
        { head: i18n.t("To"), width: 15 },
      ],
      rows: assignments.map(({ innerName, outerName, useName, size, fromDate, toDate }) => [
        [
          outerName ? `${isolate(innerName)} + ${isolate(outerName)}` : isolate(innerName),
          ...(size ? [i18n.t("size {size}", { size })] : []),
        ].join("\n"),
        useName ?? i18n.t("all work"),
        on(fromDate),
        toDate ? on(toDate) : i18n.t("still"),
      ]),
    },
    {
      kind: "table",
      summary: i18n.t("Handed out"),
      empty: i18n.t("Nothing is recorded as handed out."),
      columns: [
        { head: i18n.t("Handed out"), width: 40 },
        { head: i18n.t("On"), width: 15 },
        { head: i18n.t("Instructed"), width: 15 },
        { head: i18n.t("Received"), width: 15 },
        { head: i18n.t("Given back"), width: 15 },
      ],
      rows: issues.map(({ modelName, issuedOn, wasInstructed, acknowledgedHow, endedOn }) => [
        isolate(modelName),
        on(issuedOn),
        wasInstructed ? i18n.t("yes") : i18n.t("no"),
        acknowledgedHow ? i18n.t("yes") : i18n.t("not confirmed"),
        endedOn ? on(endedOn) : "",
      ]),
    },
  ];
}

function fitTests(i18n: I18n, locale: Locale, fits: readonly FitTestView[]): Block[] {
  return [
    { kind: "heading", text: i18n.t("Fit tests") },
    {
      kind: "table",
      summary: i18n.t("Fit tests"),
      empty: i18n.t("No fit was tested."),
      columns: [
        { head: i18n.t("Date"), width: 13 },
        { head: i18n.t("Protector"), width: 31 },
        { head: i18n.t("Takes off, dB"), width: 13, isFigure: true },
        { head: i18n.t("Needed, dB"), width: 13, isFigure: true },
        { head: i18n.t("Result"), width: 30 },
      ],
      rows: fits.map((fit) => [
        formatShortDate(fit.testedOn, locale),
        isolate(fit.modelName),
        formatLevel(fit.parDb, locale),
        formatLevel(fit.needDb, locale),
        fit.isVoid
          ? i18n.t("Struck")
          : fit.parDb === null
            ? i18n.t("Not measured")
            : [passWord(i18n, fit), oneEarWord(i18n, fit)].filter(Boolean).join(", "),
      ]),
    },
  ];
}

function lettersOf(
  i18n: I18n,
  locale: Locale,
  letters: readonly LetterRow[],
  timeZone: string,
): Block[] {
  return [
    { kind: "heading", text: i18n.t("Letters with results") },
    {
      kind: "table",
      summary: i18n.t("Letters with results"),
      empty: i18n.t("No letter was due."),
      columns: [
        { head: i18n.t("Written"), width: 15 },
        { head: i18n.t("Days that it tells of"), width: 35 },
        { head: i18n.t("Due"), width: 15 },
        { head: i18n.t("State"), width: 35 },
      ],
      rows: letters.map((letter) => [
        formatShortDate(localDateOf(letter.writtenAt, timeZone), locale),
        letter.days
          .map(({ date, levelDb }) =>
            i18n.t("{date}: {level} dB", {
              date: formatShortDate(date, locale),
              level: formatLevel(levelDb, locale),
            }),
          )
          .join("\n"),
        formatShortDate(letter.dueOn, locale),
        [
          letterStateWord(i18n, letter.state),
          letterStateNote(i18n, locale, letter, timeZone),
          letter.isLate ? i18n.t("late") : null,
        ]
          .filter(Boolean)
          .join(", "),
      ]),
    },
  ];
}

function trainings(i18n: I18n, locale: Locale, { rows, due }: WorkerTraining): Block[] {
  return [
    { kind: "heading", text: i18n.t("Training") },
    {
      kind: "table",
      summary: i18n.t("Training"),
      empty: i18n.t("No training is on record."),
      columns: [
        { head: i18n.t("Date"), width: 20 },
        { head: i18n.t("What"), width: 60 },
        { head: i18n.t("Length"), width: 20, isFigure: true },
      ],
      rows: rows.map(({ heldOn, title, durationMin }) => [
        formatShortDate(heldOn, locale),
        title,
        formatDuration(durationMin, locale),
      ]),
    },
    ...(due
      ? [
          {
            kind: "text",
            text: i18n.t("The next is due on {date}.", { date: formatDate(due.dueOn, locale) }),
          } as const,
        ]
      : []),
  ];
}

/** Every rule set by which a day was judged, with its source. */
function rulesOf(i18n: I18n, days: readonly Day[]): Block[] {
  const used = new Map(
    days.map(({ ruleSetKey, ruleSetVersion: version }) => [
      `${ruleSetKey} ${version}`,
      ruleSetVersion(ruleSetKey, version),
    ]),
  );
  if (used.size === 0) return [];
  return [
    { kind: "heading", text: i18n.t("Rules") },
    {
      kind: "facts",
      rows: [...used].map(([key, ruleSet]) => [
        key,
        ruleSet ? `${i18n._(ruleSet.title)}. ${citationOf(ruleSet, null)}` : key,
      ]),
    },
    {
      kind: "text",
      isQuiet: true,
      text: i18n.t(
        "An aid to screening: local regulation, a qualified hygienist and a licensed audiologist decide.",
      ),
    },
  ];
}
