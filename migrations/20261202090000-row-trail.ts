import type { Migration } from "../server/lib/migrator";

/**
 * Binds rows to the trail (docs/decisions/013): each statement that changes rows of a watched table appends one entry with
 * the keys and digests of the rows as they then are; the sealer chains entries as it does events. After the last migration
 * the migrator calls watch_rows(), which takes in new tables and columns. A migration that removes or alters a column of a
 * watched table calls watch_table() for it before it changes rows.
 */
export const rowTrail: Migration = {
  name: "20261202090000-row-trail",
  up: ({ context: db }) =>
    db.query(`
-- The columns that a digest covers, in their order. They only grow in number: an old entry is checked by its own shape.
CREATE TABLE trail_shapes (
  id int GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  table_name text NOT NULL,
  columns text[] NOT NULL,
  types text[] NOT NULL,
  made_at timestamptz NOT NULL DEFAULT clock_timestamp()
);
CALL make_append_only('trail_shapes');

CREATE TABLE trail_entries (
  id bigint GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  organization_id uuid NOT NULL REFERENCES organizations,
  at timestamptz NOT NULL DEFAULT clock_timestamp(),
  transaction_id xid8 NOT NULL DEFAULT pg_current_xact_id(),
  role_name text NOT NULL DEFAULT session_user,
  table_name text NOT NULL,
  operation text NOT NULL CHECK (operation IN ('insert', 'update', 'delete', 'state')),
  shape_id int NOT NULL REFERENCES trail_shapes,
  keys text[] NOT NULL,
  -- SHA-256 of each row's text; null for rows removed.
  digests bytea[],
  CHECK ((operation = 'delete') = (digests IS NULL))
);
CREATE INDEX trail_entries_table ON trail_entries (organization_id, table_name, id);
CREATE INDEX trail_entries_transaction ON trail_entries (organization_id, transaction_id);
CALL protect_tenant('trail_entries');
CALL make_append_only('trail_entries');
CREATE INDEX audit_events_transaction ON audit_events (organization_id, transaction_id);

ALTER TABLE audit_seals ALTER COLUMN event_id DROP NOT NULL,
  ADD COLUMN entry_id bigint UNIQUE REFERENCES trail_entries,
  ADD CONSTRAINT audit_seals_one CHECK (num_nonnulls(event_id, entry_id) = 1);

-- Whatever was written by a transaction before this one has its seal: what is left to seal is found without reading all.
CREATE TABLE trail_floors (
  organization_id uuid PRIMARY KEY REFERENCES organizations,
  transaction_id xid8 NOT NULL
);
CALL protect_tenant('trail_floors');

CREATE VIEW watched_tables AS
SELECT c.oid::regclass AS target, c.relname::text AS table_name,
  CASE c.relname WHEN 'organizations' THEN 'id' ELSE 'organization_id' END AS owner_column,
  (SELECT array_agg(a.attname::text ORDER BY a.attnum) FROM pg_attribute a WHERE a.attrelid = c.oid AND a.attnum > 0 AND NOT a.attisdropped) AS columns,
  (SELECT array_agg(format_type(a.atttypid, a.atttypmod) ORDER BY a.attnum) FROM pg_attribute a WHERE a.attrelid = c.oid AND a.attnum > 0 AND NOT a.attisdropped) AS types,
  (SELECT array_agg(a.attname::text ORDER BY k.place) FROM pg_index i, unnest(i.indkey) WITH ORDINALITY k(attnum, place)
     JOIN pg_attribute a ON a.attnum = k.attnum WHERE i.indrelid = c.oid AND i.indisprimary AND a.attrelid = c.oid) AS key_columns
FROM pg_class c
WHERE c.relnamespace = 'public'::regnamespace AND c.relkind = 'r'
  AND (c.relname = 'organizations' OR EXISTS (SELECT 1 FROM pg_attribute a WHERE a.attrelid = c.oid AND a.attname = 'organization_id' AND NOT a.attisdropped))
  AND c.relname NOT IN ('idempotency_keys', 'audit_events', 'audit_values', 'audit_seals', 'trail_entries', 'trail_floors');

-- SQL over the row t.
CREATE FUNCTION row_key_sql(key_columns text[]) RETURNS text LANGUAGE sql IMMUTABLE AS $$
  SELECT 'concat_ws('' '', ' || string_agg(format('t.%I::text', c), ', ' ORDER BY place) || ')' FROM unnest(key_columns) WITH ORDINALITY u(c, place)
$$;
CREATE FUNCTION row_digest_sql(columns text[]) RETURNS text LANGUAGE sql IMMUTABLE AS $$
  SELECT 'sha256(convert_to(ROW(' || string_agg(format('t.%I', c), ', ' ORDER BY place) || ')::text, ''UTF8''))' FROM unnest(columns) WITH ORDINALITY u(c, place)
$$;

-- Says of rows how they stand: where the trail of a table begins, and for what is filled in without triggers.
CREATE PROCEDURE state_rows(watched regclass, condition text) LANGUAGE plpgsql
  SET timezone = 'UTC' SET datestyle = 'ISO, YMD' SET intervalstyle = 'postgres' SET extra_float_digits = 1 SET bytea_output = 'hex' AS $$
DECLARE
  w record;
  shape int;
BEGIN
  SELECT * INTO STRICT w FROM watched_tables WHERE target = watched;
  SELECT max(id) INTO STRICT shape FROM trail_shapes WHERE table_name = w.table_name;
  EXECUTE format($s$
    INSERT INTO trail_entries (organization_id, table_name, operation, shape_id, keys, digests)
    SELECT organization_id, %1$L, 'state', %2$s, array_agg(key), array_agg(digest) FROM (
      SELECT t.%3$I AS organization_id, %4$s AS key, %5$s AS digest, (row_number() OVER () - 1) / 1000 AS part FROM %6$s t WHERE %7$s) r
    GROUP BY organization_id, part $s$,
    w.table_name, shape, w.owner_column, row_key_sql(w.key_columns), row_digest_sql(w.columns), watched, condition);
END $$;

CREATE PROCEDURE watch_table(watched regclass) LANGUAGE plpgsql
  SET timezone = 'UTC' SET datestyle = 'ISO, YMD' SET intervalstyle = 'postgres' SET extra_float_digits = 1 SET bytea_output = 'hex' AS $$
DECLARE
  w record;
  before trail_shapes;
  shape int;
  condition text := 'TRUE';
BEGIN
  SELECT * INTO STRICT w FROM watched_tables WHERE target = watched;
  IF w.key_columns IS NULL THEN RAISE EXCEPTION '% has no primary key to name its rows by', w.table_name; END IF;
  SELECT * INTO before FROM trail_shapes WHERE table_name = w.table_name ORDER BY id DESC LIMIT 1;
  IF before.columns = w.columns AND before.types = w.types
    AND (SELECT count(*) FROM pg_trigger WHERE tgrelid = watched AND tgname IN ('trail_insert', 'trail_update', 'trail_delete')) = 3 THEN
    RETURN;
  END IF;
  INSERT INTO trail_shapes (table_name, columns, types) VALUES (w.table_name, w.columns, w.types) RETURNING id INTO shape;

  EXECUTE format($f$
    CREATE OR REPLACE FUNCTION %I() RETURNS trigger LANGUAGE plpgsql
      SET timezone = 'UTC' SET datestyle = 'ISO, YMD' SET intervalstyle = 'postgres' SET extra_float_digits = 1 SET bytea_output = 'hex' AS $t$
    BEGIN
      IF TG_OP = 'DELETE' THEN
        INSERT INTO trail_entries (organization_id, table_name, operation, shape_id, keys)
        SELECT t.%2$I, %3$L, 'delete', %4$s, array_agg(%5$s) FROM old_rows t GROUP BY 1;
      ELSE
        INSERT INTO trail_entries (organization_id, table_name, operation, shape_id, keys, digests)
        SELECT t.%2$I, %3$L, lower(TG_OP), %4$s, array_agg(%5$s), array_agg(%6$s) FROM new_rows t GROUP BY 1;
      END IF;
      RETURN NULL;
    END $t$ $f$,
    'trail_of_' || w.table_name, w.owner_column, w.table_name, shape, row_key_sql(w.key_columns), row_digest_sql(w.columns));
  EXECUTE format('DROP TRIGGER IF EXISTS trail_insert ON %s; DROP TRIGGER IF EXISTS trail_update ON %1$s; DROP TRIGGER IF EXISTS trail_delete ON %1$s', watched);
  EXECUTE format('CREATE TRIGGER trail_insert AFTER INSERT ON %s REFERENCING NEW TABLE AS new_rows FOR EACH STATEMENT EXECUTE FUNCTION %I()', watched, 'trail_of_' || w.table_name);
  EXECUTE format('CREATE TRIGGER trail_update AFTER UPDATE ON %s REFERENCING NEW TABLE AS new_rows FOR EACH STATEMENT EXECUTE FUNCTION %I()', watched, 'trail_of_' || w.table_name);
  EXECUTE format('CREATE TRIGGER trail_delete AFTER DELETE ON %s REFERENCING OLD TABLE AS old_rows FOR EACH STATEMENT EXECUTE FUNCTION %I()', watched, 'trail_of_' || w.table_name);

  -- Rows as they stand: all at first; later those that are what their last entry says, so that nothing is whitewashed.
  IF before.id IS NOT NULL AND NOT EXISTS (
    SELECT 1 FROM unnest(before.columns, before.types) b(c, y) WHERE NOT EXISTS (SELECT 1 FROM unnest(w.columns, w.types) n(c, y) WHERE n.c = b.c AND n.y = b.y)
  ) THEN
    -- One reading of the entries for all rows.
    condition := format($c$ (t.%2$I, %3$s, %4$s) IN (SELECT o.id, l.key, l.digest FROM organizations o, last_entries(%1$L, o.id) l) $c$,
      w.table_name, w.owner_column, row_key_sql(w.key_columns), row_digest_sql(before.columns));
  END IF;
  CALL state_rows(watched, condition);
END $$;

-- The last that the trail says of each row of a table; a removed row is none.
CREATE FUNCTION last_entries(of_table text, of_organization uuid)
RETURNS TABLE (key text, digest bytea, shape_id int) LANGUAGE sql STABLE AS $$
  SELECT l.key, l.digest, l.shape_id FROM (
    SELECT DISTINCT ON (u.key) u.key, u.digest, e.shape_id, e.operation
    FROM trail_entries e, unnest(e.keys, e.digests) u(key, digest)
    WHERE e.organization_id = of_organization AND e.table_name = of_table ORDER BY u.key, e.id DESC) l
  WHERE l.operation <> 'delete'
$$;

CREATE PROCEDURE watch_rows() LANGUAGE plpgsql AS $$
DECLARE w record;
BEGIN
  FOR w IN SELECT target FROM watched_tables ORDER BY table_name LOOP CALL watch_table(w.target); END LOOP;
END $$;
CALL watch_rows();
`),
  down: ({ context: db }) =>
    db.query(`
DO $$ DECLARE w record; BEGIN
  FOR w IN SELECT p.oid::regprocedure AS name FROM pg_proc p WHERE p.pronamespace = 'public'::regnamespace AND starts_with(p.proname, 'trail_of_') LOOP
    EXECUTE format('DROP FUNCTION %s CASCADE', w.name);
  END LOOP;
END $$;
DROP PROCEDURE watch_rows, watch_table, state_rows;
DROP FUNCTION last_entries, row_key_sql, row_digest_sql;
DROP VIEW watched_tables;
-- Without the entries their seals say nothing: the chain of the events alone can't be had back.
ALTER TABLE audit_seals DISABLE TRIGGER USER;
DELETE FROM audit_seals WHERE entry_id IS NOT NULL;
ALTER TABLE audit_seals ENABLE TRIGGER USER;
ALTER TABLE audit_seals DROP COLUMN entry_id, ALTER COLUMN event_id SET NOT NULL;
DROP INDEX audit_events_transaction;
DROP TABLE trail_floors, trail_entries, trail_shapes;
`),
};
