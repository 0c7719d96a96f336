import type { z } from "zod";
import {
  countedSamples,
  type DoseFigure,
  distribution,
  envelope as envelopeOf,
  evaluateHistory,
  type HistoryEvaluation,
  MISSING,
  type PartEvaluation,
  percentiles,
  runningDose,
  type Stretch,
  type StretchEvaluation,
} from "../../shared/acoustics/history";
import type { Unaccounted } from "../../shared/acoustics/types";
import type {
  Envelope,
  EnvelopeQuery,
  HistoryAnalysis,
  HistoryChannel,
  HistoryStretch,
  HistoryView,
} from "../../shared/schemas/history";
import { channelOf } from "../histories/channels";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import { historyPolicy } from "../policies";
import { levelsBetween } from "./history-levels";
import { type LabelledSettings, settingsToEvaluate } from "./meter-settings";

export interface HistoryFacts {
  id: string;
  siteId: string;
  runId: string;
  instrumentId: string;
  date: string;
  startsAt: string;
  intervalMs: number;
  valuesCount: number;
  channels: HistoryChannel[];
  stretches: HistoryStretch[];
  leftOut: Unaccounted | null;
}

const LEFT_OUT = `CASE WHEN v.stretches @> '[{"kind": "left-out"}]'
  THEN json_strip_nulls(json_build_object('how', coalesce(v.left_out_how, 'unknown'), 'levelDb', v.left_out_level_db)) END AS "leftOut"`;

/** What every reading of a history starts from. */
export async function historyFacts(id: string): Promise<HistoryFacts> {
  return only(
    await rows<HistoryFacts>(
      `SELECT h.id, h.site_id AS "siteId", h.run_id AS "runId", h.instrument_id AS "instrumentId", r.date::text AS date, ${isoInstant("h.starts_at")} AS "startsAt",
         h.interval_ms AS "intervalMs", h.values_count AS "valuesCount", h.channels, v.stretches, ${LEFT_OUT}
       FROM time_histories h JOIN time_history_revisions v ON v.id = h.current_revision_id JOIN runs r ON r.id = h.run_id WHERE h.id = :id`,
      { id },
    ),
  );
}

export async function historyView(actor: Actor, id: string): Promise<HistoryView> {
  const found = only(
    await rows<Omit<HistoryView, "can">>(
      `SELECT h.id, h.site_id AS "siteId", s.time_zone AS "timeZone", h.run_id AS "runId", r.worker_id AS "workerId", w.name AS "workerName", r.date::text AS date,
         i.name AS "instrumentName", i.serial_number AS "serialNumber", h.file_id AS "fileId", f.name AS "fileName", ${isoInstant("h.starts_at")} AS "startsAt",
         h.interval_ms AS "intervalMs", h.values_count AS "valuesCount", h.channels, v.stretches, ${LEFT_OUT}, rv.covers, rv.kept_reason AS "keptReason", h.is_void AS "isVoid", h.revision,
         u.name AS "authorName", ${isoInstant("v.created_at")} AS "savedAt",
         coalesce((SELECT json_object_agg(t.id, t.name) FROM tasks t
           WHERE t.id IN (SELECT (x->>'taskId')::uuid FROM jsonb_array_elements(v.stretches) x WHERE x ? 'taskId')), '{}') AS "taskNames",
         coalesce((SELECT json_agg(json_build_object('id', k.task_id, 'name', t.name, 'durationMin', k.duration_min) ORDER BY k.shift_starts, k.position)
           FROM (SELECT st.task_id, sum(st.duration_min) AS duration_min, min(sh.starts_at) AS shift_starts, min(st.position) AS position
                 FROM shifts sh JOIN shift_tasks st ON st.shift_revision_id = sh.current_revision_id
                 WHERE NOT sh.is_void AND sh.worker_id = r.worker_id AND sh.date = r.date AND (r.shift_id IS NULL OR sh.id = r.shift_id) GROUP BY st.task_id) k
           JOIN tasks t ON t.id = k.task_id), '[]') AS tasks
       FROM time_histories h JOIN time_history_revisions v ON v.id = h.current_revision_id JOIN sites s ON s.id = h.site_id JOIN runs r ON r.id = h.run_id
       JOIN run_revisions rv ON rv.id = r.current_revision_id JOIN instruments i ON i.id = h.instrument_id JOIN files f ON f.id = h.file_id
       LEFT JOIN workers w ON w.id = r.worker_id LEFT JOIN users u ON u.id = v.author_id WHERE h.id = :id`,
      { id },
    ),
  );
  return { ...found, can: abilities(historyPolicy, actor, found) };
}

/** Lowest and highest level of each bucket: what a chart draws, whatever the history's length. */
export async function historyEnvelope(
  id: string,
  query: z.output<typeof EnvelopeQuery>,
): Promise<Envelope> {
  const { intervalMs, valuesCount, channels } = await historyFacts(id);
  const index = (seconds: number) =>
    Math.min(valuesCount, Math.round((seconds * 1000) / intervalMs));
  const toIndex = query.toS === undefined ? valuesCount : Math.max(1, index(query.toS));
  const fromIndex = Math.min(index(query.fromS), toIndex - 1);
  const levels = await levelsBetween({ historyId: id, channels, fromIndex, toIndex });
  const count = Math.min(query.buckets, toIndex - fromIndex);
  const known = (values: Int16Array) =>
    Array.from(values, (value) => (value === MISSING ? null : value));
  return {
    fromS: (fromIndex * intervalMs) / 1000,
    bucketS: ((toIndex - fromIndex) * intervalMs) / 1000 / count,
    channels: Object.fromEntries(
      levels.map(({ kind, levels: ofChannel }) => {
        const { lowest, highest } = envelopeOf(ofChannel, count);
        return [channelOf(kind), { low: known(lowest), high: known(highest) }];
      }),
    ),
  };
}

/** A history's stretches by its values: each reaches from the value that begins nearest to it. */
export function toStretches(
  stretches: readonly HistoryStretch[],
  { intervalMs, valuesCount }: Pick<HistoryFacts, "intervalMs" | "valuesCount">,
): Stretch[] {
  const index = (seconds: number) =>
    Math.min(valuesCount, Math.round((seconds * 1000) / intervalMs));
  return stretches.map(({ kind, fromS, toS }, place) => ({
    id: String(place),
    kind,
    fromIndex: index(fromS),
    toIndex: Math.max(index(fromS), index(toS)),
  }));
}

/** What is computed of a history: its levels, the settings of its day, and the evaluation. */
export async function evaluateStored(
  facts: HistoryFacts,
  stretches: readonly HistoryStretch[] = facts.stretches,
) {
  const { id, siteId, instrumentId, date, intervalMs, valuesCount, channels } = facts;
  const { settings: labelled } = await settingsToEvaluate(siteId, instrumentId, date);
  const levels = await levelsBetween({
    historyId: id,
    channels,
    fromIndex: 0,
    toIndex: valuesCount,
  });
  const parts = toStretches(stretches, facts);
  const settings = labelled.map((one) => one.settings);
  return {
    labelled,
    settings,
    levels,
    parts,
    evaluation: evaluateHistory(levels, intervalMs / 1000, parts, settings),
  };
}

const POINTS = 300;
const SHARES_PCT = [1, 5, 10, 50, 90, 95, 99];

function readingsOf(
  part: PartEvaluation,
  labelled: readonly LabelledSettings[],
): HistoryAnalysis["counted"]["readings"] {
  return labelled.flatMap(({ settings, labels }, index) => {
    const dose: DoseFigure | null | undefined = part.doses[index];
    if (!dose) return [];
    const averageDb =
      isEnergy(settings) && part.laeq?.bound === dose.bound ? part.laeq.levelDb : dose.averageDb;
    return [
      {
        settings,
        dosePct: dose.dosePct,
        averageDb: averageDb !== null && averageDb >= 20 && averageDb <= 160 ? averageDb : null,
        lceqDb: null,
        lasMaxDb: null,
        peak: null,
        label: labels.join(" · "),
        bound: dose.bound,
        from: channelOf(dose.from),
      },
    ];
  });
}

const isEnergy = ({ exchangeRateDb, thresholdDb }: LabelledSettings["settings"]) =>
  exchangeRateDb === 3 && thresholdDb === null;

/** What a history comes to: with its stretches left out and with everything counted, by task, and as it grew. */
export async function historyAnalysis(id: string): Promise<HistoryAnalysis> {
  const facts = await historyFacts(id);
  const stored = await evaluateStored(facts);
  const { labelled, settings, levels, parts, evaluation } = stored;
  const intervalS = facts.intervalMs / 1000;
  // Percentiles and the distribution are of the A-weighted level as the ear follows it, or of its mean.
  const heard =
    levels.find(({ kind }) => kind === "las") ??
    levels.find(({ kind }) => kind === "laeq") ??
    levels[0]!;
  const mask = countedSamples(facts.valuesCount, parts);
  const everything = new Uint8Array(facts.valuesCount).fill(1);
  const summary = (part: PartEvaluation, counted: Uint8Array): HistoryAnalysis["counted"] => {
    const found = percentiles(heard.levels, counted, SHARES_PCT);
    const peak = part.peaks.find(({ weighting }) => weighting === "C") ?? part.peaks[0];
    return {
      durationS: part.durationS,
      readings: readingsOf(part, labelled),
      laeqDb: part.laeq?.bound === "exact" ? part.laeq.levelDb : null,
      lceqDb: part.lceq?.levelDb ?? null,
      lasMaxDb: part.maxSlow?.bound === "exact" ? part.maxSlow.levelDb : null,
      peak: peak ? { levelDb: peak.levelDb, weighting: peak.weighting } : null,
      percentilesDb: Object.fromEntries(
        (found ?? []).map((level, index) => [String(SHARES_PCT[index]), level]),
      ),
    };
  };
  const quarters = clockQuarters(facts);
  const points = evenPoints(facts.valuesCount);
  const ends = [...new Set([...points, ...quarters.map(({ toIndex }) => toIndex)])].toSorted(
    (a, b) => a - b,
  );
  const running = runningDose(levels, intervalS, parts, settings, ends);
  const dosesAt = (places: readonly number[]) => {
    const placeOf = new Map(ends.map((end, place) => [end, place]));
    return running.doses.map((dose) =>
      dose ? places.map((end) => dose.dosesPct[placeOf.get(end)!]!) : null,
    );
  };
  const atPoints = dosesAt(points);
  const atQuarters = dosesAt(quarters.map(({ toIndex }) => toIndex)).filter(
    (doses) => doses !== null,
  );
  return {
    counted: summary(evaluation.counted, mask),
    everything: summary(evaluation.everything, everything),
    tasks: await byTask(facts.stretches, evaluation),
    rest: restOf(stored, facts),
    distribution: distribution(heard.levels, mask).map(({ fromDb, sharePct }) => ({
      fromDb,
      sharePct,
    })),
    runningDose: running.doses.flatMap((dose, index) =>
      dose
        ? [
            {
              label: labelled[index]!.labels.join(" · "),
              settings: labelled[index]!.settings,
              bound: dose.bound,
              bucketS: (facts.valuesCount * intervalS) / points.length,
              dosePct: atPoints[index] ?? [],
            },
          ]
        : [],
    ),
    quarters: evaluateHistory(
      levels,
      intervalS,
      [...quarters, ...parts.filter(({ kind }) => kind === "left-out")],
      [],
    )
      .stretches.slice(0, quarters.length)
      .map(({ laeq, maxSlow }, place) => ({
        fromS: quarters[place]!.fromIndex * intervalS,
        toS: quarters[place]!.toIndex * intervalS,
        laeq: laeq && { levelDb: laeq.levelDb, bound: laeq.bound },
        slowMax: maxSlow && { levelDb: maxSlow.levelDb, bound: maxSlow.bound },
        dosePct: atQuarters.map((doses) => doses[place]!),
      })),
  };
}

function evenPoints(valuesCount: number): number[] {
  const count = Math.min(POINTS, valuesCount);
  return Array.from({ length: count }, (_, point) =>
    Math.ceil(((point + 1) * valuesCount) / count),
  );
}

const QUARTER_MS = 900_000;

/** Quarters of an hour by the clock: that of every zone is a whole number of them from UTC. */
function clockQuarters({
  startsAt,
  intervalMs,
  valuesCount,
}: Pick<HistoryFacts, "startsAt" | "intervalMs" | "valuesCount">): Stretch[] {
  const startMs = Date.parse(startsAt);
  const quarters: Stretch[] = [];
  let fromIndex = 0;
  let endMs = Math.floor(startMs / QUARTER_MS + 1) * QUARTER_MS;
  while (fromIndex < valuesCount) {
    const toIndex = Math.min(valuesCount, Math.ceil((endMs - startMs) / intervalMs));
    if (toIndex > fromIndex)
      quarters.push({ id: `quarter ${quarters.length}`, kind: "task", fromIndex, toIndex });
    fromIndex = toIndex;
    endMs += QUARTER_MS;
  }
  return quarters;
}

interface TaskSum {
  durationS: number;
  energy: number | null;
  laeqS: number;
  dosePct: number | null;
  sharePct: number | null;
}

/** Parts of one task together: energies add over their time, doses by themselves. What one part lacks the sum lacks. */
function sumOf(parts: readonly StretchEvaluation[]): TaskSum {
  const nothing: TaskSum = { durationS: 0, energy: 0, laeqS: 0, dosePct: 0, sharePct: 0 };
  return parts.reduce((known, part): TaskSum => {
    const laeq = part.laeq?.bound === "exact" ? part.laeq : null;
    const dose = part.doses[0] ?? null;
    return {
      durationS: known.durationS + part.durationS,
      energy:
        known.energy === null || !laeq
          ? null
          : known.energy + laeq.durationS * 10 ** (laeq.levelDb / 10),
      laeqS: known.laeqS + (laeq?.durationS ?? 0),
      dosePct: known.dosePct === null || !dose ? null : known.dosePct + dose.dosePct,
      sharePct:
        known.sharePct === null || part.energySharePct === null
          ? null
          : known.sharePct + part.energySharePct,
    };
  }, nothing);
}

/** A sum as it is shown; its share is that in the dose, else in the energy. */
function figuresOf(
  { durationS, energy, laeqS, dosePct, sharePct }: TaskSum,
  wholeDose: number | null,
): HistoryAnalysis["rest"] & object {
  return {
    durationS,
    laeqDb: energy !== null && energy > 0 && laeqS > 0 ? 10 * Math.log10(energy / laeqS) : null,
    dosePct,
    sharePct:
      dosePct !== null && wholeDose !== null && wholeDose > 0
        ? (100 * dosePct) / wholeDose
        : sharePct,
  };
}

const wholeDoseOf = ({ counted }: HistoryEvaluation) => counted.doses[0]?.dosePct ?? null;

async function byTask(
  stretches: readonly HistoryStretch[],
  evaluation: HistoryEvaluation,
): Promise<HistoryAnalysis["tasks"]> {
  const found = new Map<string, StretchEvaluation[]>();
  stretches.forEach((stretch, index) => {
    if (stretch.kind !== "task") return;
    found.set(stretch.taskId, [...(found.get(stretch.taskId) ?? []), evaluation.stretches[index]!]);
  });
  const ids = [...found.keys()];
  const names =
    ids.length === 0
      ? []
      : await rows<{ id: string; name: string }>(
          "SELECT id, name FROM tasks WHERE id = ANY ($1::uuid[])",
          [ids],
        );
  const nameOf = new Map(names.map(({ id, name }) => [id, name]));
  return [...found].map(([taskId, parts]) => ({
    taskId,
    taskName: nameOf.get(taskId) ?? "",
    ...figuresOf(sumOf(parts), wholeDoseOf(evaluation)),
  }));
}

/** The parts of a history that lie under no task's bracket. */
function gapsBetween(parts: readonly Stretch[], valuesCount: number): Stretch[] {
  const tasks = parts
    .filter(({ kind }) => kind === "task")
    .toSorted((a, b) => a.fromIndex - b.fromIndex);
  const gaps: Stretch[] = [];
  let fromIndex = 0;
  for (const end of [...tasks, { fromIndex: valuesCount, toIndex: valuesCount }]) {
    if (end.fromIndex > fromIndex)
      gaps.push({ id: `gap ${gaps.length}`, kind: "task", fromIndex, toIndex: end.fromIndex });
    fromIndex = Math.max(fromIndex, end.toIndex);
  }
  return gaps;
}

/** What counts and lies under no bracket; null where no bracket is drawn, or nothing is left. */
function restOf(
  { levels, parts, settings, evaluation }: Awaited<ReturnType<typeof evaluateStored>>,
  { intervalMs, valuesCount }: HistoryFacts,
): HistoryAnalysis["rest"] {
  const gaps = gapsBetween(parts, valuesCount);
  if (gaps.length === 0 || !parts.some(({ kind }) => kind === "task")) return null;
  const leftOut = parts.filter(({ kind }) => kind === "left-out");
  const { stretches } = evaluateHistory(
    levels,
    intervalMs / 1000,
    [...gaps, ...leftOut],
    settings.slice(0, 1),
  );
  const sum = sumOf(stretches.slice(0, gaps.length).filter(({ durationS }) => durationS > 0));
  return sum.durationS === 0 ? null : figuresOf(sum, wholeDoseOf(evaluation));
}
