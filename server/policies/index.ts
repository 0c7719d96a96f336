import { forbidden } from "../lib/errors";
import { Actor, policy, visible } from "../lib/policy";

interface AtSite {
  siteId: string;
}
interface OfWorker extends AtSite {
  workerId: string | null;
}

const officerAt = (actor: Actor, { siteId }: AtSite) => actor.isAt(siteId, "officer");
/** Of the office of a site: its officers, and whoever administers it. */
const officeAt = (actor: Actor, { siteId }: AtSite) =>
  actor.isAt(siteId, "officer", "administrator");

/** Today in SQL terms where a membership has to hold now. */
const today = "current_date";

/** Whether the actor administers a site or, where it is null, all of them: there roles are theirs to give and to take. */
export const administersReach = (actor: Actor, siteId: string | null): boolean =>
  siteId === null
    ? actor.grants.some((grant) => grant.role === "administrator" && grant.siteId === null)
    : actor.isAt(siteId, "administrator");

/** Sites: everybody with a role knows the sites of their grants; what exposure rests on is the officer's to change. */
export const sitePolicy = policy<{ id: string }>()({
  sees: (actor, s) => [
    actor.at(`${s}.id`, "officer", "supervisor", "worker", "auditor", "administrator"),
    actor.visitingSite(`${s}.id`),
  ],
  can: {
    /** A new site is nobody's yet: only who administers all of them adds one. */
    create: (actor) => administersReach(actor, null),
    change: (actor, { id }) => actor.isAt(id, "administrator"),
    changeRules: (actor, { id }) => actor.isAt(id, "officer"),
  },
});

/** A site's figures without names: the workers' representative's, and with them no row that they count. */
export const siteFiguresPolicy = policy<object>()({
  sees: (actor, s) => [actor.at(`${s}.id`, "representative")],
  can: {},
});

/**
 * Who counts for a workers' representative: reads one site as its auditor does. For figures without names only; no row that
 * it sees goes out.
 *
 * @throws AppError forbidden: no representative of the site.
 */
export function counterAt(actor: Actor, siteId: string): Actor {
  if (!actor.isAt(siteId, "representative")) throw forbidden();
  const { userId, organizationId, name, language } = actor;
  return new Actor(userId, organizationId, name, null, language, null, [
    { role: "auditor", siteId },
  ]);
}

/** A site's year as a file, and what is missing in it. */
export const yearPolicy = policy<AtSite & { year: number }>()({
  sees: () => [],
  can: {
    export: (actor, { siteId, year }) => actor.mayReadYear(siteId, year, "officer", "auditor"),
  },
});

/** Records drawn at random from a year: the auditor's own work, which is about the records and changes none. */
export const drawPolicy = policy<AtSite>()({
  sees: (actor, d) => [actor.at(`${d}.site_id`, "officer", "auditor")],
  can: { mark: (actor, { siteId }) => actor.isAt(siteId, "auditor") },
});

/** Surveys and the register of changes: the officer's work, the auditor's to read. */
export const surveyPolicy = policy<AtSite>()({
  sees: (actor, s) => [actor.at(`${s}.site_id`, "officer", "auditor")],
  can: { change: officerAt, adopt: officerAt },
});

/** Time histories, files on their way in and recordings. A worker's own history is the worker's to read as a result. */
export const historyPolicy = policy<AtSite>()({
  sees: (actor, h) => [actor.at(`${h}.site_id`, "officer", "auditor")],
  can: { change: officerAt },
});

/** A recording's audio holds speech: the officer's to hear, and nobody's to read the programme by. */
export const audioPolicy = policy<AtSite>()({
  sees: (actor, a) => [actor.at(`${a}.site_id`, "officer")],
  can: {},
});

/** Areas, tasks, jobs and instruments describe the programme, not a person. */
export const programmePolicy = policy<AtSite>()({
  sees: (actor, t) => [actor.at(`${t}.site_id`, "officer", "auditor", "supervisor")],
  can: { change: officerAt },
});

export const crewPolicy = policy<AtSite>()({
  sees: (actor, c) => [
    actor.at(`${c}.site_id`, "officer", "auditor"),
    actor.is("supervisor") &&
      `EXISTS (SELECT 1 FROM crew_supervisors s WHERE s.crew_id = ${c}.id AND s.user_id = '${actor.userId}' AND s.valid @> ${today})`,
  ],
  can: { change: officerAt, enterDay: officerAt },
});

/** Crews whose people somebody plans: a supervisor in charge today, an officer at the site. */
export const chargePolicy = policy<AtSite>()({
  sees: (actor, c) => [
    actor.at(`${c}.site_id`, "officer"),
    actor.is("supervisor") &&
      `EXISTS (SELECT 1 FROM crew_supervisors s WHERE s.crew_id = ${c}.id AND s.user_id = '${actor.userId}' AND s.valid @> ${today})`,
  ],
  can: {},
});

/** What was handed over: those who gave and got it, whoever is in charge of the crew now, the office. */
export const handOverPolicy = policy<AtSite>()({
  sees: (actor, h) => [
    actor.at(`${h}.site_id`, "officer", "auditor"),
    `${h}.author_id = '${actor.userId}'`,
    `${h}.recipient_id = '${actor.userId}'`,
    actor.is("supervisor") &&
      `EXISTS (SELECT 1 FROM crew_supervisors s WHERE s.crew_id = ${h}.crew_id AND s.user_id = '${actor.userId}' AND s.valid @> ${today})`,
  ],
  can: {},
});

/** Crews of which somebody meets hand-overs: also who was given one before the crew is theirs. */
export const handOverCrewPolicy = policy<AtSite>()({
  sees: (actor, c) => [
    ...crewPolicy.sees(actor, c),
    `EXISTS (SELECT 1 FROM hand_overs h WHERE h.crew_id = ${c}.id AND h.recipient_id = '${actor.userId}')`,
  ],
  can: {},
});

export const workerPolicy = policy<AtSite & { id: string }>()({
  sees: (actor, w) => [
    actor.at(`${w}.site_id`, "officer", "auditor"),
    actor.supervises(`${w}.id`, today),
    actor.owns(`${w}.id`),
    actor.visitingWorker(`${w}.id`),
  ],
  can: {
    change: officerAt,
    assign: officerAt,
    issueCode: officeAt,
    report: (actor, { id }) => actor.is("worker") && actor.workerId === id,
  },
});

/** A worker's name and number, and no more: what linking a sign-in takes. */
export const workerNamePolicy = policy<AtSite>()({
  sees: (actor, w) => [actor.at(`${w}.site_id`, "officer", "administrator")],
  can: { issueCode: officeAt },
});

/** Why a worker has a personal requirement. */
export const requirementPolicy = policy<AtSite>()({
  sees: (actor, w) => [actor.at(`${w}.site_id`, "officer")],
  can: { read: officerAt, change: officerAt },
});

/** A supervisor sees a day by the membership of that day; a worker sees own days. */
export const dayPolicy = policy<OfWorker>()({
  sees: (actor, d) => [
    actor.at(`${d}.site_id`, "officer", "auditor"),
    actor.supervises(`${d}.worker_id`, `${d}.date`),
    actor.owns(`${d}.worker_id`),
    actor.visiting(`${d}.site_id`, `${d}.date`),
  ],
  can: { correct: officerAt },
});

export const shiftPolicy = dayPolicy;

/** Results beside a finding: whoever sees the finding sees them, a visitor those of the year. */
export const evidencePolicy = policy<OfWorker>()({
  sees: (actor, r) => (actor.isVisitor ? dayPolicy.sees(actor, r) : ["TRUE"]),
  can: {},
});

export const runPolicy = policy<AtSite>()({
  sees: (actor, r) => [
    actor.at(`${r}.site_id`, "officer", "auditor"),
    actor.supervises(`${r}.worker_id`, `${r}.date`),
    actor.owns(`${r}.worker_id`),
    actor.visiting(`${r}.site_id`, `${r}.date`),
  ],
  can: { correct: officerAt },
});

/** The register of protectors belongs to the organization. */
export const protectorPolicy = policy<object>()({
  sees: (actor) => [(actor.is("officer", "auditor", "supervisor") || actor.isVisitor) && "TRUE"],
  can: { change: (actor) => actor.is("officer") },
});

export const assignmentPolicy = policy<AtSite>()({
  sees: (actor, a) => [
    actor.at(`(SELECT w.site_id FROM workers w WHERE w.id = ${a}.worker_id)`, "officer", "auditor"),
    actor.supervises(`${a}.worker_id`, today),
    actor.owns(`${a}.worker_id`),
    actor.visiting(
      `(SELECT w.site_id FROM workers w WHERE w.id = ${a}.worker_id)`,
      `lower(${a}.valid)`,
      `coalesce(upper(${a}.valid), 'infinity')`,
    ),
  ],
  can: { change: officerAt },
});

/** Fit tests, microphone checks and what was issued: a worker's own are the worker's to read. */
export const fitPolicy = policy<AtSite>()({
  sees: (actor, f) => [
    actor.at(`${f}.site_id`, "officer", "auditor"),
    actor.supervises(`${f}.worker_id`, today),
    actor.owns(`${f}.worker_id`),
  ],
  can: { change: officerAt, test: officerAt, issue: officerAt },
});

/** A fit test has its date: a visitor sees those of the year. */
export const fitTestPolicy = policy<AtSite>()({
  sees: (actor, f) => [
    ...fitPolicy.sees(actor, f),
    actor.visiting(`${f}.site_id`, `${f}.tested_on`),
  ],
  can: fitPolicy.can,
});

/** What was handed out: the worker says for themselves that they have it. */
export const issuePolicy = policy<OfWorker>()({
  sees: (actor, i) => [
    ...fitPolicy.sees(actor, i),
    actor.visiting(`${i}.site_id`, `${i}.issued_on`, `coalesce(${i}.ended_on, 'infinity')`),
  ],
  can: {
    end: officerAt,
    acknowledge: (actor, { siteId, workerId }) =>
      actor.isAt(siteId, "officer") || (actor.is("worker") && actor.workerId === workerId),
  },
});

/** Why somebody refused or cannot wear a device may be a medical reason. */
export const refusalPolicy = policy<AtSite>()({
  sees: (actor, r) => [actor.at(`${r}.site_id`, "officer")],
  can: { change: officerAt },
});

/** Who does what for the people of agencies and contractors: agreed by the officer of the site. */
export const employerPolicy = policy<AtSite>()({
  sees: (actor, e) => [actor.at(`${e}.site_id`, "officer", "auditor")],
  can: { agree: officerAt },
});

/** Results that people of an outside employer read of its own people, and nothing else of anybody. */
export const sharedResultPolicy = policy<OfWorker>()({
  sees: (actor, d) => [actor.sharedWith(d)],
  can: {},
});

/** Grants to people of outside employers: the office's and the administrators' of the site. */
export const employerSharePolicy = policy<AtSite>()({
  sees: (actor, g) => [actor.at(`${g}.site_id`, "officer", "administrator")],
  can: { change: officeAt },
});

/** Trainings as the office has them; a worker reads the own ones with the worker's record. */
export const trainingPolicy = policy<AtSite>()({
  sees: (actor, t) => [actor.at(`${t}.site_id`, "officer", "auditor")],
  can: { change: officerAt },
});

/** A worker's trainings: whoever sees the worker sees them, a visitor those of the year. The alias is the session's. */
export const ownTrainingPolicy = policy<AtSite>()({
  sees: (actor, t) =>
    actor.isVisitor
      ? [...trainingPolicy.sees(actor, t), actor.visiting(`${t}.site_id`, `${t}.held_on`)]
      : ["TRUE"],
  can: {},
});

export const stockPolicy = policy<AtSite>()({
  sees: (actor, s) => [actor.at(`${s}.site_id`, "officer", "auditor")],
  can: { change: officerAt },
});

/** Rounds: an officer makes them at the site, a supervisor among the own crews; a worker speaks of themselves. */
export const wearingPolicy = policy<AtSite>()({
  sees: (actor, r) => [
    actor.at(`${r}.site_id`, "officer", "auditor"),
    `${r}.author_id = '${actor.userId}'`,
  ],
  can: { strike: officerAt },
});

/** Whose own reports of wearing somebody reads: the office those of its sites, a worker the own. */
export const ownReportPolicy = policy<AtSite>()({
  sees: (actor, w) => [actor.at(`${w}.site_id`, "officer", "auditor"), actor.owns(`${w}.id`)],
  can: {},
});

/** Who enters what was seen, and who says it of themselves. */
export const wearingEntryPolicy = policy<{ source: "round" | "own-report" }>()({
  sees: () => [],
  can: {
    enter: (actor, { source }) => source === "own-report" || actor.is("officer", "supervisor"),
  },
});

/** A date for SQL, from input that was parsed as one. */
function dateLiteral(date: string): string {
  if (!/^\d{4}-\d{2}-\d{2}$/.test(date)) throw new Error("a policy's date is an ISO date");
  return `DATE '${date}'`;
}

/** Crews through which somebody may make a round on a date: a supervisor by the charge of that date. */
export const roundPolicy = (date: string) =>
  policy<AtSite>()({
    sees: (actor, c) => [
      actor.at(`${c}.site_id`, "officer"),
      actor.is("supervisor") &&
        `EXISTS (SELECT 1 FROM crew_supervisors s WHERE s.crew_id = ${c}.id AND s.user_id = '${actor.userId}' AND s.valid @> ${dateLiteral(date)})`,
    ],
    can: {},
  });

/** Workers whose wearing somebody may enter for a date: of such a crew that day, on loan or not; an officer's; oneself. */
export const lookPolicy = (date: string) =>
  policy<AtSite>()({
    sees: (actor, w) => [
      actor.at(`${w}.site_id`, "officer"),
      actor.owns(`${w}.id`),
      `EXISTS (SELECT 1 FROM crew_memberships m JOIN crews c ON c.id = m.crew_id
        WHERE m.worker_id = ${w}.id AND m.valid @> ${dateLiteral(date)} AND ${visible(roundPolicy(date), actor, "c")})`,
    ],
    can: {},
  });

/** What was tried and kept: the officer's work, the auditor's to read. */
export const planPolicy = policy<AtSite>()({
  sees: (actor, p) => [actor.at(`${p}.site_id`, "officer", "auditor")],
  can: { keep: officerAt, putAside: officerAt, step: officerAt },
});

export const signalPolicy = policy<AtSite>()({
  sees: (actor, s) => [actor.at(`${s}.site_id`, "officer", "auditor", "supervisor")],
  can: { change: officerAt },
});

/** Findings that a worker reported, or that concern them, are theirs to read; a supervisor acts on own crews'. */
export const findingPolicy = policy<AtSite>()({
  sees: (actor, f) => [
    actor.at(`${f}.site_id`, "officer", "auditor"),
    actor.supervises(`${f}.worker_id`, today),
    actor.supervises(`${f}.worker_id`, `${f}.last_date`),
    actor.owns(`${f}.worker_id`),
    actor.visiting(`${f}.site_id`, `${f}.first_date`, `${f}.last_date`),
  ],
  can: {
    handle: officerAt,
    markDone: (actor, { siteId }) => actor.isAt(siteId, "officer") || actor.is("supervisor"),
    comment: (actor, { siteId }) => actor.isAt(siteId, "officer") || actor.is("supervisor"),
  },
});

/** Papers of a finding may show others: not for the worker whom it concerns. */
export const findingFilePolicy = policy<AtSite>()({
  sees: (actor, f) => [
    actor.at(`${f}.site_id`, "officer", "auditor"),
    actor.supervises(`${f}.worker_id`, today),
    actor.supervises(`${f}.worker_id`, `${f}.last_date`),
    actor.visiting(`${f}.site_id`, `${f}.first_date`, `${f}.last_date`),
  ],
  can: {},
});

export const noticePolicy = policy<AtSite>()({
  sees: (actor, n) => [
    actor.at(`${n}.site_id`, "officer", "auditor"),
    `${n}.recipient_id = '${actor.userId}'`,
    actor.visiting(`${n}.site_id`, `${n}.created_at`),
  ],
  can: { handle: officerAt },
});

/** Letters with results: told to the worker, and signed before the officer. */
export const letterPolicy = policy<AtSite>()({
  sees: (actor, l) => [
    actor.at(`${l}.site_id`, "officer", "auditor"),
    actor.visiting(`${l}.site_id`, `${l}.written_at`),
  ],
  can: { acknowledge: officerAt },
});

/** Letters as part of a worker's record: the worker's own are the worker's to read. */
export const ownLetterPolicy = policy<AtSite>()({
  sees: (actor, l) => [...letterPolicy.sees(actor, l), actor.owns(`${l}.worker_id`)],
  can: {},
});

/** A worker's whole record as a document: the office's of its sites, a worker's own; no supervisor's and no visitor's. */
export const exposureRecordPolicy = policy<AtSite>()({
  sees: (actor, w) => [actor.at(`${w}.site_id`, "officer", "auditor"), actor.owns(`${w}.id`)],
  can: {},
});

/** All that is on record of oneself as a file: nobody else's to take. */
export const ownRecordPolicy = policy<AtSite>()({
  sees: (actor, w) => [actor.owns(`${w}.id`)],
  can: {},
});

/** Reports of a site's year that were issued: whoever may read the year reads them, the officer issues. */
export const yearReportPolicy = policy<AtSite>()({
  sees: (actor, r) => [actor.at(`${r}.site_id`, "officer", "auditor")],
  can: { issue: officerAt },
});

/** People and roles. An administrator grants them and reads no exposure by it. */
/** `reaches`: the sites of the roles that somebody holds, null for all sites. What one can't give back, one can't take. */
export const userPolicy = policy<{ id: string; reaches: readonly (string | null)[] }>()({
  sees: (actor, u) => [actor.is("administrator") && "TRUE", `${u}.id = '${actor.userId}'`],
  can: {
    change: (actor) => actor.is("administrator"),
    revoke: (actor, { id, reaches }) =>
      actor.is("administrator") &&
      actor.userId !== id &&
      reaches.every((siteId) => administersReach(actor, siteId)),
  },
});

/** Who outside gets the trail's head: it is about the whole organization, so whoever administers all of it names them. */
export const keeperPolicy = policy<object>()({
  sees: (actor) => [actor.is("administrator", "auditor") && "TRUE"],
  can: {
    change: (actor) => administersReach(actor, null),
  },
});

/** How long people stay in the records: the office's and the administrators' of the site; the organization's own term is all sites'. */
export const retentionPolicy = policy<AtSite>()({
  sees: (actor, w) => [actor.at(`${w}.site_id`, "officer", "administrator")],
  can: {
    propose: officeAt,
    setTerm: (actor) => administersReach(actor, null),
  },
});

export const holdPolicy = policy<AtSite>()({
  sees: (actor, h) => [actor.at(`${h}.site_id`, "officer", "administrator")],
  can: { lift: officeAt },
});

type Proposal = AtSite & { state: string; proposedBy: string };

/** Two people decide: nobody approves what they proposed. */
const approvesAnothers = (actor: Actor, one: Proposal): boolean =>
  one.state === "proposed" && one.proposedBy !== actor.userId && officeAt(actor, one);

export const erasurePolicy = policy<Proposal>()({
  sees: (actor, e) => [actor.at(`${e}.site_id`, "officer", "administrator")],
  can: {
    approve: approvesAnothers,
    withdraw: (actor, one) => one.state === "proposed" && officeAt(actor, one),
  },
});

/**
 * Handing a site's records over takes two people too. Only an officer takes the file: an administrator reads no exposure by
 * being one.
 */
export const recordTransferPolicy = policy<Proposal>()({
  sees: (actor, t) => [actor.at(`${t}.site_id`, "officer", "administrator")],
  can: {
    approve: approvesAnothers,
    withdraw: (actor, one) =>
      (one.state === "proposed" || one.state === "approved") && officeAt(actor, one),
    take: (actor, { siteId, state }) => state === "approved" && actor.isAt(siteId, "officer"),
    receive: (actor, one) => one.state === "approved" && officeAt(actor, one),
  },
});

/** Visitors' grants: who administers the site lets them in. */
export const visitPolicy = policy<AtSite>()({
  sees: (actor, g) => [actor.at(`${g}.site_id`, "administrator")],
  can: { change: (actor, { siteId }) => actor.isAt(siteId, "administrator") },
});

/**
 * Who read whose record. A worker reads who read the own one, files of a year with a day of theirs among it; an administrator
 * learns by it who reads, and nothing of what stands there.
 */
export const readLogPolicy = policy<AtSite>()({
  sees: (actor, r) => [
    actor.at(`${r}.site_id`, "auditor", "administrator"),
    actor.owns(`${r}.worker_id`),
    actor.is("worker") &&
      actor.workerId !== null &&
      `${r}.worker_id IS NULL AND EXISTS (SELECT 1 FROM days v WHERE v.worker_id = '${actor.workerId}' AND v.site_id = ${r}.site_id
        AND v.date >= make_date(${r}.year, 1, 1) AND v.date <= make_date(${r}.year, 12, 31))`,
  ],
  can: {},
});

/** Tokens for other systems: the person's own; an administrator can end anybody's. */
export const tokenPolicy = policy<{ userId: string }>()({
  sees: (actor, t) => [`${t}.user_id = '${actor.userId}'`, actor.is("administrator") && "TRUE"],
  can: { end: (actor, { userId }) => actor.userId === userId || actor.is("administrator") },
});

/** Roles by groups: who administers the site, or for all of them whoever administers all. */
export const mappingPolicy = policy<{ siteId: string | null }>()({
  sees: (actor, m) => [actor.at(`${m}.site_id`, "administrator")],
  can: {
    change: (actor, { siteId }) => administersReach(actor, siteId),
  },
});

const tableOfSubject = {
  area: "areas",
  task: "tasks",
  job: "jobs",
  crew: "crews",
  worker: "workers",
  instrument: "instruments",
  shift: "shifts",
  run: "runs",
  finding: "findings",
  notice: "notices",
  letter: "result_letters",
  survey: "surveys",
  "workplace-change": "workplace_changes",
  "history-import": "history_imports",
  "time-history": "time_histories",
  recording: "recordings",
  "fit-test": "fit_tests",
  "microphone-check": "microphone_checks",
  "protector-issue": "protector_issues",
  "wearing-round": "wearing_rounds",
  "warning-signal": "warning_signals",
  training: "training_sessions",
  plan: "plans",
  timetable: "timetables",
  draw: "record_draws",
  "hand-over": "hand_overs",
  "legal-hold": "legal_holds",
  erasure: "erasures",
  "record-transfer": "record_transfers",
};

/** The site an event is about, by its subject. */
export const siteOfEvent = (e: string) => `(CASE ${e}.subject_kind WHEN 'site' THEN ${e}.subject_id
  ${Object.entries(tableOfSubject)
    .map(
      ([kind, table]) =>
        `WHEN '${kind}' THEN (SELECT x.site_id FROM ${table} x WHERE x.id = ${e}.subject_id)`,
    )
    .join(" ")} END)`;

/** The trail: the auditor's whole; an administrator's as far as it is about people, roles and sites. */
export const auditPolicy = policy<object>()({
  sees: (actor, e) => [
    actor.at(siteOfEvent(e), "auditor"),
    actor.is("auditor") && `${e}.subject_kind = 'protector'`,
    actor.is("administrator") &&
      `${e}.subject_kind IN ('user', 'site', 'group-mapping', 'organization', 'legal-hold', 'erasure', 'record-transfer')`,
    actor.visiting(siteOfEvent(e), `${e}.at`),
  ],
  can: {},
});

/** Which roles may call a route at all. */
export const may = {
  officer: (actor: Actor) => actor.is("officer"),
  /** The programme's description, without people's exposures. */
  readProgramme: (actor: Actor) => actor.is("officer", "auditor", "supervisor"),
  readDays: (actor: Actor) =>
    actor.is("officer", "auditor", "supervisor", "worker") || actor.isVisitor,
  readCrews: (actor: Actor) => actor.is("officer", "auditor", "supervisor"),
  /** Lists of workers and of runs, each row by its own policy. */
  listRecords: (actor: Actor) => actor.is("officer", "auditor", "supervisor") || actor.isVisitor,
  /** Surveys, outings and what hangs on an instrument. */
  readMeasuring: (actor: Actor) => actor.is("officer", "auditor"),
  /** Absences, loans and hand-overs of a crew, by whoever is in charge of it. */
  planPeople: (actor: Actor) => actor.is("officer", "supervisor"),
  followUp: (actor: Actor) => actor.is("officer", "supervisor"),
  export: (actor: Actor) => actor.is("officer", "auditor") || actor.isVisitor,
  readExposureRecord: (actor: Actor) => actor.is("officer", "auditor", "worker"),
  takeOwnRecord: (actor: Actor) => actor.is("worker"),
  /** Those to whom anything is sent about exposures. */
  receiveMails: (actor: Actor) => actor.is("officer", "supervisor", "worker"),
  readYearReports: (actor: Actor) => actor.is("officer", "auditor"),
  drawRecords: (actor: Actor) => actor.is("auditor"),
  readDraws: (actor: Actor) => actor.is("officer", "auditor"),
  reportProblem: (actor: Actor) => actor.is("worker"),
  administer: (actor: Actor) => actor.is("administrator"),
  issueCodes: (actor: Actor) => actor.is("officer", "administrator"),
  readWearing: (actor: Actor) => actor.is("officer", "supervisor", "auditor"),
  readOwnReports: (actor: Actor) => actor.is("officer", "auditor", "worker"),
  /** Rounds through the shop: an officer, or a supervisor among the own crews. */
  observe: (actor: Actor) => actor.is("officer", "supervisor"),
  /** A round, or what a worker says of themselves. */
  enterWearing: (actor: Actor) => actor.is("officer", "supervisor", "worker"),
  /** Fits and issues as the office sees them. */
  readFitting: (actor: Actor) => actor.is("officer", "auditor"),
  acknowledge: (actor: Actor) => actor.is("officer", "worker"),
  readLetters: (actor: Actor) => actor.is("officer", "auditor") || actor.isVisitor,
  readTrail: (actor: Actor) => actor.is("auditor", "administrator") || actor.isVisitor,
  /** A visitor reads by hand, a workers' representative too. */
  haveTokens: (actor: Actor) => actor.grants.some(({ role }) => role !== "representative"),
  readSiteFigures: (actor: Actor) => actor.is("representative"),
  readReads: (actor: Actor) => actor.is("auditor", "administrator", "worker"),
  /** Held against all rows of the organization: tables and keys, nobody's values. */
  checkTrail: (actor: Actor) => actor.is("auditor"),
  retain: (actor: Actor) => actor.is("officer", "administrator"),
  readEmployers: (actor: Actor) => actor.is("officer", "auditor"),
  shareWithEmployers: (actor: Actor) => actor.is("officer", "administrator"),
  readSharedResults: (actor: Actor) => actor.isOfEmployer,
  readTrailKeeper: (actor: Actor) => actor.is("auditor", "administrator"),
  readSites: (actor: Actor) =>
    actor.is("officer", "auditor", "administrator", "supervisor") || actor.isVisitor,
};
