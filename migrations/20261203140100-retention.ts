import type { Migration } from "../server/lib/migrator";

/**
 * How long records of people are kept, what is held beyond that, and erasing a person once two people said so
 * (docs/decisions/016). Append-only rows are rewritten by erase_person() alone: it runs as the owner, whoever calls it, and
 * holds to what was approved.
 */
export const retention: Migration = {
  name: "20261203140100-retention",
  up: ({ context: db }) =>
    db.query(`
-- The organization's own term, where it keeps longer or a rule sets none. The latest number counts.
CREATE TABLE retention_terms (
  organization_id uuid NOT NULL REFERENCES organizations,
  number int NOT NULL CHECK (number > 0),
  -- Null: none is set.
  years_after_leaving int CHECK (years_after_leaving BETWEEN 0 AND 100),
  set_by uuid NOT NULL,
  set_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (organization_id, number),
  FOREIGN KEY (organization_id, set_by) REFERENCES users (organization_id, id)
);
CALL protect_tenant('retention_terms');
CALL make_append_only('retention_terms');

-- While one stands nobody of the site, or not that worker, is erased.
CREATE TABLE legal_holds (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  -- Null: everybody of the site.
  worker_id uuid,
  reason text NOT NULL CHECK (length(reason) BETWEEN 3 AND 2000),
  placed_by uuid NOT NULL,
  placed_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  lifted_by uuid,
  lifted_at timestamptz,
  lifted_reason text CHECK (length(lifted_reason) BETWEEN 3 AND 2000),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK (num_nulls(lifted_by, lifted_at, lifted_reason) IN (0, 3)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, placed_by) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, lifted_by) REFERENCES users (organization_id, id)
);
CREATE INDEX legal_holds_standing ON legal_holds (site_id, worker_id) WHERE lifted_at IS NULL;
CALL protect_tenant('legal_holds');

CREATE TABLE erasures (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  state text NOT NULL DEFAULT 'proposed' CHECK (state IN ('proposed', 'approved', 'done', 'withdrawn')),
  proposed_by uuid NOT NULL,
  proposed_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  approved_by uuid CHECK (approved_by <> proposed_by),
  approved_at timestamptz,
  withdrawn_by uuid,
  done_at timestamptz,
  updated_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK ((approved_by IS NULL) = (approved_at IS NULL)),
  CHECK ((approved_by IS NOT NULL) = (state IN ('approved', 'done'))),
  CHECK ((withdrawn_by IS NOT NULL) = (state = 'withdrawn')),
  CHECK ((done_at IS NOT NULL) = (state = 'done')),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, proposed_by) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, approved_by) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, withdrawn_by) REFERENCES users (organization_id, id)
);
CREATE INDEX erasures_list ON erasures (site_id, proposed_at DESC, id);
CALL protect_tenant('erasures');

CREATE TABLE erasure_people (
  erasure_id uuid NOT NULL,
  organization_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  -- The last day of the longest term that applied when it was proposed.
  keep_until date NOT NULL,
  state text NOT NULL DEFAULT 'waiting' CHECK (state IN ('waiting', 'erased', 'kept')),
  -- Why somebody was left as they are after all.
  kept_because text CHECK (kept_because IN ('withdrawn', 'held', 'not-due', 'no-term', 'employed', 'open-finding', 'other-role')),
  erased jsonb,
  done_at timestamptz,
  PRIMARY KEY (erasure_id, worker_id),
  CHECK ((state = 'kept') = (kept_because IS NOT NULL)),
  CHECK ((state = 'erased') = (erased IS NOT NULL)),
  CHECK ((state = 'waiting') = (done_at IS NULL)),
  FOREIGN KEY (organization_id, erasure_id) REFERENCES erasures (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
-- Nobody is in two of them at once, or erased twice.
CREATE UNIQUE INDEX erasure_people_once ON erasure_people (worker_id) WHERE state <> 'kept';
CALL protect_tenant('erasure_people');

-- Events whose values an erasure took away: values that are gone without standing here were removed.
CREATE TABLE erased_values (
  event_id bigint PRIMARY KEY REFERENCES audit_events,
  organization_id uuid NOT NULL,
  erasure_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  FOREIGN KEY (organization_id, erasure_id) REFERENCES erasures (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
CALL protect_tenant('erased_values');
CALL make_append_only('erased_values');

-- A file whose content was erased; what named it still does.
ALTER TABLE files ADD COLUMN erased_at timestamptz;

CREATE OR REPLACE FUNCTION refuse_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  -- Inside erase_person() only, which runs as the owner of the tables.
  IF TG_OP = 'UPDATE' AND current_setting('app.erasing', true) = 'yes' AND current_user <> session_user
    AND current_user = (SELECT pg_get_userbyid(c.relowner) FROM pg_class c WHERE c.oid = TG_RELID) THEN
    RETURN NEW;
  END IF;
  RAISE EXCEPTION '% on % is refused: records are append-only', TG_OP, TG_TABLE_NAME USING ERRCODE = 'restrict_violation';
END $$;

/*
 * Takes a former worker's person out of the records: name, number, address, free text, files, what events kept of values. Rows
 * and figures stay, under new_name and new_number; mark stands where free text was. In texts that the program made, such as
 * letters and notices, the name is replaced. Every row that changes gets its entry in the trail from the triggers.
 */
CREATE FUNCTION erase_person(of_erasure uuid, person uuid, new_name text, new_number text, mark text) RETURNS jsonb
  LANGUAGE plpgsql SECURITY DEFINER SET search_path = public, pg_temp AS $$
DECLARE
  org uuid := current_organization();
  old workers;
  users_of uuid[];
  addresses text[];
  -- Names and addresses with what stands in their place; in HTML they are written with their marks escaped.
  found text[];
  put text[];
  pattern text;
  is_shared boolean;
  affected int;
  notes int := 0;
  messages int := 0;
  accounts int := 0;
  taken_values int := 0;
  removed text[];
  c record;
  i int;
BEGIN
  SELECT * INTO STRICT old FROM workers WHERE id = person AND organization_id = org FOR UPDATE;
  IF NOT EXISTS (
    SELECT 1 FROM erasures e JOIN erasure_people p ON p.erasure_id = e.id
    WHERE e.id = of_erasure AND e.organization_id = org AND e.state = 'approved' AND p.worker_id = person AND p.state = 'waiting' AND p.keep_until < current_date
  ) OR old.left_on IS NULL OR old.left_on >= current_date
    OR EXISTS (SELECT 1 FROM legal_holds h WHERE h.organization_id = org AND h.lifted_at IS NULL AND (h.worker_id = person OR (h.worker_id IS NULL AND h.site_id = old.site_id))) THEN
    RAISE EXCEPTION 'erasing % is refused: it was not approved, is not due, or is held', person USING ERRCODE = 'restrict_violation';
  END IF;
  PERFORM set_config('app.erasing', 'yes', true);
  SELECT array_agg(id), array_remove(array_agg(email), NULL) INTO users_of, addresses FROM users WHERE organization_id = org AND worker_id = person;
  users_of := coalesce(users_of, '{}');
  addresses := coalesce(addresses, '{}');
  is_shared := EXISTS (SELECT 1 FROM workers w WHERE w.organization_id = org AND w.id <> person AND w.name = old.name)
    OR EXISTS (SELECT 1 FROM users u WHERE u.organization_id = org AND u.id <> ALL (users_of) AND u.name = old.name);

  -- What events kept of values: those about the person and what is theirs, and those that name them.
  WITH about AS (
    SELECT v.event_id FROM audit_values v JOIN audit_events e ON e.id = v.event_id
    WHERE v.organization_id = org AND (
      (e.subject_kind = 'worker' AND e.subject_id = person)
      OR (e.subject_kind = 'user' AND e.subject_id = ANY (users_of))
      OR (e.subject_kind = 'shift' AND EXISTS (SELECT 1 FROM shifts x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'run' AND EXISTS (SELECT 1 FROM runs x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'finding' AND EXISTS (SELECT 1 FROM findings x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'letter' AND EXISTS (SELECT 1 FROM result_letters x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'fit-test' AND EXISTS (SELECT 1 FROM fit_tests x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'microphone-check' AND EXISTS (SELECT 1 FROM microphone_checks x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'protector-issue' AND EXISTS (SELECT 1 FROM protector_issues x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'history-import' AND EXISTS (SELECT 1 FROM history_imports x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (e.subject_kind = 'legal-hold' AND EXISTS (SELECT 1 FROM legal_holds x WHERE x.id = e.subject_id AND x.worker_id = person))
      OR (NOT is_shared AND position(trim('"' FROM to_jsonb(old.name)::text) IN v.recorded::text) > 0)
      OR EXISTS (SELECT 1 FROM unnest(addresses) a WHERE position(lower(a) IN lower(v.recorded::text)) > 0))),
  gone AS (DELETE FROM audit_values v USING about WHERE v.event_id = about.event_id RETURNING v.event_id)
  INSERT INTO erased_values (event_id, organization_id, erasure_id, worker_id) SELECT event_id, org, of_erasure, person FROM gone;
  GET DIAGNOSTICS taken_values = ROW_COUNT;

  -- Free text about the person.
  UPDATE shift_revisions r SET note = CASE WHEN r.note <> '' THEN mark ELSE r.note END, reason = CASE WHEN r.reason <> '' THEN mark ELSE r.reason END
    FROM shifts s WHERE s.id = r.shift_id AND s.worker_id = person AND (r.note <> '' OR r.reason <> '');
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE run_revisions r SET kept_reason = CASE WHEN r.kept_reason <> '' THEN mark ELSE r.kept_reason END,
      unusual = CASE WHEN r.unusual <> '' THEN mark ELSE r.unusual END, reason = CASE WHEN r.reason <> '' THEN mark ELSE r.reason END
    FROM runs u WHERE u.id = r.run_id AND u.worker_id = person AND (r.kept_reason <> '' OR r.unusual <> '' OR r.reason <> '');
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE time_history_revisions r SET reason = mark FROM time_histories h JOIN runs u ON u.id = h.run_id
    WHERE h.id = r.history_id AND u.worker_id = person AND r.reason <> '';
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE finding_steps t SET text = mark FROM findings f WHERE f.id = t.finding_id AND f.worker_id = person AND t.text <> '';
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE findings SET closing_reason = CASE WHEN closing_reason <> '' THEN mark ELSE closing_reason END,
      facts = CASE WHEN facts ? 'text' THEN facts || jsonb_build_object('text', mark) ELSE facts END
    WHERE worker_id = person AND (closing_reason <> '' OR facts ? 'text');
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE finding_measures m SET what = mark, struck_reason = CASE WHEN m.struck_reason <> '' THEN mark ELSE m.struck_reason END
    FROM findings f WHERE f.id = m.finding_id AND f.worker_id = person;
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE finding_files p SET title = mark FROM findings f WHERE f.id = p.finding_id AND f.worker_id = person;
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE fit_test_revisions r SET note = CASE WHEN r.note <> '' THEN mark ELSE r.note END, reason = CASE WHEN r.reason <> '' THEN mark ELSE r.reason END
    FROM fit_tests t WHERE t.id = r.fit_test_id AND t.worker_id = person AND (r.note <> '' OR r.reason <> '');
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE protector_issues SET reason = mark WHERE worker_id = person AND reason <> '';
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE protector_refusals SET reason = mark WHERE worker_id = person;
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE wearing_rounds r SET note = mark WHERE r.organization_id = org AND r.note <> ''
    AND EXISTS (SELECT 1 FROM wearing_looks l WHERE l.round_id = r.id AND l.worker_id = person)
    AND NOT EXISTS (SELECT 1 FROM wearing_looks l WHERE l.round_id = r.id AND l.worker_id <> person);
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE record_draw_marks m SET note = mark FROM record_draw_items d
    WHERE d.draw_id = m.draw_id AND d.position = m.position AND d.worker_id = person AND m.note <> '';
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE legal_holds SET reason = mark, lifted_reason = CASE WHEN lifted_reason IS NULL THEN NULL ELSE mark END WHERE worker_id = person;
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  UPDATE history_imports m SET file_name = mark WHERE m.worker_id = person OR m.run_id IN (SELECT u.id FROM runs u WHERE u.worker_id = person);
  UPDATE recordings a SET file_name = mark, keep_reason = CASE WHEN a.keep_reason IS NULL THEN NULL ELSE mark END
    FROM runs u WHERE u.id = a.run_id AND u.worker_id = person;
  UPDATE microphone_check_files k SET file_name = mark FROM microphone_checks x WHERE x.id = k.check_id AND x.worker_id = person;
  DELETE FROM worker_requirement_reasons WHERE worker_id = person;
  GET DIAGNOSTICS affected = ROW_COUNT; notes := notes + affected;
  DELETE FROM sign_in_codes WHERE worker_id = person;

  -- Files that belong to the person and to nothing else.
  WITH named AS (
    SELECT p.file_id, f.worker_id IS NOT DISTINCT FROM person AS is_own FROM finding_files p JOIN findings f ON f.id = p.finding_id
    UNION ALL SELECT p.file_id, u.worker_id IS NOT DISTINCT FROM person FROM run_files p JOIN runs u ON u.id = p.run_id
    UNION ALL SELECT h.file_id, u.worker_id IS NOT DISTINCT FROM person FROM time_histories h JOIN runs u ON u.id = h.run_id
    UNION ALL SELECT m.file_id, coalesce(m.worker_id, u.worker_id) IS NOT DISTINCT FROM person FROM history_imports m LEFT JOIN runs u ON u.id = m.run_id
    UNION ALL SELECT a.file_id, u.worker_id IS NOT DISTINCT FROM person FROM recordings a LEFT JOIN runs u ON u.id = a.run_id
    UNION ALL SELECT k.file_id, x.worker_id = person FROM microphone_check_files k JOIN microphone_checks x ON x.id = k.check_id
    UNION ALL SELECT certificate_file_id, FALSE FROM instrument_calibrations
    UNION ALL SELECT file_id, FALSE FROM protector_files
    UNION ALL SELECT file_id, FALSE FROM training_sessions),
  own AS (SELECT file_id FROM named WHERE file_id IS NOT NULL GROUP BY file_id HAVING bool_and(is_own)),
  gone AS (UPDATE files f SET name = mark, erased_at = now() FROM own WHERE f.id = own.file_id AND f.organization_id = org AND f.erased_at IS NULL
    RETURNING encode(f.sha256, 'hex') AS sha256)
  SELECT coalesce(array_agg(sha256), '{}') INTO removed FROM gone;

  -- Texts that the program made for or about the person: letters and notices speak of name and number.
  found := ARRAY[old.name] || addresses;
  put := ARRAY[new_name] || array_fill(mark, ARRAY[cardinality(addresses)]);
  FOR i IN 1..cardinality(found) LOOP
    pattern := regexp_replace(found[i], '([^[:alnum:][:space:]])', '\\\\\\1', 'g');
    pattern := '(?<![[:alnum:]])' || pattern || '(?![[:alnum:]])';
    FOR c IN
      SELECT w.table_name, w.owner_column, a.attname AS column_name, a.atttypid = 'jsonb'::regtype AS is_json
      FROM watched_tables w JOIN pg_attribute a ON a.attrelid = w.target AND a.attnum > 0 AND NOT a.attisdropped
      WHERE a.atttypid IN ('text'::regtype, 'jsonb'::regtype)
        AND w.table_name NOT IN ('workers', 'users', 'organizations', 'erasures', 'erasure_people', 'trail_keepers', 'trail_mails', 'group_mappings',
          'day_results', 'days', 'readings', 'time_history_chunks', 'sites', 'areas', 'tasks', 'jobs', 'crews', 'instruments')
        AND a.attgenerated = ''
    LOOP
      -- Another of the same name is meant as well as not: then only what is this person's own is touched.
      CONTINUE WHEN i = 1 AND is_shared AND c.table_name NOT IN ('result_letters', 'notices');
      IF c.is_json THEN
        EXECUTE format('UPDATE %1$I SET %2$I = regexp_replace(%2$I::text, $1, $2, ''g'')::jsonb WHERE %3$I = $3 AND position($4 IN %2$I::text) > 0',
          c.table_name, c.column_name, c.owner_column)
          USING regexp_replace(regexp_replace(trim('"' FROM to_jsonb(found[i])::text), '([^[:alnum:][:space:]])', '\\\\\\1', 'g'), '^(.*)$', '(?<![[:alnum:]])\\1(?![[:alnum:]])'),
            replace(trim('"' FROM to_jsonb(put[i])::text), '\\', '\\\\'), org, trim('"' FROM to_jsonb(found[i])::text);
      ELSE
        EXECUTE format('UPDATE %1$I t SET %2$I = regexp_replace(%2$I, $1, $2, ''g'') WHERE %3$I = $3 AND position($4 IN %2$I) > 0 %4$s',
          c.table_name, c.column_name, c.owner_column,
          CASE WHEN NOT is_shared OR i > 1 THEN ''
            WHEN c.table_name = 'result_letters' THEN 'AND t.worker_id = $5'
            ELSE 'AND (t.recipient_id = ANY ($6) OR EXISTS (SELECT 1 FROM notice_items n WHERE n.notice_id = t.id AND n.worker_id = $5))' END)
          USING pattern, replace(put[i], '\\', '\\\\'), org, found[i], person, users_of;
      END IF;
      GET DIAGNOSTICS affected = ROW_COUNT; messages := messages + affected;
    END LOOP;
  END LOOP;
  -- The number, where a letter or a notice is about this person; figures beside it have a point, a comma or a unit.
  pattern := '(?<![[:alnum:].,])' || regexp_replace(old.employee_number, '([^[:alnum:][:space:]])', '\\\\\\1', 'g') || '(?![[:alnum:]]|[.,][0-9])';
  UPDATE result_letters SET subject = regexp_replace(subject, pattern, new_number, 'g'), body_text = regexp_replace(body_text, pattern, new_number, 'g')
    WHERE worker_id = person AND (subject ~ pattern OR body_text ~ pattern);
  UPDATE notices t SET body_text = regexp_replace(body_text, pattern, new_number, 'g'), body_html = regexp_replace(body_html, pattern, new_number, 'g')
    WHERE organization_id = org AND body_text ~ pattern
      AND (recipient_id = ANY (users_of) OR EXISTS (SELECT 1 FROM notice_items n WHERE n.notice_id = t.id AND n.worker_id = person));

  UPDATE role_grants SET revoked_at = now() WHERE user_id = ANY (users_of) AND revoked_at IS NULL;
  UPDATE api_tokens SET revoked_at = coalesce(revoked_at, now()), name = mark WHERE user_id = ANY (users_of);
  UPDATE calendar_feeds SET revoked_at = now() WHERE user_id = ANY (users_of) AND revoked_at IS NULL;
  UPDATE users SET name = new_name, email = NULL, issuer = NULL, subject = NULL, expected_subject = NULL,
      revoked_at = coalesce(revoked_at, now()), session_epoch = session_epoch + 1, revision = revision + 1
    WHERE id = ANY (users_of);
  GET DIAGNOSTICS accounts = ROW_COUNT;
  UPDATE workers SET name = new_name, employee_number = new_number, worn_gear = '{}', revision = revision + 1 WHERE id = person;
  PERFORM set_config('app.erasing', '', true);
  RETURN jsonb_build_object('accounts', accounts, 'notes', notes, 'messages', messages, 'files', cardinality(removed), 'values', taken_values, 'removed', removed);
END $$;
`),
  down: ({ context: db }) =>
    db.query(`
DROP FUNCTION erase_person;
CREATE OR REPLACE FUNCTION refuse_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION '% on % is refused: records are append-only', TG_OP, TG_TABLE_NAME USING ERRCODE = 'restrict_violation';
END $$;
ALTER TABLE files DROP COLUMN erased_at;
CALL watch_table('files');
DROP TABLE erased_values, erasure_people, erasures, legal_holds, retention_terms;
`),
};
