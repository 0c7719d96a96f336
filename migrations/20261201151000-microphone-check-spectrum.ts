import type { Migration } from "../server/lib/migrator";

export const microphoneCheckSpectrum: Migration = {
  name: "20261201151000-microphone-check-spectrum",
  up: ({ context: db }) =>
    db.query(`
-- The task's noise that a check's rating is taken against, as it stood; null: the reference noise.
ALTER TABLE microphone_checks ADD COLUMN spectrum jsonb;
-- The name stays when the audio goes.
ALTER TABLE microphone_check_files ALTER COLUMN file_id DROP NOT NULL;
`),
  down: ({ context: db }) =>
    db.query(`
DELETE FROM microphone_check_files WHERE file_id IS NULL;
ALTER TABLE microphone_check_files ALTER COLUMN file_id SET NOT NULL;
ALTER TABLE microphone_checks DROP COLUMN spectrum;
`),
};
