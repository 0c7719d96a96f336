import type { I18n } from "@lingui/core";
import { outsideCriterion } from "../../shared/acoustics/outside-criterion";
import { verdictWord } from "../../shared/day/words";
import { formatInstant, formatMonthName } from "../../shared/format/date";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { formatNumber, NO_FIGURE } from "../../shared/format/number";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import { levelOf, mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { ChangeCause, YearReportFigures, YearReportRow } from "../../shared/schemas/report";
import { gapMeaning, gapWord } from "../../shared/words/gap-words";
import type { IssuedFigures } from "../queries/year-reports";
import type { Block, Cell, Report } from "./blocks";
import { frameOf } from "./frame";
import { histogramPicture, monthsPicture } from "./pictures";

/** Width of the histogram's steps, dB, as its figures were counted. */
const STEP_DB = 2;

function causeWord(i18n: I18n, cause: ChangeCause): string {
  switch (cause) {
    case "correction":
      return i18n.t("A shift was corrected");
    case "measured-anew":
      return i18n.t("Measured anew: another level of a task, or another reading");
    case "protector-data":
      return i18n.t("Protector: its data, its fit, or who wears which");
    case "wearing-seen":
      return i18n.t("Wearing time as it was seen on rounds");
    case "rule":
      return i18n.t("Rules, site settings or method");
    case "other":
      return i18n.t("Another cause");
  }
}

/**
 * An issued report of a site's year: denominators first, then verdicts, pictures and what changed. It says what was kept when
 * it was issued, in the reader's language, whenever it is taken.
 */
export async function yearReport(
  language: string,
  issued: YearReportRow,
  { figures, seal, organization, site, timeZone }: IssuedFigures,
): Promise<Report> {
  const locale = isLocale(language) ? language : "en";
  const i18n = await createI18n(locale);
  const n = (value: number) => formatNumber(value, 0, locale);
  const asOf = formatInstant(issued.asOf, timeZone, locale);
  const { people } = figures;
  return {
    ...frameOf(i18n, locale, {
      organization,
      site,
      timeZone,
      asOf: new Date(issued.asOf),
      trail: seal,
    }),
    title: i18n.t("Noise at {site} in {year}", { site, year: String(issued.year) }),
    lead: i18n.t(
      "Report {number}, as of {asOf}. {inNoise} of {people} people were in noise; {never} of them were never measured, {undecided} have a day that is undecided.",
      {
        number: issued.number,
        asOf,
        inNoise: n(people.inNoise),
        people: n(people.withDay),
        never: n(people.neverMeasured),
        undecided: n(people.undecided),
      },
    ),
    blocks: [
      ...denominators(i18n, locale, figures),
      ...verdictsOf(i18n, locale, figures),
      ...pictures(i18n, locale, figures),
      ...monthsOf(i18n, locale, figures),
      ...gapsOf(i18n, locale, figures),
      ...changesOf(i18n, locale, figures, timeZone),
      ...basis(i18n, figures, issued),
    ],
  };
}

const strong = (text: string): Cell => ({ lines: [text], isStrong: true });

function denominators(i18n: I18n, locale: Locale, { people, days }: YearReportFigures): Block[] {
  const line = (label: string, count: number | null, meaning: string, isMain = false) => [
    isMain ? strong(label) : label,
    count === null ? NO_FIGURE : formatNumber(count, 0, locale),
    meaning,
  ];
  return [
    { kind: "heading", text: i18n.t("People") },
    {
      kind: "table",
      summary: i18n.t("People in noise, and what is known of them"),
      empty: "",
      columns: [
        { head: i18n.t("People"), width: 34 },
        { head: i18n.t("Count"), width: 12, isFigure: true },
        { head: i18n.t("What is counted"), width: 54 },
      ],
      rows: [
        line(i18n.t("With a day on record"), people.withDay, i18n.t("in this year, at this site")),
        line(
          i18n.t("In noise"),
          people.inNoise,
          i18n.t("over 80 dB without protection on a day"),
          true,
        ),
        line(
          i18n.t("Measured"),
          people.measured,
          i18n.t("of those in noise: with a run of their own in the year"),
        ),
        line(
          i18n.t("Measured through their group"),
          people.byGroup,
          i18n.t("of those in noise: not themselves, but by measurements that speak for them"),
        ),
        line(
          i18n.t("Never measured"),
          people.neverMeasured,
          i18n.t("of those in noise: known by levels of tasks and estimates alone"),
          true,
        ),
        line(
          i18n.t("Undecided"),
          people.undecided,
          i18n.t("of those in noise: with a day Can’t tell yet or Not assessed"),
          true,
        ),
        line(
          i18n.t("Over at the ear"),
          // Older reports keep a zero for what no rule judged.
          days.atEar === null ? null : people.overAtEar,
          i18n.t("of those in noise: on a day of the year"),
        ),
        line(
          i18n.t("Level not known"),
          people.levelUnknown,
          i18n.t("on none of their days: whether they were in noise is not known"),
        ),
      ],
    },
  ];
}

function verdictsOf(i18n: I18n, locale: Locale, { days, findings }: YearReportFigures): Block[] {
  const n = (value: number | undefined) =>
    value === undefined ? NO_FIGURE : formatNumber(value, 0, locale);
  const line = (
    name: "under" | "over" | "cantTell" | "notAssessed",
    verdict: "under" | "over" | "cant-tell-yet" | "not-assessed",
  ) => [
    { lines: [verdictWord(i18n, verdict)], verdict },
    n(days.outside[name]),
    n(days.atEar?.[name]),
  ];
  return [
    {
      kind: "heading",
      text: i18n.t("Verdicts on {count} days", {
        count: formatNumber(days.count, 0, locale),
      }),
    },
    {
      kind: "table",
      summary: i18n.t("Verdicts of days"),
      empty: "",
      columns: [
        { head: i18n.t("Verdict"), width: 40 },
        { head: i18n.t("Without protection"), width: 30, isFigure: true },
        { head: i18n.t("At the ear"), width: 30, isFigure: true },
      ],
      rows: [
        line("over", "over"),
        line("cantTell", "cant-tell-yet"),
        line("notAssessed", "not-assessed"),
        line("under", "under"),
      ],
    },
    ...(days.atEar === null
      ? [
          {
            kind: "text",
            isQuiet: true,
            text: i18n.t("No rule of the year judges the day at the ear."),
          } as const,
        ]
      : []),
    {
      kind: "text",
      text: i18n.t(
        "Findings with a day in the year: {opened} opened in it, {closed} closed, {open} open, {overdue} of these overdue.",
        {
          opened: n(findings.opened),
          closed: n(findings.closed),
          open: n(findings.open),
          overdue: n(findings.overdue),
        },
      ),
    },
  ];
}

/** A mark that all the year's rule sets share; null where they differ. */
function sharedMark(
  i18n: I18n,
  locale: Locale,
  { ruleSets }: YearReportFigures,
  judged: "at-the-ear" | "without-protection",
): { levelDb: number; label: string } | null {
  const found = ruleSets.flatMap(({ key, version }) => ruleSetVersion(key, version) ?? []);
  const levels = new Set(
    found.flatMap((ruleSet) => {
      const criterion = judged === "at-the-ear" ? mainLimit(ruleSet) : outsideCriterion(ruleSet);
      return criterion.judged === judged ? [levelOf(criterion)] : [];
    }),
  );
  const [levelDb] = levels;
  if (levels.size !== 1 || levelDb === undefined) return null;
  const value = formatLimit(levelDb, locale);
  return {
    levelDb,
    label:
      judged === "at-the-ear"
        ? i18n.t("limit {limit}", { limit: value })
        : i18n.t("value {value}", { value }),
  };
}

function pictures(i18n: I18n, locale: Locale, figures: YearReportFigures): Block[] {
  const { histogram } = figures;
  if (histogram.length === 0) return [];
  const [outside, ear] = [i18n.t("Without protection"), i18n.t("At the ear")];
  return [
    { kind: "heading", text: i18n.t("Days by level, dB") },
    histogramPicture(
      locale,
      histogram,
      [
        {
          title: outside,
          name: "outside",
          mark: sharedMark(i18n, locale, figures, "without-protection"),
        },
        { title: ear, name: "atEar", mark: sharedMark(i18n, locale, figures, "at-the-ear") },
      ],
      STEP_DB,
      i18n.t(
        "Bars: how many days had which level, without protection and at the ear. The table below has the same figures.",
      ),
    ),
    {
      kind: "table",
      summary: i18n.t("Days by level, dB"),
      empty: "",
      columns: [
        { head: i18n.t("Level, dB"), width: 40 },
        { head: outside, width: 30, isFigure: true },
        { head: ear, width: 30, isFigure: true },
      ],
      rows: histogram.map((step) => [
        i18n.t("{from} to less than {to}", {
          from: formatLimit(step.fromDb, locale),
          to: formatLimit(step.fromDb + STEP_DB, locale),
        }),
        formatNumber(step.outside, 0, locale),
        formatNumber(step.atEar, 0, locale),
      ]),
    },
  ];
}

function monthsOf(i18n: I18n, locale: Locale, figures: YearReportFigures): Block[] {
  const { months, days } = figures;
  const n = (value: number) => formatNumber(value, 0, locale);
  const atEar = (value: number) => (days.atEar === null ? NO_FIGURE : n(value));
  return [
    { kind: "heading", text: i18n.t("The year by months") },
    monthsPicture(
      locale,
      months,
      { atEar: i18n.t("at the ear"), outside: i18n.t("without protection") },
      sharedMark(i18n, locale, figures, "at-the-ear"),
      i18n.t(
        "Each month’s median noise without protection, what the protectors took away, and the median at the ear. The table below has the same figures.",
      ),
    ),
    {
      kind: "table",
      summary: i18n.t("The year by months"),
      empty: i18n.t("No day is on record."),
      columns: [
        { head: i18n.t("Month"), width: 18 },
        { head: i18n.t("Days"), width: 9, isFigure: true },
        { head: i18n.t("Over at the ear"), width: 12, isFigure: true },
        { head: i18n.t("Can’t tell yet at the ear"), width: 13, isFigure: true },
        { head: i18n.t("Not assessed"), width: 13, isFigure: true },
        { head: i18n.t("Over without protection"), width: 13, isFigure: true },
        { head: i18n.t("Median at the ear, dB"), width: 12, isFigure: true },
        { head: i18n.t("Median without, dB"), width: 12, isFigure: true },
      ],
      rows: months.map((month) => [
        formatMonthName(month.month, locale),
        n(month.days),
        atEar(month.over),
        atEar(month.cantTell),
        n(month.notAssessed),
        n(month.overOutside),
        formatLevel(month.medianAtEarDb, locale),
        formatLevel(month.medianOutsideDb, locale),
      ]),
    },
  ];
}

function gapsOf(i18n: I18n, locale: Locale, { gaps }: YearReportFigures): Block[] {
  return [
    { kind: "heading", text: i18n.t("What is missing") },
    {
      kind: "table",
      summary: i18n.t("What is missing"),
      empty: "",
      columns: [
        { head: i18n.t("What is missing"), width: 36 },
        { head: i18n.t("Count"), width: 12, isFigure: true },
        { head: i18n.t("What is counted"), width: 52 },
      ],
      rows: gaps.map(({ kind, count, hasNoInterval }) => [
        gapWord(i18n, kind),
        formatNumber(count, 0, locale),
        gapMeaning(i18n, kind, hasNoInterval),
      ]),
    },
  ];
}

function changesOf(
  i18n: I18n,
  locale: Locale,
  { changes, days }: YearReportFigures,
  timeZone: string,
): Block[] {
  const heading = {
    kind: "heading",
    text: i18n.t("Changed since the last report, and why"),
  } as const;
  if (!changes)
    return [heading, { kind: "text", text: i18n.t("This is the first report of the year.") }];
  const n = (value: number) => formatNumber(value, 0, locale);
  const atEar = (value: number) =>
    days.atEar === null && value === 0 ? NO_FIGURE : formatNumber(value, 0, locale);
  return [
    heading,
    {
      kind: "text",
      text: i18n.t(
        "Since report {number} of {asOf}: {newDays} days are new and {goneDays} gone; {changed} have another result, {verdicts} of them another verdict.",
        {
          number: changes.since.number,
          asOf: formatInstant(changes.since.asOf, timeZone, locale),
          newDays: n(changes.newDays),
          goneDays: n(changes.goneDays),
          changed: n(changes.changedDays),
          verdicts: n(changes.verdictDays),
        },
      ),
    },
    {
      kind: "table",
      summary: i18n.t("Changed since the last report, and why"),
      empty: i18n.t("No result changed."),
      columns: [
        { head: i18n.t("Why"), width: 44 },
        { head: i18n.t("Days"), width: 12, isFigure: true },
        { head: i18n.t("Another verdict"), width: 16, isFigure: true },
        { head: i18n.t("Now over at the ear"), width: 16, isFigure: true },
        { head: i18n.t("No longer over"), width: 16, isFigure: true },
      ],
      rows: changes.byCause.map((one) => [
        causeWord(i18n, one.cause),
        n(one.days),
        n(one.verdictDays),
        atEar(one.nowOver),
        atEar(one.noLongerOver),
      ]),
    },
    {
      kind: "text",
      isQuiet: true,
      text: i18n.t(
        "A day stands under each cause that holds for it, a corrected one under no other than rules.",
      ),
    },
  ];
}

function basis(i18n: I18n, { ruleSets }: YearReportFigures, issued: YearReportRow): Block[] {
  return [
    { kind: "heading", text: i18n.t("What this report rests on") },
    {
      kind: "facts",
      rows: [
        ...ruleSets.map(({ key, version }) => {
          const ruleSet = ruleSetVersion(key, version);
          return [
            `${key} ${version}`,
            ruleSet ? `${i18n._(ruleSet.title)}. ${ruleSet.citation}` : key,
          ] as const;
        }),
        [i18n.t("Report made by"), isolate(issued.authorName)],
        [i18n.t("Id of the report"), issued.id],
        [
          i18n.t("Results in force then"),
          i18n.t("{count}; SHA-256 of their ids {hash}", {
            count: issued.resultsCount,
            hash: issued.resultsSha256,
          }),
        ],
      ],
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
