import { Readable } from "node:stream";
import { adoptRecording } from "../../server/commands/adopt-recording";
import { startRecording } from "../../server/commands/start-recording";
import { analyseStoredRecording } from "../../server/jobs/analyse-recording";
import { fileStore } from "../../server/lib/file-store";
import { Recording } from "../../server/models/survey";
import { RecordingUse } from "../../shared/schemas/recording";
import { RECORDINGS } from "../demo/measurements";
import { SITES, TASKS } from "../demo/programme";
import { type Demo, known, taskKey } from "./programme";
import { noiseRecording } from "./sound";

const SECONDS = 20;
/** A sine at full scale would read 120 dB. */
const PASCAL_PER_FULL_SCALE = 28.28;

/** A recording of a task at each site, by the application's own analysis; its spectrum goes under the task's level. */
export async function layOutRecordings(demo: Demo): Promise<void> {
  const { organizationId } = demo;
  for (const { site, task: name, daysAgo, at, fileName } of RECORDINGS) {
    const calendar = demo.calendar(site);
    const officer = demo.officer(site);
    const task = known(demo.tasks, taskKey(site, name));
    const octaveBandsDb = TASKS.find(
      (one) => one.site === site && one.name === name,
    )?.octaveBandsDb;
    if (!octaveBandsDb) throw new Error(`the demo records «${name}», which has no spectrum`);
    const recordedAt = calendar.instant(calendar.daysAgo(daysAgo), at);
    const bytes = noiseRecording(octaveBandsDb, SECONDS, PASCAL_PER_FULL_SCALE, name);
    const recordingId = await demo.at(recordedAt, async () => {
      const staged = await fileStore().stage(Readable.from([bytes]), bytes.length + 1);
      return startRecording(officer, staged, {
        task,
        timeZone: SITES[site].timeZone,
        fileName,
        calibration: { kind: "sensitivity", pascalPerFullScale: PASCAL_PER_FULL_SCALE },
        keepReason: null,
        deleteOn: null,
      });
    });
    await analyseStoredRecording({ organizationId, recordingId });
    await demo.at(new Date(recordedAt.getTime() + 600_000), async () => {
      const recording = await Recording.findByPk(recordingId);
      const use = RecordingUse.parse({
        how: "shape",
        channel: 1,
        effectiveFrom: calendar.today,
        reason: "Spectrum from a recording; the level itself stays.",
      });
      await adoptRecording(officer, recording!, task, use);
    });
  }
}
