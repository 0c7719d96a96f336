import { IdParams } from "../../shared/schemas/common";
import {
  CalibrationTone,
  RECORDING_LIMIT_BYTES,
  type RecordingCalibration,
  RecordingFaults,
  RecordingFilter,
  RecordingForm,
  RecordingKeep,
  RecordingPage,
  RecordingUse,
  RecordingView,
  TONE_LIMIT_BYTES,
  ToneForm,
} from "../../shared/schemas/recording";
import { ChangePreview } from "../../shared/schemas/site";
import { acceptRecordingFaults } from "../commands/accept-recording-faults";
import { adoptRecording, insertLevelOfRecording } from "../commands/adopt-recording";
import { cancelRecording } from "../commands/cancel-recording";
import { deleteAudio, keepRecording } from "../commands/keep-recording";
import { measureTone } from "../commands/measure-tone";
import { previewChange } from "../commands/preview-change";
import { startRecording } from "../commands/start-recording";
import { endpoint } from "../lib/endpoint";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { Recording } from "../models/survey";
import { Task } from "../models/task";
import { historyPolicy, may, programmePolicy, sitePolicy } from "../policies";
import { findTone, listRecordings, recordingView } from "../queries/recordings";

/** A look needs no reason yet; the row that bears this one is taken back. */
const PREVIEW = "preview";

/** The recording, locked, where this actor may change it. */
async function recordingToChange(actor: Actor, id: string): Promise<Recording> {
  const found = await findVisible(Recording, historyPolicy, id, actor, { lock: true });
  authorize(historyPolicy, actor, "change", found);
  return found;
}

/** The task of a form, where this actor may add to what is known of it. */
async function taskOf(actor: Actor, taskId: string): Promise<Task> {
  const task = await findVisible(Task, programmePolicy, taskId, actor);
  authorize(historyPolicy, actor, "change", task);
  return task;
}

async function timeZoneOf(actor: Actor, siteId: string): Promise<string> {
  return (await findVisible(Site, sitePolicy, siteId, actor)).timeZone;
}

/** Where a tone belongs: to its task's site, or to the site that is named. */
async function siteOfTone(actor: Actor, { taskId, siteId = "" }: ToneForm): Promise<string> {
  if (taskId !== undefined) return (await taskOf(actor, taskId)).siteId;
  const site = await findVisible(Site, sitePolicy, siteId, actor);
  authorize(historyPolicy, actor, "change", { siteId: site.id });
  return site.id;
}

async function resolveCalibration(
  given: RecordingForm["calibration"],
  siteId: string,
): Promise<RecordingCalibration> {
  if (given.kind !== "tone") return given;
  const tone = await findTone(given.toneId, siteId);
  if (!tone) throw unprocessable([issue(["calibration"], "tone-unknown")]);
  return { kind: "tone", tone };
}

export function defineRecordingRoutes(): void {
  endpoint.get(
    "/recordings",
    {
      summary: "Recordings, latest first; those whose audio is kept alone, where asked",
      may: may.readMeasuring,
      query: RecordingFilter,
      reply: RecordingPage,
    },
    ({ actor, query }) => listRecordings(actor, query),
  );

  endpoint.get(
    "/recordings/:id",
    {
      summary: "A recording: its progress, then its levels and spectra",
      may: may.readMeasuring,
      params: IdParams,
      reply: RecordingView,
    },
    async ({ actor, params }) => {
      const found = await findVisible(Recording, historyPolicy, params.id, actor);
      return recordingView(actor, found.id);
    },
  );

  endpoint.post(
    "/recordings",
    {
      summary: "Send in a recording of a task, to be analysed",
      may: may.officer,
      body: RecordingForm,
      reply: RecordingView,
      upload: { limitBytes: RECORDING_LIMIT_BYTES, toStore: true },
    },
    async ({ actor, body, staged }) => {
      const task = await taskOf(actor, body.taskId);
      const { calibration, file, keepReason, deleteOn } = body;
      const id = await startRecording(actor, staged!, {
        task,
        timeZone: await timeZoneOf(actor, task.siteId),
        fileName: file.name,
        calibration: await resolveCalibration(calibration, task.siteId),
        keepReason,
        deleteOn,
      });
      return recordingView(actor, id);
    },
  );

  endpoint.post(
    "/recordings/tones",
    {
      summary: "Measure a recording of a calibrator's tone; its audio is not kept",
      may: may.officer,
      body: ToneForm,
      reply: CalibrationTone,
      upload: { limitBytes: TONE_LIMIT_BYTES, toStore: true },
    },
    async ({ actor, body, staged }) => {
      const siteId = await siteOfTone(actor, body);
      const { toneDb, frequencyHz, file } = body;
      return measureTone(actor, staged!, { siteId, fileName: file.name, toneDb, frequencyHz });
    },
  );

  endpoint.post(
    "/recordings/:id/cancel",
    {
      summary: "Give a recording up, with its audio",
      may: may.officer,
      params: IdParams,
      reply: RecordingView,
      status: 200,
    },
    async ({ actor, params }) => {
      const found = await recordingToChange(actor, params.id);
      await cancelRecording(actor, found);
      return recordingView(actor, found.id);
    },
  );

  endpoint.post(
    "/recordings/:id/faults",
    {
      summary: "Accept faults of a recording, with the reason, and analyse it with them",
      may: may.officer,
      params: IdParams,
      body: RecordingFaults,
      reply: RecordingView,
      status: 202,
    },
    async ({ actor, params, body }) => {
      const found = await recordingToChange(actor, params.id);
      await acceptRecordingFaults(actor, found, body);
      return recordingView(actor, found.id);
    },
  );

  endpoint.post(
    "/recordings/:id/keeping",
    {
      summary: "Keep a recording's audio for a reason and until a day",
      may: may.officer,
      params: IdParams,
      body: RecordingKeep,
      reply: RecordingView,
      status: 200,
    },
    async ({ actor, params, body }) => {
      const found = await recordingToChange(actor, params.id);
      await keepRecording(actor, found, await timeZoneOf(actor, found.siteId), body);
      return recordingView(actor, found.id);
    },
  );

  endpoint.post(
    "/recordings/:id/audio-deletion",
    {
      summary: "Delete a recording's kept audio at once; its levels stay",
      may: may.officer,
      params: IdParams,
      reply: RecordingView,
      status: 200,
    },
    async ({ actor, params }) => {
      const found = await recordingToChange(actor, params.id);
      await deleteAudio(actor, found);
      return recordingView(actor, found.id);
    },
  );

  endpoint.post(
    "/recordings/:id/adoption/preview",
    {
      summary: "Who would change verdict if a recording became its task's level",
      may: may.officer,
      params: IdParams,
      body: RecordingUse,
      reply: ChangePreview,
      storesNothing: true,
    },
    async ({ actor, params, body }) => {
      const found = await recordingToChange(actor, params.id);
      const task = await findVisible(Task, programmePolicy, found.taskId, actor);
      return previewChange(actor, { taskId: task.id, fromDate: body.effectiveFrom }, () =>
        insertLevelOfRecording(actor, found, task, { ...body, reason: body.reason ?? PREVIEW }),
      );
    },
  );

  endpoint.post(
    "/recordings/:id/adoption",
    {
      summary: "A recording becomes its task's level, or gives the task's level its spectrum",
      may: may.officer,
      params: IdParams,
      body: RecordingUse,
      reply: RecordingView,
    },
    async ({ actor, params, body }) => {
      const found = await recordingToChange(actor, params.id);
      const task = await findVisible(Task, programmePolicy, found.taskId, actor, { lock: true });
      await adoptRecording(actor, found, task, body);
      return recordingView(actor, found.id);
    },
  );
}
