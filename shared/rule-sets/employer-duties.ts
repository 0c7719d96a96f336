/** What is owed to people who work at a site for another employer. */
export const EMPLOYER_DUTIES = ["measure", "protect", "train", "keep", "tell"] as const;
export type EmployerDuty = (typeof EMPLOYER_DUTIES)[number];

/** Whose duty: the site's own organization, or the employer who sends the people. */
export const DUTY_BEARERS = ["host", "employer"] as const;
export type DutyBearer = (typeof DUTY_BEARERS)[number];

export type OutsideEmployer = "agency" | "contractor";

export interface UsualDuties {
  readonly duties: Readonly<Record<EmployerDuty, DutyBearer>>;
  readonly citation: string;
  readonly sourceStatus: "read" | "from-memory";
}

/** An agency's people work under the host's direction: the host answers for the conditions of the work. */
const HOST_DIRECTS = {
  measure: "host",
  protect: "host",
  train: "host",
  keep: "employer",
  tell: "host",
} as const;

/** A contractor directs its own people; the host knows the noise of the place. */
const EMPLOYER_DIRECTS = {
  measure: "host",
  protect: "employer",
  train: "employer",
  keep: "employer",
  tell: "employer",
} as const;

const fromMemory = (duties: UsualDuties["duties"], citation: string): UsualDuties => ({
  duties,
  citation,
  sourceStatus: "from-memory",
});

const US = {
  agency: fromMemory(
    HOST_DIRECTS,
    "29 U.S.C. 654(a), as read for temporary workers: agency and host answer together",
  ),
  contractor: fromMemory(
    EMPLOYER_DIRECTS,
    "29 U.S.C. 654(a), as read for worksites of several employers",
  ),
};

/** By governing rule set. One that is not here has no usual sharing that the program knows of. */
const USUAL: Readonly<Record<string, Readonly<Record<OutsideEmployer, UsualDuties>>>> = {
  "eu-2003-10-ec": {
    agency: fromMemory(HOST_DIRECTS, "Directive 91/383/EEC, article 8"),
    contractor: fromMemory(EMPLOYER_DIRECTS, "Directive 89/391/EEC, articles 6(4) and 10(2)"),
  },
  "uk-2005": {
    agency: fromMemory(
      HOST_DIRECTS,
      "Management of Health and Safety at Work Regulations 1999, regulations 12 and 15",
    ),
    contractor: fromMemory(
      EMPLOYER_DIRECTS,
      "Management of Health and Safety at Work Regulations 1999, regulations 11 and 12",
    ),
  },
  "us-general-industry": US,
  "us-construction": US,
};

/** How the duties are usually shared where nothing was agreed; null where nothing is known for the rule set. */
export const usualDuties = (ruleSetKey: string, kind: OutsideEmployer): UsualDuties | null =>
  USUAL[ruleSetKey]?.[kind] ?? null;
