import type { Migration } from "../server/lib/migrator";

export const issueReason: Migration = {
  name: "20261201152000-issue-reason",
  up: ({ context: db }) =>
    db.query(`
-- Why a device was handed out although only one kind was on offer, or none was in stock.
ALTER TABLE protector_issues ADD COLUMN reason text CHECK (length(reason) BETWEEN 3 AND 2000);
`),
  down: ({ context: db }) => db.query("ALTER TABLE protector_issues DROP COLUMN reason"),
};
