/** Of a day of one's own, the part where somebody says how long the protector was worn. */
export const OWN_REPORT = "own-report";

/** Every address of the application, so that no page spells another's. */
export const paths = {
  home: "/",
  signIn: "/sign-in",
  signedOut: "/signed-out",
  noAccess: "/no-access",
  /** Whoever has a letter by mail, without signing in. */
  acknowledge: (secret: string) => `/acknowledge/${secret}`,

  /** The site in counts without names, for the workers' representative. */
  siteFigures: "/site-figures",
  waiting: "/waiting",
  days: "/days",
  day: (crewId: string, date: string) => `/days/${crewId}/${date}`,
  imports: "/days/import",
  workers: "/workers",
  worker: (id: string) => `/workers/${id}`,
  /** Who can see a worker's record. */
  workerAccess: (id: string) => `/workers/${id}/access`,
  /** Where a protector is assigned, with what is proposed filled in. */
  assign: (
    workerId: string,
    { modelIds, taskIds }: { modelIds: readonly string[]; taskIds: readonly string[] },
  ) => {
    const [taskId] = taskIds;
    const use = taskId === undefined ? "" : `&use=${encodeURIComponent(`task ${taskId}`)}`;
    return `/workers/${workerId}?assign=${modelIds.join(",")}${use}#protectors`;
  },
  /** Joiners, movers and leavers from a file. */
  roster: "/roster",
  newWorker: "/workers/new",
  trainings: "/training",
  training: (id: string) => `/training/${id}`,
  changeWorker: (id: string) => `/workers/${id}/change`,
  /** Two microphones at one of the worker's ears: a new check, and one that was sent in. */
  microphoneCheck: (workerId: string) => `/workers/${workerId}/microphone-check`,
  microphoneResult: (workerId: string, checkId: string) =>
    `/workers/${workerId}/microphone-check/${checkId}`,
  result: (workerId: string, date: string) => `/workers/${workerId}/days/${date}`,
  storedResult: (id: string) => `/results/${id}`,
  shift: (id: string) => `/shifts/${id}`,
  duties: "/due",
  findings: "/findings",
  finding: (id: string) => `/findings/${id}`,
  letters: "/letters",
  letter: (id: string) => `/letters/${id}`,
  runs: "/measuring/runs",
  newRun: "/measuring/runs/new",
  run: (id: string) => `/measuring/runs/${id}`,
  instruments: "/measuring/instruments",
  instrument: (id: string) => `/measuring/instruments/${id}`,
  toMeasure: "/measuring",
  workplaceChanges: "/measuring/changes",
  protectorsBefore: (changeId: string) => `/measuring/changes/${changeId}/protectors`,
  surveys: "/measuring/surveys",
  newSurvey: "/measuring/surveys/new",
  survey: (id: string) => `/measuring/surveys/${id}`,
  changeSurvey: (id: string) => `/measuring/surveys/${id}/change`,
  sample: "/measuring/sample",
  outAndBack: "/measuring/out-and-back",
  historyImports: "/measuring/histories/import",
  historyImport: (id: string) => `/measuring/histories/import/${id}`,
  history: (id: string) => `/measuring/histories/${id}`,
  recordings: "/measuring/recordings",
  recording: (id: string) => `/measuring/recordings/${id}`,
  group: (jobId: string) => `/measuring/groups/${jobId}`,
  protectors: "/protectors",
  protector: (id: string) => `/protectors/${id}`,
  newProtector: "/protectors/new",
  fitting: "/protectors/fitting",
  fittingOf: (workerId: string) => `/protectors/fitting/${workerId}`,
  fits: "/protectors/fits",
  choose: "/protectors/choose",
  /** Protectors compared for a task's noise. */
  chooseFor: (taskId: string) => `/protectors/choose?task=${taskId}`,
  stock: "/protectors/stock",
  wearing: "/protectors/wearing",
  wearingRound: "/protectors/wearing/round",
  signals: "/protectors/signals",
  newSignal: "/protectors/signals/new",
  signal: (id: string) => `/protectors/signals/${id}`,
  /** A protector in a task's noise by every method; `outerId` worn over it. */
  atEar: (id: string, of: { taskId: string; outerId?: string; workerId?: string }) => {
    const outer = of.outerId === undefined ? "" : `&with=${of.outerId}`;
    const worker = of.workerId === undefined ? "" : `&worker=${of.workerId}`;
    return `/protectors/${id}?task=${of.taskId}${outer}${worker}#at-ear`;
  },

  plans: "/plans",
  plan: (id: string) => `/plans/${id}`,
  tryChanges: "/plans/try",
  newTimetable: "/plans/timetable",
  newTimetableFor: (kind: "crew" | "job", id: string) => `/plans/timetable?${kind}=${id}`,
  timetable: (id: string) => `/plans/timetable/${id}`,
  tryChangesFor: (kind: "worker" | "job" | "area", id: string) => `/plans/try?${kind}=${id}`,

  rules: "/rules",
  site: (id: string) => `/rules/sites/${id}`,
  areas: "/rules/areas",
  zoneSign: (id: string) => `/rules/areas/${id}/sign`,
  tasks: "/rules/tasks",
  task: (id: string) => `/rules/tasks/${id}`,
  jobs: "/rules/jobs",
  crews: "/rules/crews",
  crew: (id: string) => `/rules/crews/${id}`,

  crewSheet: "/crew-sheet",
  crewSheetOf: (crewId: string) => `/crew-sheet/${crewId}`,
  /** Who of a crew is not in, and who is on loan. */
  crewPeople: (crewId: string) => `/crew-sheet/${crewId}/people`,
  /** What one shift's supervisor hands to the next. */
  handOvers: (crewId: string) => `/crew-sheet/${crewId}/hand-over`,
  me: "/me",
  account: "/account",
  myDay: (date: string) => `/me/days/${date}`,
  yearFile: "/year-file",
  /** Records drawn at random from a year. */
  draw: (id: string) => `/year-file/draws/${id}`,
  trail: "/trail",
  trailCheck: "/trail/check",
  /** Who outside keeps the trail's head. */
  trailHead: "/trail/head",
  people: "/people",
  visitors: "/people/visitors",
  groups: "/people/groups",
  /** Agencies and contractors: who does what for their people. */
  employers: "/workers-of-others",
  /** People of those employers who read their people's results, and what they read. */
  employerShares: "/people/employers",
  sharedResults: "/shared-results",
  /** How long people stay in the records, and erasing them. */
  retention: "/people/retention",
  /** Who read whose record. */
  reads: "/trail/reads",
  person: (id: string) => `/people/${id}`,
  sites: "/sites",
} as const;
