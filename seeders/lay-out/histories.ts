import { randomUUID } from "node:crypto";
import { Readable } from "node:stream";
import { changeHistoryStretches } from "../../server/commands/change-history-stretches";
import { endOuting } from "../../server/commands/end-outing";
import { HISTORY_MEDIA_TYPES } from "../../server/commands/start-history-import";
import { startOuting } from "../../server/commands/start-outing";
import { storeFile } from "../../server/commands/store-file";
import { storeHistory } from "../../server/commands/store-history";
import { kindOf } from "../../server/histories/channels";
import { CHUNK_VALUES, packLevels } from "../../server/histories/level-codec";
import { execute, rows } from "../../server/lib/db";
import { fileStore } from "../../server/lib/file-store";
import { Run } from "../../server/models/instrument";
import { TimeHistory } from "../../server/models/survey";
import { settingsToEvaluate } from "../../server/queries/meter-settings";
import { evaluateHistory } from "../../shared/acoustics/history";
import type { LevelMetric } from "../../shared/acoustics/types";
import { HistoryMapping, type HistoryReport, HistoryStretch } from "../../shared/schemas/history";
import { OutingReturn, OutingStart } from "../../shared/schemas/outing";
import { localDate, localTime } from "../../shared/time/zone";
import { type DemoHistory, FINE_HISTORY, HISTORIES } from "../demo/measurements";
import { SITES, type SiteKey, TASKS } from "../demo/programme";
import { type Block, knock, type LoggedLevels, levelsText, logLevels } from "./history-levels";
import { takeSample } from "./measurements";
import { type Demo, known } from "./programme";
import { type DatedStory, departureKey } from "./story";

/** So many days further back a shift is looked for. */
const SEARCH_DAYS = 12;
const SHIFT_INTERVAL_S = 1;
const FINE_INTERVAL_S = 0.125;
/** Longer stretches of work are cut by the break. */
const CUT_FROM_MIN = 60;
const BREAKS = ["Break", "Lunch room"];
const HEADINGS = { laeq: "LAeq", las: "LAS", lcpeak: "LCpeak" } as const;
/** Channels can be told apart in a file only by their order here. */
type Channel = keyof typeof HEADINGS;

interface LoggedShift {
  workerId: string;
  number: string;
  date: string;
  startsAt: Date;
  tasks: {
    taskId: string;
    name: string;
    durationMin: number;
    levelDb: number;
    peakDb: number;
    metric: LevelMetric;
  }[];
}

/** Time histories of whole shifts, and one of a sample. Each moves its day, which is computed at once. */
export async function layOutHistories(demo: Demo, story: DatedStory): Promise<void> {
  const logged: { given: DemoHistory; shift: LoggedShift }[] = [];
  const taken = new Set<string>();
  for (const given of HISTORIES) {
    const shift = await findShift(demo, story, given, taken);
    if (!shift) continue;
    taken.add(`${given.instrument} ${shift.date}`).add(departureKey(shift.number, shift.date));
    logged.push({ given, shift });
  }
  // An instrument goes out when it is back from where it was before.
  logged.sort((a, b) => a.shift.startsAt.getTime() - b.shift.startsAt.getTime());
  for (const { given, shift } of logged) await layOutHistory(demo, given, shift);
  await layOutFineHistory(demo);
}

/**
 * The latest shift of one of the workers that nothing else tells of: no departure, no run of the shift, and the instrument
 * at hand. Whose samples a survey drew is chance, and a sample is no reading of the shift.
 */
async function findShift(
  demo: Demo,
  story: DatedStory,
  { site, workers, daysAgo, instrument }: DemoHistory,
  taken: ReadonlySet<string>,
): Promise<LoggedShift | null> {
  const calendar = demo.calendar(site);
  const found = await demo.at(demo.now, () =>
    rows<LoggedShift>(
      `SELECT w.id AS "workerId", w.employee_number AS number, s.date::text AS date, s.starts_at AS "startsAt",
         json_agg(json_build_object('taskId', t.task_id, 'name', k.name, 'durationMin', t.duration_min, 'levelDb', l.level_db, 'peakDb', l.peak_db,
           'metric', l.metric) ORDER BY t.position) AS tasks
       FROM shifts s JOIN workers w ON w.id = s.worker_id JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id JOIN tasks k ON k.id = t.task_id
       JOIN LATERAL (SELECT * FROM task_levels x WHERE x.task_id = t.task_id AND x.effective_from <= s.date ORDER BY x.effective_from DESC, x.number DESC LIMIT 1) l ON TRUE
       WHERE w.employee_number IN (:workers) AND s.date BETWEEN :from AND :to AND NOT s.is_void
         AND NOT EXISTS (SELECT 1 FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id
           WHERE r.date = s.date AND ((r.worker_id = w.id AND v.covers <> 'part') OR r.instrument_id = :instrumentId))
       GROUP BY w.id, s.id ORDER BY s.date DESC, w.employee_number`,
      {
        workers,
        from: calendar.daysAgo(daysAgo + SEARCH_DAYS),
        to: calendar.daysAgo(daysAgo),
        instrumentId: known(demo.instruments, instrument).id,
      },
    ),
  );
  const isFree = ({ number, date }: LoggedShift) => {
    const key = departureKey(number, date);
    return !story.departures.has(key) && !taken.has(key) && !taken.has(`${instrument} ${date}`);
  };
  return found.find(isFree) ?? null;
}

interface TimedBlock extends Block {
  taskId: string;
  fromS: number;
  toS: number;
}

/** The shift in an order that a day may have: work, the break in its middle, and the rest of the work. */
function blocksOf({ tasks }: LoggedShift, deviationDb: number): TimedBlock[] {
  const work = tasks.filter(({ name }) => !BREAKS.includes(name));
  const pauses = tasks.filter(({ name }) => BREAKS.includes(name));
  const isCut = ({ durationMin }: LoggedShift["tasks"][number]) => durationMin >= CUT_FROM_MIN;
  const part = (share: number) => (task: LoggedShift["tasks"][number]) => ({
    ...task,
    durationMin: task.durationMin * share,
  });
  const short = work.filter((task) => !isCut(task));
  const ordered = [
    ...short.filter((_, index) => index % 2 === 0),
    ...work.filter(isCut).map(part(0.5)),
    ...pauses,
    ...work.filter(isCut).map(part(0.5)),
    ...short.filter((_, index) => index % 2 === 1),
  ];
  let fromS = 0;
  return ordered.map(({ taskId, name, metric, levelDb, peakDb, durationMin }) => {
    const seconds = durationMin * 60;
    const block = {
      taskId,
      name,
      metric,
      levelDb: levelDb + deviationDb,
      peakDb,
      seconds,
      fromS,
      toS: fromS + seconds,
    };
    fromS += seconds;
    return block;
  });
}

async function layOutHistory(demo: Demo, given: DemoHistory, shift: LoggedShift): Promise<void> {
  const { site, channels, survey, knocked } = given;
  const officer = demo.officer(site);
  const siteFacts = { id: known(demo.sites, site).id, timeZone: SITES[site].timeZone };
  const instrument = known(demo.instruments, given.instrument);
  const { workerId, number, date, startsAt } = shift;
  const blocks = blocksOf(shift, given.deviationDb);
  const levels = logLevels(blocks, SHIFT_INTERVAL_S, "history", number, given.daysAgo);
  const stretches = bracketsOf(given, blocks);
  if (knocked) {
    const block = blocks.find(({ name }) => name === knocked.task);
    const fromS = (block?.fromS ?? 0) + knocked.afterS;
    const toS = Math.min(block?.toS ?? 0, fromS + knocked.forS);
    if (toS > fromS) {
      knock(levels, fromS, toS, number);
      stretches.push({ kind: "left-out", fromS, toS, reason: knocked.reason });
    }
  }
  const endsAt = new Date(startsAt.getTime() + blocks.at(-1)!.toS * 1000);
  const runId = await demo.at(startsAt, () =>
    startOuting(
      officer,
      siteFacts,
      instrument,
      OutingStart.parse({
        instrumentId: instrument.id,
        workerId,
        surveyId: survey ? known(demo.surveys, survey).survey.id : null,
        date,
        outAt: startsAt.toISOString(),
        checkBeforeDb: 114.0,
      }),
    ),
  );
  await demo.at(later(endsAt, 10), async () => {
    const run = await Run.findByPk(runId);
    const back = OutingReturn.parse({
      backAt: endsAt.toISOString(),
      checkAfterDb: 113.9,
      covers: "shift",
      readings: [],
    });
    await endOuting(officer, run!, siteFacts, back, randomUUID());
  });
  const historyId = await demo.at(later(endsAt, 25), () =>
    store(demo, {
      site,
      instrument: given.instrument,
      runId,
      workerId,
      date,
      startsAt,
      intervalS: SHIFT_INTERVAL_S,
      channels,
      levels,
      covers: "shift",
      fileName: `${instrument.serialNumber.replace(" ", "-")} ${date}.csv`,
    }),
  );
  if (stretches.length === 0) return;
  await demo.at(later(endsAt, 55), async () => {
    const history = await TimeHistory.findByPk(historyId);
    await changeHistoryStretches(officer, history!, {
      stretches: stretches.map((stretch) => HistoryStretch.parse(stretch)),
      // The noise of the task went on while the microphone was knocked about.
      leftOut: knocked ? { how: "like-the-rest" } : null,
      keptReason: null,
      reason: knocked?.reason ?? null,
    });
  });
}

const later = (instant: Date, minutes: number) => new Date(instant.getTime() + minutes * 60_000);

function bracketsOf(
  { brackets = [] }: DemoHistory,
  blocks: readonly TimedBlock[],
): HistoryStretch[] {
  const bracketed =
    brackets === "all"
      ? blocks
      : brackets.flatMap((task) => blocks.find(({ name }) => name === task) ?? []);
  return bracketed.map(({ taskId, fromS, toS }) => ({ kind: "task", taskId, fromS, toS }));
}

interface Logged {
  site: SiteKey;
  instrument: string;
  runId: string;
  workerId: string | null;
  date: string;
  startsAt: Date;
  intervalS: number;
  channels: readonly Channel[];
  levels: LoggedLevels;
  covers: "shift" | "part";
  fileName: string;
}

/** What an import of the instrument's file would have stored: the file, its line in the list, and the history. */
async function store(demo: Demo, logged: Logged): Promise<string> {
  const { site, channels, levels, startsAt, intervalS, fileName } = logged;
  const officer = demo.officer(site);
  const siteId = known(demo.sites, site).id;
  const instrument = known(demo.instruments, logged.instrument);
  const { timeZone } = SITES[site];
  const intervalMs = intervalS * 1000;
  const startMs = startsAt.getTime();
  const local = `${localDate(startsAt, timeZone)}T${localTime(startsAt, timeZone)}:00Z`;
  const series = channels.map((channel) => ({ channel, levels: levels[channel] }));
  const text = levelsText(
    series.map((one) => ({ heading: HEADINGS[one.channel], levels: one.levels })),
    startMs,
    intervalMs,
    Date.parse(local) - startMs,
  );
  const staged = await fileStore().stage(Readable.from([text]), text.length + 1);
  const file = await storeFile(officer, staged, fileName, HISTORY_MEDIA_TYPES);
  const mapping = HistoryMapping.parse({
    skipLines: 1,
    decimal: ".",
    time: { kind: "date-time", column: 0 },
    levels: channels.map((channel, index) => ({ column: index + 1, channel })),
  });
  const valuesCount = levels.laeq.length;
  const report: HistoryReport = {
    lines: valuesCount + 1,
    valuesCount,
    intervalMs,
    startsAt: startsAt.toISOString(),
    endsAt: new Date(startMs + valuesCount * intervalMs).toISOString(),
    channels: series.map((one) => ({
      channel: one.channel,
      missing: 0,
      overRange: 0,
      underRange: 0,
      lowestDb: one.levels.reduce((low, level) => Math.min(low, level), 32_767) / 100,
      highestDb: one.levels.reduce((high, level) => Math.max(high, level), -32_767) / 100,
    })),
    issues: [],
    issuesCount: 0,
  };
  const { settings } = await settingsToEvaluate(siteId, instrument.id, logged.date);
  const evaluation = evaluateHistory(
    series.map((one) => ({ kind: kindOf(one.channel), levels: one.levels })),
    intervalS,
    [],
    settings.map((one) => one.settings),
  );
  const importId = randomUUID();
  const order = { covers: logged.covers, keptReason: null };
  await execute(
    `INSERT INTO history_imports (id, organization_id, site_id, instrument_id, file_id, file_name, size_bytes, run_id, worker_id, state, progress_pct,
       mapping, report, store_order, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, 'stored', 100, $10::jsonb, $11::jsonb, $12::jsonb, $13)`,
    [
      importId,
      demo.organizationId,
      siteId,
      instrument.id,
      file.id,
      fileName,
      staged.sizeBytes,
      logged.runId,
      logged.workerId,
      JSON.stringify(mapping),
      JSON.stringify(report),
      JSON.stringify({ ...order, userId: officer.userId }),
      officer.userId,
    ],
  );
  const historyId = await storeHistory(
    officer,
    {
      importId,
      siteId,
      timeZone,
      instrumentId: instrument.id,
      fileId: file.id,
      fileName,
      runId: logged.runId,
      workerId: logged.workerId,
      mapping,
      order,
    },
    {
      report,
      history: {
        startMs,
        intervalMs,
        valuesCount,
        channels: series.map((one) => ({ channel: one.channel, chunks: chunksOf(one.levels) })),
        evaluation,
      },
    },
    settings,
  );
  await execute("UPDATE history_imports SET history_id = $2 WHERE id = $1", [importId, historyId]);
  return historyId;
}

function chunksOf(levels: Int16Array): { valuesCount: number; packed: Uint8Array }[] {
  return Array.from({ length: Math.ceil(levels.length / CHUNK_VALUES) }, (_, index) => {
    const part = levels.subarray(index * CHUNK_VALUES, (index + 1) * CHUNK_VALUES);
    return { valuesCount: part.length, packed: packLevels(part) };
  });
}

/** The meter logged a sample of the survey under way eight times a second. */
async function layOutFineHistory(demo: Demo): Promise<void> {
  const { survey: name, task, durationMin, levelDb, day, at } = FINE_HISTORY;
  const site = "ostmere";
  const { survey, drawn } = known(demo.surveys, name);
  const facts = TASKS.find((one) => one.site === site && one.name === task)!;
  const runId = await takeSample(demo, site, survey, drawn, survey.fromDate, {
    ...FINE_HISTORY,
    drawn: 1,
    peakDb: facts.peakDb - 1,
  });
  const [run] = await demo.at(demo.now, () =>
    rows<{ date: string }>("SELECT date::text AS date FROM runs WHERE id = :runId", { runId }),
  );
  const startsAt = demo.calendar(site).instant(run!.date, at);
  const levels = logLevels(
    [
      {
        name: task,
        metric: facts.metric,
        levelDb,
        peakDb: facts.peakDb,
        seconds: durationMin * 60,
      },
    ],
    FINE_INTERVAL_S,
    "fine history",
    day,
  );
  await demo.at(later(startsAt, durationMin + 20), () =>
    store(demo, {
      site,
      instrument: FINE_HISTORY.instrument,
      runId,
      workerId: null,
      date: run!.date,
      startsAt,
      intervalS: FINE_INTERVAL_S,
      channels: ["laeq", "las", "lcpeak"],
      levels,
      covers: "part",
      fileName: `chipping sample ${run!.date}.csv`,
    }),
  );
}
