/** What a rule set gives the workers' representatives to know or to take part in. */
export interface RepresentativeRight {
  readonly what: string;
  readonly citation: string;
  readonly sourceStatus: "read" | "from-memory";
}

const right = (what: string, citation: string): RepresentativeRight => ({
  what,
  citation,
  sourceStatus: "from-memory",
});

const INFORMED =
  /*i18n*/ "Representatives are told of the risks of noise and of what is done about them.";
const CONSULTED =
  /*i18n*/ "Representatives are asked before measures are chosen, and may propose some.";
const WATCHING = /*i18n*/ "Workers or their representatives may watch noise being measured.";
const RECORDS =
  /*i18n*/ "The rule is open to representatives, and a worker’s own record where that worker names them for it. Here are no names.";

const EU = [
  right(INFORMED, "Directive 2003/10/EC, article 8; Directive 89/391/EEC, article 10"),
  right(CONSULTED, "Directive 2003/10/EC, article 9; Directive 89/391/EEC, article 11"),
];

/** By governing rule set. One that is not here gives nothing that the program knows of. */
const RIGHTS: Readonly<Record<string, readonly RepresentativeRight[]>> = {
  "eu-2003-10-ec": EU,
  "uk-2005": [
    right(
      INFORMED,
      "Safety Representatives and Safety Committees Regulations 1977, regulations 4A and 7",
    ),
    right(
      CONSULTED,
      "Safety Representatives and Safety Committees Regulations 1977, regulation 4A; Health and Safety (Consultation with Employees) Regulations 1996",
    ),
  ],
  "us-general-industry": [
    right(WATCHING, "29 CFR 1910.95(f)"),
    right(RECORDS, "29 CFR 1910.95(l) and (m)(4); 29 CFR 1910.1020"),
  ],
  "us-mining": [right(WATCHING, "30 CFR 62.110(c)")],
};

/** What the rule set gives the workers' representatives; empty where nothing is known for it. */
export const representativeRights = (ruleSetKey: string): readonly RepresentativeRight[] =>
  RIGHTS[ruleSetKey] ?? [];
