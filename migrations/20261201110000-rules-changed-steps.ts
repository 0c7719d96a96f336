import type { Migration } from "../server/lib/migrator";

/** A step of its own where other rules, and not a correction, took the days from under a finding. */
export const rulesChangedSteps: Migration = {
  name: "20261201110000-rules-changed-steps",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE finding_steps DROP CONSTRAINT finding_steps_kind_check;
ALTER TABLE finding_steps ADD CONSTRAINT finding_steps_kind_check
  CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone', 'rules-changed'));
`),
  // A step that was taken stays, in the kind that there was for it before.
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE finding_steps DISABLE TRIGGER USER;
UPDATE finding_steps SET kind = 'evidence-gone' WHERE kind = 'rules-changed';
ALTER TABLE finding_steps ENABLE TRIGGER USER;
ALTER TABLE finding_steps DROP CONSTRAINT finding_steps_kind_check;
ALTER TABLE finding_steps ADD CONSTRAINT finding_steps_kind_check
  CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone'));
`),
};
