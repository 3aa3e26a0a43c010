-- What the database itself refuses. Every refusal has SQLSTATE EP001 and a sentence.

ALTER TABLE prize ADD CONSTRAINT prize_position UNIQUE (draw_id, position) DEFERRABLE INITIALLY DEFERRED;
--> statement-breakpoint
ALTER TABLE entrant_numbers ADD CONSTRAINT entrant_numbers_held_once
  EXCLUDE USING gist (draw_id WITH =, series WITH =, range WITH &&);
--> statement-breakpoint
ALTER TABLE entrant_numbers ADD CONSTRAINT entrant_numbers_not_empty CHECK (NOT isempty(range));
--> statement-breakpoint

-- The database's clock. A demo draw may be told another time for the length of one transaction; no other draw may.
CREATE FUNCTION evenpenny_now(is_demo boolean) RETURNS timestamptz LANGUAGE sql VOLATILE AS $$
  SELECT CASE
    WHEN is_demo THEN coalesce(nullif(current_setting('evenpenny.demo_now', true), '')::timestamptz, clock_timestamp())
    ELSE clock_timestamp()
  END
$$;
--> statement-breakpoint
CREATE FUNCTION refuse(sentence text) RETURNS void LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION USING ERRCODE = 'EP001', MESSAGE = sentence;
END $$;
--> statement-breakpoint
CREATE FUNCTION refuse_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION USING ERRCODE = 'EP001',
    MESSAGE = format('Rows of %s are never changed or deleted.', TG_TABLE_NAME);
END $$;
--> statement-breakpoint
-- Rows that may be deleted (so that a person can be erased) but not changed.
CREATE FUNCTION refuse_update() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION USING ERRCODE = 'EP001',
    MESSAGE = format('Rows of %s can be erased, but not changed.', TG_TABLE_NAME);
END $$;
--> statement-breakpoint
DO $$
DECLARE
  name text;
BEGIN
  FOREACH name IN ARRAY ARRAY['seal', 'sealed_leaf', 'result', 'result_pick', 'transcript_line', 'beacon_observation',
    'audit_event', 'log_event', 'witness_statement'] LOOP
    EXECUTE format('CREATE TRIGGER append_only BEFORE UPDATE OR DELETE ON %I FOR EACH ROW EXECUTE FUNCTION refuse_change()', name);
    EXECUTE format('CREATE TRIGGER append_only_whole BEFORE TRUNCATE ON %I FOR EACH STATEMENT EXECUTE FUNCTION refuse_change()', name);
  END LOOP;
  FOREACH name IN ARRAY ARRAY['sealed_leaf_person', 'opened_label', 'log_note', 'audit_detail', 'witness_words'] LOOP
    EXECUTE format('CREATE TRIGGER erase_only BEFORE UPDATE ON %I FOR EACH ROW EXECUTE FUNCTION refuse_update()', name);
  END LOOP;
  FOREACH name IN ARRAY ARRAY['draw', 'prize', 'entrant', 'entrant_person', 'entrant_numbers', 'archive', 'seal_secret',
    'sealed_leaf_person'] LOOP
    EXECUTE format('CREATE TRIGGER keep_whole BEFORE TRUNCATE ON %I FOR EACH STATEMENT EXECUTE FUNCTION refuse_change()', name);
  END LOOP;
END $$;
--> statement-breakpoint

-- An administrator of the site holds no role in an organisation.
CREATE FUNCTION membership_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF (SELECT administrator FROM person WHERE id = NEW.person_id FOR UPDATE) THEN
    PERFORM refuse('An administrator of the site holds no role in an organisation.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT OR UPDATE ON membership FOR EACH ROW EXECUTE FUNCTION membership_rules();
--> statement-breakpoint
CREATE FUNCTION person_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NEW.administrator AND NOT OLD.administrator AND EXISTS (SELECT FROM membership WHERE person_id = NEW.id) THEN
    PERFORM refuse('A person with a role in an organisation cannot be an administrator of the site.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE UPDATE ON person FOR EACH ROW EXECUTE FUNCTION person_rules();
--> statement-breakpoint

-- The seal that no other replaces.
CREATE FUNCTION seal_in_force(of_draw uuid) RETURNS seal LANGUAGE sql STABLE AS $$
  SELECT s FROM seal s
  WHERE s.draw_id = of_draw AND NOT EXISTS (SELECT FROM seal r WHERE r.supersedes = s.digest)
$$;
--> statement-breakpoint
CREATE FUNCTION draw_begins() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NEW.state <> 'draft' OR NEW.entrant_count <> 0 OR NEW.ticket_count <> 0 THEN
    PERFORM refuse('A draw begins as an empty draft.');
  END IF;
  NEW.demo := (SELECT demo FROM organisation WHERE id = NEW.organisation_id);
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER begins BEFORE INSERT ON draw FOR EACH ROW EXECUTE FUNCTION draw_begins();
--> statement-breakpoint
CREATE FUNCTION draw_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  current_seal seal;
BEGIN
  IF (NEW.id, NEW.organisation_id, NEW.demo, NEW.created_at)
    IS DISTINCT FROM (OLD.id, OLD.organisation_id, OLD.demo, OLD.created_at) THEN
    PERFORM refuse('A draw stays with its organisation.');
  END IF;
  IF OLD.opened_at IS NOT NULL AND (NEW.slug, NEW.opened_at) IS DISTINCT FROM (OLD.slug, OLD.opened_at) THEN
    PERFORM refuse('The address of a draw is fixed when it opens for entries.');
  END IF;
  IF NEW.state <> OLD.state AND (OLD.state, NEW.state) NOT IN (
    ('draft', 'open'), ('draft', 'cancelled'), ('open', 'closed'), ('open', 'cancelled'), ('closed', 'open'),
    ('closed', 'sealed'), ('closed', 'cancelled'), ('sealed', 'drawn'), ('sealed', 'cancelled'), ('sealed', 'failed'),
    ('drawn', 'concluded')) THEN
    PERFORM refuse(format('A draw that is %s cannot become %s.', OLD.state, NEW.state));
  END IF;
  IF OLD.state IN ('sealed', 'drawn', 'concluded', 'cancelled', 'failed') AND (
    NEW.title, NEW.good_cause, NEW.promoter_name, NEW.promoter_address, NEW.licence, NEW.ticket_price_minor,
    NEW.ticket_price_currency, NEW.minimum_age, NEW.terms, NEW.time_zone, NEW.closes_at, NEW.rule, NEW.reserves,
    NEW.closed_at, NEW.entrant_count, NEW.ticket_count
  ) IS DISTINCT FROM (
    OLD.title, OLD.good_cause, OLD.promoter_name, OLD.promoter_address, OLD.licence, OLD.ticket_price_minor,
    OLD.ticket_price_currency, OLD.minimum_age, OLD.terms, OLD.time_zone, OLD.closes_at, OLD.rule, OLD.reserves,
    OLD.closed_at, OLD.entrant_count, OLD.ticket_count
  ) THEN
    PERFORM refuse(format('Nothing in a draw that is %s can be changed.', OLD.state));
  END IF;
  IF OLD.state IN ('drawn', 'concluded', 'cancelled', 'failed') AND (NEW.draw_at, NEW.sealed_at, NEW.drawn_at)
    IS DISTINCT FROM (OLD.draw_at, OLD.sealed_at, OLD.drawn_at) THEN
    PERFORM refuse(format('The times of a draw that is %s cannot be changed.', OLD.state));
  END IF;
  current_seal := seal_in_force(NEW.id);
  IF NEW.state = 'sealed' THEN
    IF current_seal.id IS NULL THEN
      PERFORM refuse('A draw is sealed by a seal: there is none.');
    END IF;
    IF (current_seal.draw_at, current_seal.sealed_at, current_seal.entrants, current_seal.tickets)
      IS DISTINCT FROM (NEW.draw_at, NEW.sealed_at, NEW.entrant_count, NEW.ticket_count) THEN
      PERFORM refuse('A sealed draw has the times and the counts that its seal names.');
    END IF;
  END IF;
  IF OLD.state = 'sealed' AND NEW.state = 'cancelled' AND evenpenny_now(OLD.demo) >= current_seal.beacon_round_at THEN
    PERFORM refuse('From the time of the beacon round that the seal names nobody can stop, postpone or replace the draw.');
  END IF;
  IF OLD.state = 'sealed' AND NEW.state = 'failed'
    AND evenpenny_now(OLD.demo) < current_seal.beacon_round_at + interval '7 days' THEN
    PERFORM refuse('A draw stands as failed only when its beacon round could not be shown for 7 days.');
  END IF;
  IF NEW.state = 'drawn' AND NOT EXISTS (SELECT FROM result WHERE draw_id = NEW.id) THEN
    PERFORM refuse('A draw is drawn by its result: there is none.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE UPDATE ON draw FOR EACH ROW EXECUTE FUNCTION draw_rules();
--> statement-breakpoint
CREATE TRIGGER kept BEFORE DELETE ON draw FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint

CREATE FUNCTION prize_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  of_draw uuid := coalesce(NEW.draw_id, OLD.draw_id);
  its_state text;
BEGIN
  SELECT state INTO its_state FROM draw WHERE id = of_draw FOR SHARE;
  IF its_state NOT IN ('draft', 'open', 'closed') THEN
    PERFORM refuse(format('The prizes of a draw that is %s cannot be changed.', its_state));
  END IF;
  IF TG_OP = 'DELETE' THEN RETURN OLD; END IF;
  IF TG_OP = 'UPDATE' AND (NEW.draw_id, NEW.code) IS DISTINCT FROM (OLD.draw_id, OLD.code) THEN
    PERFORM refuse('A prize keeps its draw and its code.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT OR UPDATE OR DELETE ON prize FOR EACH ROW EXECUTE FUNCTION prize_rules();
--> statement-breakpoint

-- The list can be changed in a draft and while it is open: a closed list is reopened first. Counts follow it.
CREATE FUNCTION list_must_be_open(of_draw uuid) RETURNS void LANGUAGE plpgsql AS $$
DECLARE
  its_state text;
BEGIN
  SELECT state INTO its_state FROM draw WHERE id = of_draw;
  IF its_state NOT IN ('draft', 'open') THEN
    PERFORM refuse(format('The entrants of a draw that is %s cannot be changed.', its_state));
  END IF;
END $$;
--> statement-breakpoint
CREATE FUNCTION entrant_added() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  change record;
BEGIN
  FOR change IN SELECT draw_id, count(*) AS entrants, sum(tickets) AS tickets FROM added GROUP BY draw_id LOOP
    UPDATE draw SET entrant_count = entrant_count + change.entrants, ticket_count = ticket_count + change.tickets
      WHERE id = change.draw_id;
    PERFORM list_must_be_open(change.draw_id);
  END LOOP;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE FUNCTION entrant_removed() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  change record;
BEGIN
  FOR change IN SELECT draw_id, count(*) AS entrants, sum(tickets) AS tickets FROM removed GROUP BY draw_id LOOP
    UPDATE draw SET entrant_count = entrant_count - change.entrants, ticket_count = ticket_count - change.tickets
      WHERE id = change.draw_id;
    PERFORM list_must_be_open(change.draw_id);
  END LOOP;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE FUNCTION entrant_changed() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  change record;
BEGIN
  IF EXISTS (SELECT FROM added a FULL JOIN removed r USING (id) WHERE a.draw_id IS DISTINCT FROM r.draw_id
    OR a.code IS DISTINCT FROM r.code) THEN
    PERFORM refuse('An entrant keeps their draw and their code.');
  END IF;
  FOR change IN SELECT a.draw_id, sum(a.tickets - r.tickets) AS tickets FROM added a JOIN removed r USING (id)
    GROUP BY a.draw_id LOOP
    UPDATE draw SET ticket_count = ticket_count + change.tickets WHERE id = change.draw_id;
    PERFORM list_must_be_open(change.draw_id);
  END LOOP;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE TRIGGER added AFTER INSERT ON entrant REFERENCING NEW TABLE AS added
  FOR EACH STATEMENT EXECUTE FUNCTION entrant_added();
--> statement-breakpoint
CREATE TRIGGER removed AFTER DELETE ON entrant REFERENCING OLD TABLE AS removed
  FOR EACH STATEMENT EXECUTE FUNCTION entrant_removed();
--> statement-breakpoint
CREATE TRIGGER changed AFTER UPDATE ON entrant REFERENCING NEW TABLE AS added OLD TABLE AS removed
  FOR EACH STATEMENT EXECUTE FUNCTION entrant_changed();
--> statement-breakpoint
CREATE FUNCTION entrant_details_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  of_draw uuid;
BEGIN
  FOR of_draw IN SELECT DISTINCT draw_id FROM touched LOOP
    -- Wait for a change of the draw's state that is under way, then look again.
    PERFORM FROM draw WHERE id = of_draw FOR SHARE;
    PERFORM list_must_be_open(of_draw);
  END LOOP;
  RETURN NULL;
END $$;
--> statement-breakpoint
-- Once a draw is over, the people in its list can be erased; not while a seal may still be made from them.
CREATE FUNCTION entrant_details_erased() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (SELECT FROM touched JOIN draw ON draw.id = touched.draw_id WHERE draw.state IN ('closed', 'sealed')) THEN
    PERFORM refuse('The entrants of a draw that is closed or sealed cannot be changed.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
DO $$
DECLARE
  name text;
BEGIN
  FOREACH name IN ARRAY ARRAY['entrant_person', 'entrant_numbers'] LOOP
    EXECUTE format('CREATE TRIGGER list_open_insert AFTER INSERT ON %I REFERENCING NEW TABLE AS touched FOR EACH STATEMENT EXECUTE FUNCTION entrant_details_rules()', name);
    EXECUTE format('CREATE TRIGGER list_open_update AFTER UPDATE ON %I REFERENCING NEW TABLE AS touched FOR EACH STATEMENT EXECUTE FUNCTION entrant_details_rules()', name);
    EXECUTE format('CREATE TRIGGER list_open_delete AFTER DELETE ON %I REFERENCING OLD TABLE AS touched FOR EACH STATEMENT EXECUTE FUNCTION entrant_details_erased()', name);
  END LOOP;
END $$;
--> statement-breakpoint

CREATE FUNCTION seal_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  its_draw draw;
  before seal;
BEGIN
  SELECT * INTO its_draw FROM draw WHERE id = NEW.draw_id FOR UPDATE;
  before := seal_in_force(NEW.draw_id);
  IF before.id IS NULL THEN
    IF its_draw.state <> 'closed' OR NEW.supersedes IS NOT NULL THEN
      PERFORM refuse('A first seal is put on a closed list and replaces none.');
    END IF;
  ELSE
    IF its_draw.state <> 'sealed' OR NEW.supersedes IS DISTINCT FROM before.digest THEN
      PERFORM refuse('A new seal must name the seal in force, of a draw that is sealed.');
    END IF;
    IF evenpenny_now(its_draw.demo) >= before.beacon_round_at THEN
      PERFORM refuse('From the time of the beacon round that the seal names nobody can stop, postpone or replace the draw.');
    END IF;
    IF NEW.sealed_at < before.sealed_at OR NEW.root = before.root THEN
      PERFORM refuse('A new seal comes after the one it replaces, with new references and a new blinding key.');
    END IF;
  END IF;
  IF NEW.entrants <> its_draw.entrant_count OR NEW.tickets <> its_draw.ticket_count THEN
    PERFORM refuse('The seal does not count what stands in the list.');
  END IF;
  IF NEW.sealed_at > evenpenny_now(its_draw.demo) + interval '5 seconds' THEN
    PERFORM refuse('A seal cannot be dated ahead.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT ON seal FOR EACH ROW EXECUTE FUNCTION seal_rules();
--> statement-breakpoint
-- Looked at when the transaction commits: the whole list is there, and the round is still to come.
CREATE FUNCTION seal_complete() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  its_draw draw;
  leaves record;
BEGIN
  SELECT * INTO its_draw FROM draw WHERE id = NEW.draw_id;
  IF its_draw.state <> 'sealed' THEN
    PERFORM refuse('A seal makes its draw sealed.');
  END IF;
  SELECT count(*) AS entrants, sum(tickets) AS tickets, min(leaf) AS first, max(leaf) AS last INTO leaves
    FROM sealed_leaf WHERE seal_id = NEW.id;
  IF (leaves.entrants, leaves.tickets, leaves.first, leaves.last)
    IS DISTINCT FROM (NEW.entrants::bigint, NEW.tickets::numeric, 0, NEW.entrants - 1) THEN
    PERFORM refuse('The sealed list does not have the leaves that the seal counts.');
  END IF;
  IF NOT EXISTS (SELECT FROM seal_secret WHERE seal_id = NEW.id AND seed IS NOT NULL AND blinding_key IS NOT NULL) THEN
    PERFORM refuse('A seal needs its seed and its blinding key.');
  END IF;
  IF evenpenny_now(its_draw.demo) >= NEW.draw_at THEN
    PERFORM refuse('The draw time has come before the seal was complete.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE CONSTRAINT TRIGGER complete AFTER INSERT ON seal DEFERRABLE INITIALLY DEFERRED
  FOR EACH ROW EXECUTE FUNCTION seal_complete();
--> statement-breakpoint
-- Leaves and people join a seal in the transaction that makes it, never later.
CREATE FUNCTION leaf_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (SELECT FROM seal WHERE id IN (SELECT DISTINCT seal_id FROM touched)
    AND xmin::text::bigint <> (txid_current() & 4294967295)) THEN
    PERFORM refuse('Nothing is added to a list that is sealed.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules AFTER INSERT ON sealed_leaf REFERENCING NEW TABLE AS touched
  FOR EACH STATEMENT EXECUTE FUNCTION leaf_rules();
--> statement-breakpoint
CREATE TRIGGER rules AFTER INSERT ON sealed_leaf_person REFERENCING NEW TABLE AS touched
  FOR EACH STATEMENT EXECUTE FUNCTION leaf_rules();
--> statement-breakpoint

CREATE FUNCTION seal_secret_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  its_seal seal;
  its_draw draw;
  replaced boolean;
BEGIN
  IF NEW.seal_id <> OLD.seal_id OR (NEW.seed IS NOT NULL AND NEW.seed IS DISTINCT FROM OLD.seed)
    OR (NEW.blinding_key IS NOT NULL AND NEW.blinding_key IS DISTINCT FROM OLD.blinding_key) THEN
    PERFORM refuse('The secrets of a seal can be erased, but not changed.');
  END IF;
  SELECT * INTO its_seal FROM seal WHERE id = NEW.seal_id;
  SELECT * INTO its_draw FROM draw WHERE id = its_seal.draw_id;
  replaced := EXISTS (SELECT FROM seal WHERE supersedes = its_seal.digest);
  IF NEW.seed IS NULL AND OLD.seed IS NOT NULL AND NOT replaced AND its_draw.state NOT IN ('cancelled', 'failed')
    AND NOT EXISTS (SELECT FROM result WHERE seal_id = NEW.seal_id) THEN
    PERFORM refuse('The seed of the seal in force is kept until the draw is drawn, cancelled or failed.');
  END IF;
  IF NEW.blinding_key IS NULL AND OLD.blinding_key IS NOT NULL AND NOT replaced
    AND its_draw.state NOT IN ('cancelled', 'failed', 'concluded', 'drawn') THEN
    PERFORM refuse('The blinding key of the seal in force is kept until the draw is over.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE UPDATE ON seal_secret FOR EACH ROW EXECUTE FUNCTION seal_secret_rules();
--> statement-breakpoint
CREATE TRIGGER kept BEFORE DELETE ON seal_secret FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint

CREATE FUNCTION result_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  its_draw draw;
  current_seal seal;
BEGIN
  SELECT * INTO its_draw FROM draw WHERE id = NEW.draw_id FOR UPDATE;
  current_seal := seal_in_force(NEW.draw_id);
  IF its_draw.state <> 'sealed' OR current_seal.id IS DISTINCT FROM NEW.seal_id THEN
    PERFORM refuse('A result belongs to the seal in force of a sealed draw.');
  END IF;
  IF evenpenny_now(its_draw.demo) < current_seal.beacon_round_at OR NEW.drawn_at < current_seal.draw_at THEN
    PERFORM refuse('A draw is not drawn before its time.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT ON result FOR EACH ROW EXECUTE FUNCTION result_rules();
--> statement-breakpoint
CREATE FUNCTION result_complete() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF (SELECT state FROM draw WHERE id = NEW.draw_id) <> 'drawn'
    OR (SELECT count(*) FROM result_pick WHERE draw_id = NEW.draw_id) <> NEW.picks
    OR (SELECT count(*) FROM transcript_line WHERE draw_id = NEW.draw_id) <> NEW.picks THEN
    PERFORM refuse('A result comes with all its picks and its whole transcript.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE CONSTRAINT TRIGGER complete AFTER INSERT ON result DEFERRABLE INITIALLY DEFERRED
  FOR EACH ROW EXECUTE FUNCTION result_complete();
--> statement-breakpoint
CREATE FUNCTION result_part_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (SELECT FROM result WHERE draw_id IN (SELECT DISTINCT draw_id FROM touched)
    AND xmin::text::bigint <> (txid_current() & 4294967295)) THEN
    PERFORM refuse('Nothing is added to a result that stands.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules AFTER INSERT ON result_pick REFERENCING NEW TABLE AS touched
  FOR EACH STATEMENT EXECUTE FUNCTION result_part_rules();
--> statement-breakpoint
CREATE TRIGGER rules AFTER INSERT ON transcript_line REFERENCING NEW TABLE AS touched
  FOR EACH STATEMENT EXECUTE FUNCTION result_part_rules();
--> statement-breakpoint
CREATE FUNCTION archive_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF TG_OP = 'DELETE' OR (NEW.draw_id, NEW.key, NEW.bytes, NEW.sha256, NEW.members, NEW.created_at)
    IS DISTINCT FROM (OLD.draw_id, OLD.key, OLD.bytes, OLD.sha256, OLD.members, OLD.created_at) THEN
    PERFORM refuse('What the archive holds is never changed.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE UPDATE OR DELETE ON archive FOR EACH ROW EXECUTE FUNCTION archive_rules();
--> statement-breakpoint
CREATE FUNCTION statement_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF (SELECT draw_id FROM witness WHERE id = NEW.witness_id) IS DISTINCT FROM NEW.draw_id
    OR NOT EXISTS (SELECT FROM seal WHERE draw_id = NEW.draw_id AND digest = NEW.digest AND NEW.about = 'seal'
      UNION ALL SELECT FROM result WHERE draw_id = NEW.draw_id AND digest = NEW.digest AND NEW.about = 'result') THEN
    PERFORM refuse('A witness speaks about the seal or the result of their own draw.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT ON witness_statement FOR EACH ROW EXECUTE FUNCTION statement_rules();
--> statement-breakpoint

-- The log has no gap: whoever appends waits for the one before to commit or give up.
CREATE FUNCTION log_next_index() RETURNS bigint LANGUAGE plpgsql VOLATILE AS $$
BEGIN
  PERFORM pg_advisory_xact_lock(5210742036471);
  RETURN (SELECT coalesce(max(index) + 1, 0) FROM log_event);
END $$;
--> statement-breakpoint
CREATE FUNCTION log_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NEW.index <> log_next_index() THEN
    PERFORM refuse('A log event stands directly behind the last one.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT ON log_event FOR EACH ROW EXECUTE FUNCTION log_rules();
