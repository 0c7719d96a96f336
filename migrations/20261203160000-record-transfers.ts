import type { Migration } from "../server/lib/migrator";

/**
 * Handing a site's records over to the employer that follows (docs/decisions/017). Its free text is about an employer and who
 * signs for it, and about no worker: erase_person() sweeps it for names as any other.
 */
export const recordTransfers: Migration = {
  name: "20261203160000-record-transfers",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE record_transfers (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  -- The employer that follows.
  successor text NOT NULL CHECK (length(successor) BETWEEN 1 AND 200),
  -- The day on which the site ends here or passes on.
  passes_on date NOT NULL,
  note text NOT NULL CHECK (length(note) <= 2000),
  state text NOT NULL DEFAULT 'proposed' CHECK (state IN ('proposed', 'approved', 'done', 'withdrawn')),
  proposed_by uuid NOT NULL,
  proposed_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  approved_by uuid CHECK (approved_by <> proposed_by),
  approved_at timestamptz,
  withdrawn_by uuid,
  -- The successor's receipt: what they count over the file that they hold, and who signed for it on which day.
  received_sha256 bytea CHECK (length(received_sha256) = 32),
  signed_by text CHECK (length(signed_by) BETWEEN 1 AND 200),
  signed_on date,
  received_by uuid,
  received_at timestamptz,
  updated_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK ((approved_by IS NULL) = (approved_at IS NULL)),
  CHECK (CASE state WHEN 'proposed' THEN approved_by IS NULL WHEN 'withdrawn' THEN TRUE ELSE approved_by IS NOT NULL END),
  CHECK ((withdrawn_by IS NOT NULL) = (state = 'withdrawn')),
  CHECK (num_nulls(received_sha256, signed_by, signed_on, received_by, received_at) = CASE state WHEN 'done' THEN 0 ELSE 5 END),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, proposed_by) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, approved_by) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, withdrawn_by) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, received_by) REFERENCES users (organization_id, id)
);
-- A site passes on once at a time.
CREATE UNIQUE INDEX record_transfers_one_open ON record_transfers (site_id) WHERE state IN ('proposed', 'approved');
CREATE INDEX record_transfers_list ON record_transfers (site_id, proposed_at DESC, id);
CALL protect_tenant('record_transfers');

-- Files that went out whole.
CREATE TABLE record_transfer_files (
  organization_id uuid NOT NULL,
  transfer_id uuid NOT NULL,
  sha256 bytea NOT NULL CHECK (length(sha256) = 32),
  size_bytes bigint NOT NULL CHECK (size_bytes > 0),
  years int[] NOT NULL,
  taken_by uuid NOT NULL,
  taken_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  PRIMARY KEY (organization_id, transfer_id, sha256),
  FOREIGN KEY (organization_id, transfer_id) REFERENCES record_transfers (organization_id, id),
  FOREIGN KEY (organization_id, taken_by) REFERENCES users (organization_id, id)
);
CALL protect_tenant('record_transfer_files');
CALL make_append_only('record_transfer_files');

-- Nobody receives what was not handed out.
ALTER TABLE record_transfers ADD CONSTRAINT record_transfers_received
  FOREIGN KEY (organization_id, id, received_sha256) REFERENCES record_transfer_files (organization_id, transfer_id, sha256);

-- Nothing goes out before a second person said so, or after the receipt.
CREATE FUNCTION refuse_unapproved_transfer() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NOT EXISTS (SELECT 1 FROM record_transfers t WHERE t.organization_id = NEW.organization_id AND t.id = NEW.transfer_id AND t.state = 'approved') THEN
    RAISE EXCEPTION 'handing out records of transfer % is refused: it is not approved', NEW.transfer_id USING ERRCODE = 'restrict_violation';
  END IF;
  RETURN NEW;
END $$;
CREATE TRIGGER only_approved BEFORE INSERT ON record_transfer_files FOR EACH ROW EXECUTE FUNCTION refuse_unapproved_transfer();
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE record_transfers DROP CONSTRAINT record_transfers_received;
DROP TABLE record_transfer_files, record_transfers;
DROP FUNCTION refuse_unapproved_transfer;
`),
};
