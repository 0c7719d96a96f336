import type { Migration } from "../server/lib/migrator";

/** A supervisor's word taken back within moments is a step of its own: what was said stays, and that it was undone. */
export const undoneSteps: Migration = {
  name: "20261203120000-undone-steps",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE finding_steps DROP CONSTRAINT finding_steps_kind_check;
ALTER TABLE finding_steps ADD CONSTRAINT finding_steps_kind_check
  CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone', 'rules-changed', 'handed-over', 'escalated', 'undone'));
`),
  // A step that was taken stays, in the nearest kind that there was for it before.
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE finding_steps DISABLE TRIGGER USER;
UPDATE finding_steps SET kind = 'state' WHERE kind = 'undone';
ALTER TABLE finding_steps ENABLE TRIGGER USER;
ALTER TABLE finding_steps DROP CONSTRAINT finding_steps_kind_check;
ALTER TABLE finding_steps ADD CONSTRAINT finding_steps_kind_check
  CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone', 'rules-changed', 'handed-over', 'escalated'));
`),
};
