import { cancelRecording } from "../commands/cancel-recording";
import { deleteAudio } from "../commands/keep-recording";
import { rows } from "../lib/db";
import type { Recording } from "../models/survey";

/** A recording about which something is asked waits so long for the answer; speech does not lie about for ever. */
const ANSWER_DAYS = 7;

type Due = Pick<Recording, "id" | "state" | "fileId" | "fileName">;
const FACTS = `r.id, r.state, r.file_id AS "fileId", r.file_name AS "fileName"`;

/** Audio whose day has come, by its site's clock, and audio whose question nobody answered. */
export async function deleteAudioDue(organizationId: string): Promise<void> {
  const due = await rows<Due>(
    `SELECT ${FACTS} FROM recordings r JOIN sites s ON s.id = r.site_id WHERE r.file_id IS NOT NULL AND r.state = 'analysed'
       AND r.delete_on <= (now() AT TIME ZONE s.time_zone)::date FOR UPDATE OF r`,
  );
  for (const recording of due) await deleteAudio({ organizationId }, recording);
  const unanswered = await rows<Due>(
    `SELECT ${FACTS} FROM recordings r WHERE r.state = 'asked' AND r.updated_at < now() - interval '${ANSWER_DAYS} days' FOR UPDATE`,
  );
  for (const recording of unanswered) await cancelRecording({ organizationId }, recording);
}
