import type { Migration } from "../server/lib/migrator";

export const recordings: Migration = {
  name: "20261201130000-recordings",
  up: ({ context: db }) =>
    db.query(`
-- A calibrator's tone: what was measured of it. Its audio is not kept.
CREATE TABLE calibration_tones (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  file_name text NOT NULL CHECK (length(file_name) BETWEEN 1 AND 255),
  sha256 bytea NOT NULL,
  tone_db double precision NOT NULL CHECK (tone_db BETWEEN 70 AND 130),
  frequency_hz double precision NOT NULL CHECK (frequency_hz BETWEEN 100 AND 4000),
  channels jsonb NOT NULL,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('calibration_tones');
CALL make_append_only('calibration_tones');

-- The audio is a file like any other as long as it is here.
ALTER TABLE recordings DROP COLUMN audio_path, DROP CONSTRAINT recordings_state_check,
  ADD CONSTRAINT recordings_state CHECK (state IN ('uploaded', 'analysing', 'asked', 'analysed', 'failed', 'cancelled')),
  ADD COLUMN file_id uuid,
  -- Faults that an officer has accepted, each with the reason.
  ADD COLUMN accepted jsonb NOT NULL DEFAULT '[]',
  -- Attempts at the present analysis; one that fails too often is given up.
  ADD COLUMN tries int NOT NULL DEFAULT 0,
  ALTER COLUMN calibration SET NOT NULL,
  ADD CONSTRAINT recordings_audio_goes CHECK (file_id IS NULL OR state NOT IN ('failed', 'cancelled')),
  ADD CONSTRAINT recordings_audio_is_there CHECK (file_id IS NOT NULL OR state IN ('analysed', 'failed', 'cancelled')),
  ADD CONSTRAINT recordings_audio_reason CHECK (state <> 'analysed' OR file_id IS NULL OR delete_on IS NOT NULL),
  ADD FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id);
CREATE INDEX recordings_list ON recordings (organization_id, created_at DESC, id);
CREATE INDEX recordings_file ON recordings (file_id) WHERE file_id IS NOT NULL;

-- The recording that a level's spectrum comes from.
ALTER TABLE task_levels ADD COLUMN recording_id uuid,
  ADD FOREIGN KEY (organization_id, recording_id) REFERENCES recordings (organization_id, id);
CREATE INDEX task_levels_recording ON task_levels (recording_id) WHERE recording_id IS NOT NULL;
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE task_levels DROP COLUMN recording_id;
DELETE FROM recordings;
DROP INDEX recordings_list;
ALTER TABLE recordings DROP CONSTRAINT recordings_audio_goes, DROP CONSTRAINT recordings_audio_is_there,
  DROP CONSTRAINT recordings_audio_reason, DROP CONSTRAINT recordings_state,
  ADD CONSTRAINT recordings_state_check CHECK (state IN ('uploaded', 'analysing', 'analysed', 'failed', 'cancelled')),
  DROP COLUMN file_id, DROP COLUMN accepted, DROP COLUMN tries, ALTER COLUMN calibration DROP NOT NULL,
  ADD COLUMN audio_path text;
DROP TABLE calibration_tones;
`),
};
