import type { Role } from "../../server/lib/policy";
import type { Locale } from "../../shared/i18n";
import type { SiteKey } from "./programme";

/** Everybody here is invented. Dates are given in days before the day of seeding. */
export interface DemoWorker {
  crew: string;
  number: string;
  name: string;
  job: string;
  employer?: "agency" | "contractor";
  employerName?: string;
  language?: Locale;
  /** Hired before the demo begins unless said. */
  hiredDaysAgo?: number;
  leftDaysAgo?: number;
  mustWear?: boolean;
  personalTargetDb?: number;
  requirementReason?: string;
}

const tideway = { employer: "agency", employerName: "Tideway Staffing" } as const;
const larkspur = { employer: "agency", employerName: "Larkspur Labour" } as const;
const anvil = { employer: "contractor", employerName: "Anvil and Daughters" } as const;

export const WORKERS: readonly DemoWorker[] = [
  { crew: "Test cell days", number: "3315", name: "A. Sørli", job: "Test cell hand" },
  { crew: "Test cell days", number: "3318", name: "J. Castellow", job: "Test cell technician" },
  { crew: "Test cell days", number: "3340", name: "T. Bramhall", job: "Test cell hand" },
  { crew: "Test cell days", number: "3352", name: "N. Okwuosa", job: "Test cell hand" },
  { crew: "Test cell days", number: "3367", name: "H. Lindqvist", job: "Test cell hand" },
  { crew: "Test cell days", number: "3371", name: "B. Tremayne", job: "Test cell hand" },
  {
    crew: "Test cell days",
    number: "3388",
    name: "E. Vasquez-Lund",
    job: "Test cell hand",
    language: "es",
  },
  { crew: "Test cell days", number: "3390", name: "C. Marchetti", job: "Test cell hand" },
  { crew: "Test cell days", number: "3402", name: "G. Ó Riada", job: "Test cell hand" },
  { crew: "Test cell days", number: "3411", name: "Y. Tanaka-Bell", job: "Test cell hand" },
  {
    crew: "Test cell days",
    number: "3425",
    name: "R. Szabó",
    job: "Test cell hand",
    ...tideway,
    hiredDaysAgo: 61,
  },

  {
    crew: "Test cell nights",
    number: "3982",
    name: "K. Haldorsen",
    job: "Test cell technician, nights",
  },
  { crew: "Test cell nights", number: "3984", name: "О. Гайдабура", job: "Test cell hand, nights" },
  {
    crew: "Test cell nights",
    number: "3985",
    name: "D. Achterberg",
    job: "Test cell hand, nights",
    language: "de",
  },
  {
    crew: "Test cell nights",
    number: "3991",
    name: "L. Ferreira-Quist",
    job: "Test cell hand, nights",
  },
  {
    crew: "Test cell nights",
    number: "3993",
    name: "Δ. Καλλιέργης",
    job: "Test cell hand, nights",
  },
  { crew: "Test cell nights", number: "4002", name: "W. Pellerin", job: "Test cell hand, nights" },
  { crew: "Test cell nights", number: "4005", name: "S. Mwangale", job: "Test cell hand, nights" },
  {
    crew: "Test cell nights",
    number: "4011",
    name: "F. Iturbe-Hale",
    job: "Test cell hand, nights",
  },
  {
    crew: "Test cell nights",
    number: "4016",
    name: "P. Zawadny",
    job: "Test cell hand, nights",
    ...tideway,
    hiredDaysAgo: 250,
  },

  { crew: "Fettling days", number: "4417", name: "D. Tavernor", job: "Fettler" },
  { crew: "Fettling days", number: "4403", name: "M. Dąbrowik", job: "Fettler" },
  {
    crew: "Fettling days",
    number: "4408",
    name: "K. Nwosu-Ray",
    job: "Fettler",
    mustWear: true,
    personalTargetDb: 80,
    requirementReason:
      "Occupational health asks for no more than 80 dB at the ear, and a protector in every noisy task. To be looked at again each spring.",
  },
  { crew: "Fettling days", number: "4419", name: "S. Pettersen-Vale", job: "Fettler" },
  { crew: "Fettling days", number: "4422", name: "L. Grzelak", job: "Fettler", language: "pl" },
  { crew: "Fettling days", number: "4425", name: "C. Dubois-Hale", job: "Fettler" },
  { crew: "Fettling days", number: "4431", name: "渡会 沙羅", job: "Fettler" },
  { crew: "Fettling days", number: "4433", name: "H. Abdirahim", job: "Fettler" },
  {
    crew: "Fettling days",
    number: "4440",
    name: "I. Brânzaru",
    job: "Fettler",
    ...larkspur,
    hiredDaysAgo: 12,
  },
  { crew: "Fettling days", number: "4442", name: "V. Ostrowicki", job: "Casting washer" },
  { crew: "Fettling days", number: "4447", name: "J. Penhallow", job: "Casting washer" },

  { crew: "Fettling lates", number: "4120", name: "L. Mbeki-Stroud", job: "Fettler" },
  { crew: "Fettling lates", number: "4121", name: "ليلى حاطوم", job: "Fettler" },
  { crew: "Fettling lates", number: "4126", name: "T. Rasmussel", job: "Fettler" },
  { crew: "Fettling lates", number: "4128", name: "E. Kvarnberg", job: "Fettler" },
  { crew: "Fettling lates", number: "4130", name: "N. Petrosyan-Cole", job: "Fettler" },
  { crew: "Fettling lates", number: "4133", name: "R. Hollenkamp", job: "Fettler", language: "de" },
  { crew: "Fettling lates", number: "4137", name: "M. Trevanion", job: "Fettler" },
  { crew: "Fettling lates", number: "4139", name: "B. Uzoma-Fell", job: "Inspector" },
  {
    crew: "Fettling lates",
    number: "4144",
    name: "Y. Sahakyants",
    job: "Casting washer",
    ...larkspur,
    hiredDaysAgo: 320,
    leftDaysAgo: 100,
  },
  {
    crew: "Fettling lates",
    number: "4151",
    name: "O. Lowenthal-Pike",
    job: "Core maker",
    hiredDaysAgo: 9,
  },
  {
    crew: "Fettling lates",
    number: "4153",
    name: "A. Oyelaran-Dale",
    job: "Core maker",
    hiredDaysAgo: 9,
  },

  { crew: "Plate shop days", number: "2875", name: "P. Iwanek", job: "Hammer hand" },
  { crew: "Plate shop days", number: "2877", name: "D. Quintanar", job: "Hammer hand" },
  {
    crew: "Plate shop days",
    number: "2880",
    name: "T. Holloran-Pike",
    job: "Hammer hand",
    personalTargetDb: 85,
    requirementReason:
      "Hearing test of last autumn showed a shift in both ears; protectors have to bring the day down to 85.",
  },
  { crew: "Plate shop days", number: "2884", name: "S. Vang-Loret", job: "Hammer hand" },
  { crew: "Plate shop days", number: "2890", name: "E. Marrow-Finch", job: "Plater" },
  { crew: "Plate shop days", number: "2891", name: "A. Delacruz-Wen", job: "Plater" },
  { crew: "Plate shop days", number: "2893", name: "J. Okparaji", job: "Plater" },
  { crew: "Plate shop days", number: "2896", name: "M. Lindgrove", job: "Plater" },
  { crew: "Plate shop days", number: "2899", name: "K. Brandvoll", job: "Layout hand" },
  { crew: "Plate shop days", number: "2903", name: "L. Espinalba", job: "Layout hand" },
  { crew: "Plate shop days", number: "2907", name: "H. Nakasone-Reed", job: "Layout hand" },
  {
    crew: "Plate shop days",
    number: "2911",
    name: "W. Tuttlebeck",
    job: "Layout hand",
    ...anvil,
    hiredDaysAgo: 175,
  },

  {
    crew: "Compressor and stores",
    number: "2951",
    name: "G. Fairlambe",
    job: "Compressor attendant",
  },
  {
    crew: "Compressor and stores",
    number: "2953",
    name: "N. Castellan-Ruiz",
    job: "Compressor attendant",
  },
  {
    crew: "Compressor and stores",
    number: "2954",
    name: "O. Przybylak",
    job: "Compressor attendant",
  },
  { crew: "Compressor and stores", number: "2960", name: "김서안", job: "Stores hand" },
  { crew: "Compressor and stores", number: "2961", name: "F. Dunmore-Sol", job: "Stores hand" },
  { crew: "Compressor and stores", number: "2964", name: "V. Arcenault", job: "Forklift driver" },
  { crew: "Compressor and stores", number: "2966", name: "दीपा कुलवर्णी", job: "Forklift driver" },
  {
    crew: "Compressor and stores",
    number: "2970",
    name: "Z. Hartwicke",
    job: "Stores hand",
    hiredDaysAgo: 420,
    leftDaysAgo: 45,
  },
];

export interface DemoPerson {
  /** The local provider's name for the person, and the story's. */
  sub: string;
  name: string;
  email: string;
  emailVerified: boolean;
  language: Locale;
  /** Without grants: somebody the provider knows and Dinward does not. */
  grants: readonly { role: Role; site: SiteKey | null }[];
  /** Groups that the provider states; a role may follow one. */
  groups?: readonly string[];
  worker?: string;
  /** Crews under this supervisor. */
  supervises?: readonly string[];
  note: string;
  /** No e-mail at Dinward: a printed code binds the sign-in to the employee number. */
  bindsByCode?: boolean;
  /** Reads for a while by a grant of few things, from the day of filling on. */
  guest?: DemoGuest;
}

export type DemoGuest =
  | { as: "employer"; site: SiteKey; employer: string; days: number }
  | { as: "visitor"; site: SiteKey; days: number };

const person = (
  sub: string,
  name: string,
  domain: string,
  grants: DemoPerson["grants"],
  more: Partial<DemoPerson> & { note: string },
): DemoPerson => ({
  sub,
  name,
  email: `${sub}@${domain}`,
  emailVerified: true,
  language: "en",
  grants,
  ...more,
});
const OSTMERE = "ostmere.example";
const KETTLE_BEND = "kettle-bend.example";
const at = (site: SiteKey, ...roles: Role[]): DemoPerson["grants"] =>
  roles.map((role) => ({ role, site }));

export const PEOPLE: readonly DemoPerson[] = [
  person("s.ferrand", "S. Ferrand", OSTMERE, at("ostmere", "officer"), {
    note: "Safety officer, Ostmere works",
  }),
  person("d.calloway", "D. Calloway-Nuñez", KETTLE_BEND, at("kettle-bend", "officer"), {
    note: "Safety officer, Kettle Bend works",
  }),
  person("b.rowntree", "B. Rowntree-Adair", OSTMERE, at("ostmere", "supervisor"), {
    supervises: ["Test cell days"],
    note: "Supervisor of Test cell days",
  }),
  person("a.winterfeldt", "A. Winterfeldt", OSTMERE, at("ostmere", "supervisor"), {
    supervises: ["Test cell nights"],
    language: "de",
    note: "Supervisor of Test cell nights, reads German",
  }),
  person("p.lanyon", "P. Lanyon-Orr", OSTMERE, at("ostmere", "supervisor"), {
    supervises: ["Fettling days"],
    note: "Supervisor of Fettling days",
  }),
  person("m.trevanion", "M. Trevanion", OSTMERE, at("ostmere", "supervisor", "worker"), {
    supervises: ["Fettling lates"],
    worker: "4137",
    note: "Two roles: supervisor of Fettling lates and fettler there",
  }),
  person("s.okonedo", "S. Okonedo-Park", KETTLE_BEND, at("kettle-bend", "supervisor"), {
    supervises: ["Plate shop days"],
    note: "Supervisor of Plate shop days",
  }),
  person("l.whitcombe", "L. Whitcombe-Sayre", KETTLE_BEND, at("kettle-bend", "supervisor"), {
    supervises: ["Compressor and stores"],
    note: "Supervisor of Compressor and stores",
  }),
  person("d.tavernor", "D. Tavernor", OSTMERE, at("ostmere", "worker"), {
    worker: "4417",
    note: "Worker, Fettling days; over the limit yesterday",
  }),
  person("h.lindqvist", "H. Lindqvist", OSTMERE, at("ostmere", "worker"), {
    worker: "3367",
    note: "Worker, Test cell days; the muff takes too much",
  }),
  person("r.hollenkamp", "R. Hollenkamp", OSTMERE, at("ostmere", "worker"), {
    worker: "4133",
    language: "de",
    note: "Worker, Fettling lates, reads German",
  }),
  person("d.achterberg", "D. Achterberg", OSTMERE, at("ostmere", "worker"), {
    worker: "3985",
    language: "de",
    note: "Worker, Test cell nights, reads German",
  }),
  person("e.vasquez", "E. Vasquez-Lund", OSTMERE, at("ostmere", "worker"), {
    worker: "3388",
    language: "es",
    note: "Worker, Test cell days, reads Spanish",
  }),
  person("l.grzelak", "L. Grzelak", OSTMERE, at("ostmere", "worker"), {
    worker: "4422",
    language: "pl",
    note: "Worker, Fettling days, reads Polish",
  }),
  person("p.iwanek", "P. Iwanek", KETTLE_BEND, at("kettle-bend", "worker"), {
    worker: "2875",
    note: "Worker, Plate shop days",
  }),
  person("v.arcenault", "V. Arcenault", KETTLE_BEND, at("kettle-bend", "worker"), {
    worker: "2964",
    note: "Worker, Compressor and stores",
  }),
  person("e.lindahl", "E. Lindahl-Osei", OSTMERE, [{ role: "auditor", site: null }], {
    note: "Auditor, both sites",
  }),
  person("o.castellane", "O. Castellane-Wray", OSTMERE, at("ostmere", "representative"), {
    note: "Workers’ representative, Ostmere works: counts without names",
  }),
  person("i.vandermolen", "I. Vandermolen", OSTMERE, [{ role: "administrator", site: null }], {
    note: "Administrator, both sites",
  }),
  person(
    "t.abernathy",
    "T. Abernathy-Cho",
    KETTLE_BEND,
    at("kettle-bend", "administrator", "auditor"),
    { note: "Administrator and auditor, Kettle Bend works only" },
  ),
  person("b.tremayne", "B. Tremayne", OSTMERE, at("ostmere", "worker"), {
    worker: "3371",
    emailVerified: false,
    note: "Granted, but the provider has not verified the e-mail: refused",
  }),
  person("q.merriweather", "Q. Merriweather-Ito", OSTMERE, [], {
    note: "Known to the provider, granted nothing: refused",
  }),
  person("w.sundqvist", "W. Sundqvist-Roe", OSTMERE, [], {
    groups: ["Noise readers"],
    note: "Granted nothing by hand: an auditor of Ostmere works by a group",
  }),
  person("r.quennell", "R. Quennell", "tideway.example", [], {
    guest: { as: "employer", site: "ostmere", employer: "agency:Tideway Staffing", days: 180 },
    note: "Of the agency Tideway Staffing: results of its people at Ostmere works",
  }),
  person("j.threlkeld", "J. Threlkeld-Amos", "inspectorate.example", [], {
    guest: { as: "visitor", site: "ostmere", days: 14 },
    note: "Visitor: the year file of Ostmere works, for a fortnight",
  }),
  person("n.okwuosa", "N. Okwuosa", "post.example", [], {
    worker: "3352",
    bindsByCode: true,
    note: "Worker without e-mail at work",
  }),
];

/** Roles that follow a group of the sign-in service. */
export const GROUP_ROLES: readonly {
  groupName: string;
  role: Exclude<Role, "worker">;
  site: SiteKey;
}[] = [{ groupName: "Noise readers", role: "auditor", site: "ostmere" }];
