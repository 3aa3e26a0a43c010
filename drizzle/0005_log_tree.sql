CREATE TABLE "log_checkpoint" (
	"size" bigint PRIMARY KEY NOT NULL,
	"root" "bytea" NOT NULL,
	"note" text NOT NULL,
	"at" timestamp with time zone NOT NULL,
	"stored_at" timestamp with time zone,
	CONSTRAINT "log_checkpoint_size" CHECK ("log_checkpoint"."size" >= 1)
);
--> statement-breakpoint
CREATE TABLE "log_node" (
	"level" integer NOT NULL,
	"index" bigint NOT NULL,
	"hash" "bytea" NOT NULL,
	CONSTRAINT "log_node_level_index_pk" PRIMARY KEY("level","index"),
	CONSTRAINT "log_node_hash" CHECK (length("log_node"."hash") = 32)
);
--> statement-breakpoint
-- The whole subtrees that a new leaf completes: its own hash, and a parent for each time that it is a right child.
CREATE FUNCTION log_grow(leaf_index bigint, leaf bytea) RETURNS void LANGUAGE plpgsql AS $$
DECLARE
  hash_here bytea := sha256('\x00'::bytea || leaf);
  index_here bigint := leaf_index;
  level_here integer := 0;
  beside bytea;
BEGIN
  INSERT INTO log_node (level, index, hash) VALUES (0, index_here, hash_here);
  WHILE index_here % 2 = 1 LOOP
    SELECT hash INTO STRICT beside FROM log_node WHERE level = level_here AND index = index_here - 1;
    hash_here := sha256('\x01'::bytea || beside || hash_here);
    index_here := index_here / 2;
    level_here := level_here + 1;
    INSERT INTO log_node (level, index, hash) VALUES (level_here, index_here, hash_here);
  END LOOP;
END $$;
--> statement-breakpoint
-- The events that are there already.
DO $$
DECLARE
  event record;
BEGIN
  FOR event IN SELECT index, leaf FROM log_event ORDER BY index LOOP
    PERFORM log_grow(event.index, event.leaf);
  END LOOP;
END $$;
--> statement-breakpoint
CREATE FUNCTION log_event_added() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  PERFORM log_grow(NEW.index, NEW.leaf);
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE TRIGGER grow AFTER INSERT ON log_event FOR EACH ROW EXECUTE FUNCTION log_event_added();
--> statement-breakpoint
CREATE FUNCTION log_node_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  -- Inside the trigger of a new leaf this one is the second.
  IF pg_trigger_depth() < 2 THEN
    PERFORM refuse('The tree of the log grows with its leaves, and in no other way.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT ON log_node FOR EACH ROW EXECUTE FUNCTION log_node_rules();
--> statement-breakpoint
-- Root of the first leaves: whole subtrees from the right, the smallest first (RFC 9162 section 2.1.1).
CREATE FUNCTION log_root(leaves bigint) RETURNS bytea LANGUAGE plpgsql STABLE AS $$
DECLARE
  root bytea;
  rest bigint := leaves;
  level_here integer := 0;
  part bytea;
BEGIN
  WHILE rest > 0 LOOP
    IF rest % 2 = 1 THEN
      SELECT hash INTO part FROM log_node WHERE level = level_here AND index = rest - 1;
      IF part IS NULL THEN RETURN NULL; END IF;
      root := CASE WHEN root IS NULL THEN part ELSE sha256('\x01'::bytea || part || root) END;
    END IF;
    rest := rest / 2;
    level_here := level_here + 1;
  END LOOP;
  RETURN coalesce(root, sha256(''::bytea));
END $$;
--> statement-breakpoint
CREATE FUNCTION log_checkpoint_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF TG_OP = 'INSERT' THEN
    IF NEW.root IS DISTINCT FROM log_root(NEW.size) THEN
      PERFORM refuse('A checkpoint has the root that the log has at its size.');
    END IF;
    RETURN NEW;
  END IF;
  IF TG_OP = 'DELETE' OR OLD.stored_at IS NOT NULL OR (NEW.size, NEW.root, NEW.note, NEW.at)
    IS DISTINCT FROM (OLD.size, OLD.root, OLD.note, OLD.at) THEN
    PERFORM refuse('A checkpoint is never changed or deleted.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT OR UPDATE OR DELETE ON log_checkpoint
  FOR EACH ROW EXECUTE FUNCTION log_checkpoint_rules();
--> statement-breakpoint
CREATE TRIGGER append_only BEFORE UPDATE OR DELETE ON log_node FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER append_only_whole BEFORE TRUNCATE ON log_node FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER append_only_whole BEFORE TRUNCATE ON log_checkpoint FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
-- A draw is in the log before its first entrant.
CREATE OR REPLACE FUNCTION list_must_be_open(of_draw uuid) RETURNS void LANGUAGE plpgsql AS $$
DECLARE
  its_state text;
BEGIN
  SELECT state INTO its_state FROM draw WHERE id = of_draw;
  IF its_state <> 'open' THEN
    PERFORM refuse(format('The entrants of a draw that is %s cannot be changed.', its_state));
  END IF;
  IF NOT EXISTS (SELECT FROM log_event WHERE draw_id = of_draw AND event = 'opened') THEN
    PERFORM refuse('A draw stands in the log before its first entrant.');
  END IF;
END $$;
--> statement-breakpoint
-- Every seal and every result is in the log, in the transaction that makes it.
CREATE FUNCTION seal_logged() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NOT EXISTS (SELECT FROM log_event WHERE draw_id = NEW.draw_id AND digest = NEW.digest
    AND supersedes IS NOT DISTINCT FROM NEW.supersedes
    AND event = CASE WHEN NEW.supersedes IS NULL THEN 'sealed' ELSE 'replaced' END) THEN
    PERFORM refuse('A seal stands in the log from the moment it is made.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE CONSTRAINT TRIGGER logged AFTER INSERT ON seal DEFERRABLE INITIALLY DEFERRED
  FOR EACH ROW EXECUTE FUNCTION seal_logged();
--> statement-breakpoint
CREATE FUNCTION result_logged() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF NOT EXISTS (SELECT FROM log_event WHERE draw_id = NEW.draw_id AND digest = NEW.digest AND event = 'drawn') THEN
    PERFORM refuse('A result stands in the log from the moment it is made.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE CONSTRAINT TRIGGER logged AFTER INSERT ON result DEFERRABLE INITIALLY DEFERRED
  FOR EACH ROW EXECUTE FUNCTION result_logged();
