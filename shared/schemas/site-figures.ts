import { z } from "zod";
import { DutyKind } from "./duty";
import { FindingKind } from "./finding";
import { GapsView } from "./waiting";

/** A count of people; `few`: fewer than five; `withheld`: would give such a one away by subtraction. */
export const FigureCell = z.union([z.number().int(), z.enum(["few", "withheld"])]);
export type FigureCell = z.infer<typeof FigureCell>;

export const FIGURES_BY = ["crew", "job", "area", "task"] as const;
export const FiguresBy = z.enum(FIGURES_BY);
export type FiguresBy = z.infer<typeof FiguresBy>;

export const SiteFiguresQuery = z.object({
  /** Without: the latest with a day on record. */
  year: z.coerce.number().int().min(1970).max(2200).optional(),
});

const People = z.object({
  /** Over 80 dB without protection on a day. */
  inNoise: FigureCell,
  /** Of these: with a run of their own in the year. */
  measured: FigureCell,
  byGroup: FigureCell,
  neverMeasured: FigureCell,
  undecided: FigureCell,
  /** Over each of `criteria` on a day, in their order. */
  over: z.array(FigureCell),
});

export const PeopleRow = People.extend({
  id: z.uuid().nullable(),
  /** Null: days of no crew, people of no job. */
  name: z.string().nullable(),
});
export type PeopleRow = z.infer<typeof PeopleRow>;

/** People by how long it has lasted or when it is due; where it is about nobody, the things themselves. */
const Bands = { total: FigureCell, first: FigureCell, second: FigureCell, third: FigureCell };

export const SiteFiguresView = z.object({
  year: z.number().int(),
  years: z.array(z.number().int()),
  ruleSets: GapsView.shape.ruleSets,
  /** Action values and limits of the year's governing rule sets. */
  criteria: z.array(
    z.object({ ruleSetKey: z.string(), ruleSetVersion: z.number().int(), id: z.string() }),
  ),
  total: People,
  groups: z.object({
    crew: z.array(PeopleRow),
    job: z.array(PeopleRow),
    area: z.array(PeopleRow),
    task: z.array(PeopleRow),
  }),
  gaps: z.array(GapsView.shape.counts.element.extend({ count: FigureCell })),
  /** Open ones: under 30 days, under 90, older. */
  findings: z.array(z.object({ kind: FindingKind, ...Bands })),
  /** Overdue, within 30 days, later. */
  duties: z.array(z.object({ kind: DutyKind, ...Bands })),
  training: z.object({
    owed: FigureCell,
    /** Of those owed: never trained, overdue for another, trained in time. */
    never: FigureCell,
    overdue: FigureCell,
    inTime: FigureCell,
    /** People trained in the year. */
    trained: FigureCell,
    /** Trainings held in the year. */
    sessions: z.number().int(),
  }),
});
export type SiteFiguresView = z.infer<typeof SiteFiguresView>;
