import { randomUUID } from "node:crypto";
import { insertTaskLevel } from "../../server/commands/add-task-level";
import { adoptSurvey } from "../../server/commands/adopt-survey";
import { createSurvey } from "../../server/commands/create-survey";
import { endOuting } from "../../server/commands/end-outing";
import { recordCalibration } from "../../server/commands/record-calibration";
import { doubtsOf, insertRun, type RunRevisionFacts } from "../../server/commands/record-run";
import { recordWorkplaceChange } from "../../server/commands/record-workplace-change";
import { setRemeasureInterval } from "../../server/commands/set-remeasure-interval";
import { setSurveyState } from "../../server/commands/set-survey-state";
import { startOuting } from "../../server/commands/start-outing";
import { recordAudit } from "../../server/lib/audit";
import { Run } from "../../server/models/instrument";
import type { Survey } from "../../server/models/survey";
import { samplesOfSurveys } from "../../server/queries/survey-samples";
import { surveyHead } from "../../server/queries/surveys";
import { drawWorkers } from "../../shared/acoustics/survey-plan";
import { Settings } from "../../shared/schemas/evaluation";
import { LAEQ_SETTINGS, OutingReturn, OutingStart } from "../../shared/schemas/outing";
import { RiskFactors, SurveyInput } from "../../shared/schemas/survey";
import { TaskLevelInput } from "../../shared/schemas/task";
import { addDays } from "../../shared/time/zone";
import {
  CHANGES,
  type DemoSample,
  type DemoSurvey,
  FAILED_CALIBRATION,
  REMEASURE_AFTER_MONTHS,
  SURVEYS,
  TODAY,
  type When,
} from "../demo/measurements";
import { WORKERS } from "../demo/people";
import { CREWS, type DemoTask, INSTRUMENTS, SITES, type SiteKey, TASKS } from "../demo/programme";
import { type Demo, known, setUpAt, taskKey } from "./programme";
import { UNSTEADY_DB } from "./shifts";

const MINUTE_MS = 60_000;
/** A sample is followed by the walk to the next place. */
const WALK_MIN = 10;
const SAMPLES_FROM = "07:30";
/** Samples with the meter in a day, before the next day's begin. */
const SAMPLES_A_DAY = 9;
/** How far below a task's greatest peak and slow level its three samples lie. */
const BELOW_PEAK_DB = [1.6, 0, 2.4];
const BELOW_SLOW_DB = [0.9, 0, 0.6];
const CERTIFICATE_DAYS = 365;
const SAMPLE_MIN = 12;

export function dateOf(demo: Demo, site: SiteKey, when: When): string {
  const calendar = demo.calendar(site);
  return "daysAgo" in when
    ? calendar.daysAgo(when.daysAgo)
    : addDays(calendar.first, -when.beforeFirst);
}

const taskOf = (site: SiteKey, name: string): DemoTask =>
  TASKS.find((task) => task.site === site && task.name === name)!;

/** What was measured before the first day: calibrations on record, and the surveys that the levels rest on. */
export async function measureBeforehand(demo: Demo): Promise<void> {
  await recordCertificates(demo);
  for (const survey of SURVEYS.filter((one) => isBeforehand(demo, one)))
    await layOutSurvey(demo, survey);
}

/** What has been measured since, without the levels of any day; and what is planned. */
export async function measureSince(demo: Demo): Promise<void> {
  for (const site of Object.keys(SITES) as SiteKey[]) {
    const officer = demo.officer(site);
    await demo.at(setUpAt(demo.calendar(site)), () =>
      setRemeasureInterval(officer, known(demo.sites, site), null, REMEASURE_AFTER_MONTHS),
    );
  }
  await recordChanges(demo);
  for (const survey of SURVEYS.filter((one) => !isBeforehand(demo, one)))
    await layOutSurvey(demo, survey);
  await failCalibration(demo);
}

const isBeforehand = (demo: Demo, { site, to, levels }: DemoSurvey): boolean =>
  levels !== undefined || dateOf(demo, site, to) < demo.calendar(site).first;

async function recordCertificates(demo: Demo): Promise<void> {
  for (const { site, name, calibrationDueInDays } of INSTRUMENTS) {
    const calendar = demo.calendar(site);
    const instrument = known(demo.instruments, name);
    for (const yearsBefore of [2, 1]) {
      const dueOn = calendar.daysAgo((yearsBefore - 1) * CERTIFICATE_DAYS - calibrationDueInDays);
      const doneOn = addDays(dueOn, -CERTIFICATE_DAYS);
      await demo.at(calendar.instant(doneOn, "15:00"), () =>
        recordCalibration(demo.officer(site), instrument, SITES[site], {
          doneOn,
          hasPassed: true,
          foundErrorDb: 0.1 * yearsBefore,
          dueOn,
          certificateFileId: null,
          note: "",
        }),
      );
    }
  }
}

async function failCalibration(demo: Demo): Promise<void> {
  const { instrument, daysAgo, foundErrorDb, note } = FAILED_CALIBRATION;
  const { site } = INSTRUMENTS.find(({ name }) => name === instrument)!;
  const doneOn = demo.calendar(site).daysAgo(daysAgo);
  await demo.at(demo.calendar(site).instant(doneOn, "11:20"), () =>
    recordCalibration(demo.officer(site), known(demo.instruments, instrument), SITES[site], {
      doneOn,
      hasPassed: false,
      foundErrorDb,
      dueOn: null,
      certificateFileId: null,
      note,
    }),
  );
}

async function recordChanges(demo: Demo): Promise<void> {
  for (const { crew: crewName, day, task, kind, what } of CHANGES) {
    const crew = CREWS.find(({ name }) => name === crewName)!;
    const happenedOn = demo.calendar(crew.site).workdayAgo(crew, day);
    if (happenedOn === null) continue;
    const site = known(demo.sites, crew.site);
    await demo.at(demo.calendar(crew.site).instant(happenedOn, "16:00"), () =>
      recordWorkplaceChange(
        demo.officer(crew.site),
        site,
        { siteId: site.id, field: "taskId" },
        {
          siteId: site.id,
          areaId: null,
          jobId: null,
          taskId: known(demo.tasks, taskKey(crew.site, task)).id,
          kind,
          happenedOn,
          what,
        },
      ),
    );
  }
}

/** Plans a survey, takes its samples and, where its levels are told of, adopts them. */
async function layOutSurvey(demo: Demo, given: DemoSurvey): Promise<Survey> {
  const { site, state, name } = given;
  const calendar = demo.calendar(site);
  const officer = demo.officer(site);
  const fromDate = dateOf(demo, site, given.from);
  const toDate = dateOf(demo, site, given.to);
  const plannedOn = [addDays(fromDate, -6), calendar.daysAgo(1)].sort()[0]!;
  const { input, drawn } = plan(demo, given, fromDate, toDate);
  const survey = await demo.at(calendar.instant(plannedOn, "13:30"), () =>
    createSurvey(officer, input),
  );
  demo.surveys.set(name, { survey, drawn });
  if (state === "planned") return survey;
  await demo.at(calendar.instant(fromDate, "07:00"), () =>
    setSurveyState(officer, survey, { state: "measuring", note: null }),
  );
  const samples = [...(given.samples ?? []), ...samplesOfLevels(given)];
  for (const sample of samples) await takeSample(demo, site, survey, drawn, fromDate, sample);
  if (given.levels) await adopt(demo, given, survey, toDate);
  if (state === "done")
    await demo.at(calendar.instant(toDate, "16:30"), () =>
      setSurveyState(officer, survey, { state: "done", note: given.closingNote ?? null }),
    );
  return survey;
}

function plan(
  demo: Demo,
  { site, job, people, targets, reservations = [], riskFactors, ...facts }: DemoSurvey,
  fromDate: string,
  toDate: string,
): { input: SurveyInput; drawn: readonly string[] } {
  const idOf = (number: string) => known(demo.workers, number).id;
  const members = WORKERS.filter((one) => one.job === job).map(({ number }) =>
    known(demo.workers, number),
  );
  const present = members.filter(
    ({ hiredOn, leftOn }) => hiredOn <= fromDate && (leftOn === null || leftOn >= toDate),
  );
  const draw =
    "draw" in people
      ? drawWorkers(
          present.map(({ id }) => id),
          people.draw,
          facts.drawSeed,
        )
      : { drawn: [], reserve: [] };
  const named = "named" in people ? people.named.map(idOf) : [];
  const part = (name: "drawn" | "reserve" | "named") => (workerId: string) => ({
    workerId,
    part: name,
  });
  const input = SurveyInput.parse({
    siteId: known(demo.sites, site).id,
    jobId: known(demo.jobs, job).id,
    name: facts.name,
    purpose: facts.purpose,
    strategy: facts.strategy,
    drawSeed: facts.drawSeed,
    fromDate,
    toDate,
    observers: facts.observers,
    riskFactors: RiskFactors.parse(
      Object.fromEntries(
        Object.entries(riskFactors).map(([factor, [answer, note = ""]]) => [
          factor,
          { answer, note },
        ]),
      ),
    ),
    targets: targets.map(({ task, ...rest }) => ({
      ...rest,
      taskId: task === null ? null : known(demo.tasks, taskKey(site, task)).id,
    })),
    people: [
      ...draw.drawn.map(part("drawn")),
      ...draw.reserve.map(part("reserve")),
      ...named.map(part("named")),
    ],
    reservations: reservations.map(({ instrument, from, to }) => ({
      instrumentId: known(demo.instruments, instrument).id,
      fromDate: dateOf(demo, site, from),
      toDate: dateOf(demo, site, to),
    })),
  });
  return { input, drawn: draw.drawn };
}

/** The programme's samples of these tasks, one after the other through the days of the survey. */
function samplesOfLevels({ site, levels = [], targets, unusual, kept }: DemoSurvey): DemoSample[] {
  let count = 0;
  return levels.flatMap((name) => {
    const task = taskOf(site, name);
    const { sampleMin } = targets.find((one) => one.task === name)!;
    return task.samplesDb.map((levelDb, index): DemoSample => {
      const place = count++;
      const isKept = kept?.task === name && kept.sample === index;
      const startMin = (place % SAMPLES_A_DAY) * (Math.max(sampleMin, SAMPLE_MIN) + WALK_MIN);
      return {
        task: name,
        drawn: index,
        day: Math.floor(place / SAMPLES_A_DAY),
        at: laterBy(SAMPLES_FROM, startMin),
        durationMin: Math.max(sampleMin, SAMPLE_MIN),
        levelDb,
        peakDb: task.peakDb - BELOW_PEAK_DB[index]!,
        instrument: instrumentFor(task),
        place: `${task.area ?? name}, at the ear`,
        ...(index === 1 && unusual?.[name] ? { unusual: unusual[name] } : {}),
        ...(isKept ? { checks: kept.checks, keptReason: kept.reason } : {}),
      };
    });
  });
}

const instrumentFor = ({ site, metric }: DemoTask): string =>
  site === "ostmere"
    ? "Meter, class 1"
    : metric.kind === "lavg"
      ? "Dosimeter, red band"
      : "Meter, class 2";

function laterBy(time: string, minutes: number): string {
  const [hour = 0, minute = 0] = time.split(":").map(Number);
  const total = hour * 60 + minute + minutes;
  return `${String(Math.floor(total / 60)).padStart(2, "0")}:${String(total % 60).padStart(2, "0")}`;
}

/** A run with one sample, as it is after the meter is back. */
export async function takeSample(
  demo: Demo,
  site: SiteKey,
  survey: Survey,
  drawn: readonly string[],
  fromDate: string,
  sample: DemoSample,
): Promise<string> {
  const officer = demo.officer(site);
  const date = addDays(fromDate, sample.day);
  const start = demo.calendar(site).instant(date, sample.at);
  const end = new Date(start.getTime() + sample.durationMin * MINUTE_MS);
  const instrument = known(demo.instruments, sample.instrument);
  const [checkBeforeDb, checkAfterDb] = sample.checks ?? [94.0, 94.1];
  const facts = { checkBeforeDb, checkAfterDb, durationMin: sample.durationMin };
  const workerId = sample.drawn === null ? null : (drawn[sample.drawn % drawn.length] ?? null);
  return demo.at(end, async () => {
    const own = { ...facts, covers: "part" as const };
    const doubts = await doubtsOf({ instrumentId: instrument.id, workerId, date }, own, {
      shown: sample.doubts ?? [],
    });
    if (doubts.length > 0 && sample.keptReason === undefined)
      throw new Error(`a sample of ${survey.name} has doubts that nobody gives a reason for`);
    const runId = await insertRun(
      officer,
      {
        siteId: survey.siteId,
        instrumentId: instrument.id,
        workerId,
        surveyId: survey.id,
        taskId: sample.task === null ? null : known(demo.tasks, taskKey(site, sample.task)).id,
        place: sample.place ?? null,
        date,
        span: { from: start.toISOString(), to: end.toISOString() },
      },
      {
        ...own,
        keptReason: sample.keptReason ?? null,
        unusual: sample.unusual ?? null,
        doubts: doubts.map(({ code }) => code),
        readings: readingsOf(site, sample),
      },
    );
    await recordAudit(officer, {
      action: "record-sample",
      subjectKind: "run",
      subjectId: runId,
      values: { surveyId: survey.id, date, levelDb: sample.levelDb },
    });
    return runId;
  });
}

/** LAeq with LCeq, spectrum and peak; a dosimeter at Kettle Bend also the average under the task's own settings. */
function readingsOf(site: SiteKey, sample: DemoSample): RunRevisionFacts["readings"] {
  const none = { dosePct: null, averageDb: null, lceqDb: null, lasMaxDb: null, peak: null };
  const peak =
    sample.peakDb === undefined ? null : { levelDb: sample.peakDb, weighting: "C" as const };
  if (sample.task === null)
    return [{ ...none, settings: LAEQ_SETTINGS, averageDb: sample.levelDb, peak }];
  const task = taskOf(site, sample.task);
  const isDose = task.metric.kind === "lavg";
  const laeqDb = sample.levelDb + (isDose ? UNSTEADY_DB : 0);
  const byDb = sample.levelDb - task.levelDb;
  const index = Math.max(0, task.samplesDb.indexOf(sample.levelDb));
  const energy = {
    ...none,
    settings: LAEQ_SETTINGS,
    averageDb: laeqDb,
    lceqDb: task.lcMinusLaDb === null ? null : laeqDb + task.lcMinusLaDb,
    lasMaxDb: task.lasMaxDb === null ? null : task.lasMaxDb - (BELOW_SLOW_DB[index] ?? 0),
    peak,
    octaveBandsDb: shifted(task.octaveBandsDb, byDb + (isDose ? UNSTEADY_DB : 0)),
  };
  return task.metric.kind === "lavg"
    ? [
        energy,
        { ...none, settings: Settings.parse(task.metric.settings), averageDb: sample.levelDb },
      ]
    : [energy];
}

function shifted(
  bandsDb: DemoTask["octaveBandsDb"],
  byDb: number,
): [number | null, number, number, number, number, number, number, number] | null {
  if (bandsDb === null) return null;
  const [lowest, ...rest] = bandsDb;
  const [a, b, c, d, e, f, g] = rest.map((bandDb) => bandDb + byDb);
  return [lowest === null ? null : lowest + byDb, a!, b!, c!, d!, e!, f!, g!];
}

/** From a survey to the levels of its tasks. */
async function adopt(
  demo: Demo,
  { site, levels = [], levelsFrom, targets }: DemoSurvey,
  survey: Survey,
  toDate: string,
): Promise<void> {
  const officer = demo.officer(site);
  const effectiveFrom = levelsFrom ? dateOf(demo, site, levelsFrom) : demo.calendar(site).first;
  const positionOf = (name: string) => targets.findIndex(({ task }) => task === name);
  await demo.at(demo.calendar(site).instant(toDate, "15:30"), async () => {
    if (site === "ostmere") {
      await adoptSurvey(
        officer,
        survey,
        levels.map((name) => known(demo.tasks, taskKey(site, name))),
        {
          effectiveFrom,
          reason: "First measurement",
          keepsSpectrum: false,
          targets: levels.map((name) => ({
            position: positionOf(name),
            taskId: known(demo.tasks, taskKey(site, name)).id,
          })),
        },
      );
      return;
    }
    // Adopting gives energy levels; a 5 dB rule wants averages under its own settings, or levels that are steady.
    const samples = (await samplesOfSurveys([await surveyHead(survey.id)])).get(survey.id) ?? [];
    for (const name of levels) {
      const task = known(demo.tasks, taskKey(site, name));
      const { peakDb, ...facts } = taskOf(site, name);
      const input = TaskLevelInput.parse({
        ...facts,
        peak: { levelDb: peakDb, weighting: "C" },
        instrument: facts.metric.kind === "lavg" ? "dosimeter" : "class-2-meter",
        grade: "measured-group",
        effectiveFrom,
        reason: null,
      });
      const behind = samples
        .filter(({ taskId }) => taskId === task.id)
        .sort((a, b) => a.laeqDb! - b.laeqDb!);
      const levelsDb = [...facts.samplesDb].sort((a, b) => a - b);
      const number = await insertTaskLevel(officer, task, input, {
        survey: {
          surveyId: survey.id,
          strategy: "task",
          keptReasons: [],
          samples: behind.map(({ runId, runRevisionId }, index) => ({
            runId,
            runRevisionId,
            fromS: null,
            toS: null,
            levelDb: levelsDb[index]!,
          })),
        },
      });
      await recordAudit(officer, {
        action: "add-task-level",
        subjectKind: "task",
        subjectId: task.id,
        values: { number, surveyId: survey.id, levelDb: facts.levelDb },
      });
    }
  });
}

/** A task that is measured anew in the course of the story, with a survey of its own. */
export async function measureTaskAnew(
  demo: Demo,
  site: SiteKey,
  date: string,
  given: {
    task: string;
    job: string;
    survey: string;
    samplesDb: readonly number[];
    reason: string;
  },
): Promise<void> {
  const officer = demo.officer(site);
  const first = taskOf(site, given.task);
  const factor = (note: string) => ["yes", note] as const;
  const fromDate = addDays(date, -1);
  const { input, drawn } = plan(
    demo,
    {
      site,
      job: given.job,
      name: given.survey,
      purpose: given.reason,
      strategy: "task",
      state: "done",
      from: { daysAgo: 0 },
      to: { daysAgo: 0 },
      drawSeed: given.survey,
      observers: [officer.name],
      riskFactors: {
        impulse: ["no"],
        vibration: factor("Assessed on its own."),
        "ototoxic-substances": ["no"],
        "warning-signals": factor("As before."),
      },
      targets: [{ task: given.task, samplesCount: given.samplesDb.length, sampleMin: 10 }],
      people: { draw: 3 },
    },
    fromDate,
    date,
  );
  const task = known(demo.tasks, taskKey(site, given.task));
  const at = demo.calendar(site).instant(date, "14:50");
  const survey = await demo.at(demo.calendar(site).instant(fromDate, "06:30"), async () => {
    const created = await createSurvey(officer, input);
    await setSurveyState(officer, created, { state: "measuring", note: null });
    return created;
  });
  for (const [index, levelDb] of given.samplesDb.entries())
    await takeSample(demo, site, survey, drawn, fromDate, {
      task: given.task,
      drawn: index,
      day: 0,
      at: laterBy("09:00", index * 30),
      durationMin: SAMPLE_MIN,
      levelDb,
      peakDb: first.peakDb - BELOW_PEAK_DB[index % BELOW_PEAK_DB.length]!,
      instrument: instrumentFor(first),
      place: `${first.area}, at the ear`,
    });
  await demo.at(at, async () => {
    await adoptSurvey(officer, survey, [task], {
      effectiveFrom: date,
      reason: given.reason,
      keepsSpectrum: true,
      targets: [{ position: 0, taskId: task.id }],
    });
    await setSurveyState(officer, survey, { state: "done", note: given.reason });
  });
}

/** What is out on the day of filling, and what has come back. */
export async function sendOutToday(demo: Demo, now: Date): Promise<void> {
  const site = "ostmere";
  const calendar = demo.calendar(site);
  const officer = demo.officer(site);
  const siteFacts = { id: known(demo.sites, site).id, timeZone: SITES[site].timeZone };
  // Filled before dawn, the day has begun all the same: what it holds lies just behind.
  const shiftMs = Math.min(
    0,
    now.getTime() - 10 * MINUTE_MS - calendar.instant(calendar.today, "10:25").getTime(),
  );
  const at = (time: string) => new Date(calendar.instant(calendar.today, time).getTime() + shiftMs);
  const start = (instrument: string, worker: string, time: string, checkBeforeDb: number) =>
    demo.at(at(time), () =>
      startOuting(
        officer,
        siteFacts,
        known(demo.instruments, instrument),
        OutingStart.parse({
          instrumentId: known(demo.instruments, instrument).id,
          workerId: known(demo.workers, worker).id,
          date: calendar.today,
          outAt: at(time).toISOString(),
          checkBeforeDb,
        }),
      ),
    );
  for (const {
    instrument,
    worker,
    at: [outAt, backAt],
    checks,
    ...read
  } of TODAY.back) {
    const runId = await start(instrument, worker, outAt, checks[0]);
    await demo.at(at(backAt), async () => {
      const run = await Run.findByPk(runId);
      await endOuting(
        officer,
        run!,
        siteFacts,
        OutingReturn.parse({
          backAt: at(backAt).toISOString(),
          checkAfterDb: checks[1],
          covers: "part",
          readings: [
            {
              settings: INSTRUMENTS.find(({ name }) => name === instrument)!.presets[0],
              dosePct: null,
              averageDb: read.averageDb,
              lceqDb: null,
              lasMaxDb: null,
              peak: { levelDb: read.peakDb, weighting: "C" },
            },
          ],
          unusual: read.unusual,
        }),
        randomUUID(),
      );
    });
  }
  await start(TODAY.out.instrument, TODAY.out.worker, TODAY.out.at, TODAY.out.checkDb);
}
