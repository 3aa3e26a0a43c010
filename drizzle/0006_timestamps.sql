CREATE TABLE "log_cosignature" (
	"size" bigint NOT NULL,
	"witness" text NOT NULL,
	"line" text NOT NULL,
	"at" timestamp with time zone NOT NULL,
	CONSTRAINT "log_cosignature_size_witness_pk" PRIMARY KEY("size","witness")
);
--> statement-breakpoint
CREATE TABLE "log_witness" (
	"witness" text PRIMARY KEY NOT NULL,
	"size" bigint DEFAULT 0 NOT NULL,
	"ok" boolean NOT NULL,
	"detail" text NOT NULL,
	"tried_at" timestamp with time zone NOT NULL
);
--> statement-breakpoint
CREATE TABLE "site_key" (
	"fingerprint" text PRIMARY KEY NOT NULL,
	"public_key_pem" text NOT NULL,
	"since" timestamp with time zone NOT NULL,
	"until" timestamp with time zone
);
--> statement-breakpoint
CREATE TABLE "sealing" (
	"id" bigint PRIMARY KEY GENERATED ALWAYS AS IDENTITY (sequence name "sealing_id_seq" INCREMENT BY 1 MINVALUE 1 MAXVALUE 9223372036854775807 START WITH 1 CACHE 1),
	"draw_id" uuid NOT NULL,
	"digest" text NOT NULL,
	"bytes" "bytea" NOT NULL,
	"signature" "bytea" NOT NULL,
	"terms" text NOT NULL,
	"key_fingerprint" text NOT NULL,
	"root" text NOT NULL,
	"entrants" integer NOT NULL,
	"tickets" bigint NOT NULL,
	"seed_commit" text,
	"beacon_chain" text,
	"beacon_round" bigint,
	"beacon_round_at" timestamp with time zone,
	"sealed_at" timestamp with time zone NOT NULL,
	"draw_at" timestamp with time zone NOT NULL,
	"supersedes" text,
	"reason" text,
	"added" integer,
	"removed" integer,
	"changed" integer,
	"actor_id" uuid,
	"draw_version" integer NOT NULL,
	"made_at" timestamp with time zone NOT NULL,
	CONSTRAINT "sealing_digest_unique" UNIQUE("digest"),
	CONSTRAINT "sealing_seedCommit_unique" UNIQUE("seed_commit"),
	CONSTRAINT "sealing_digest" CHECK ("sealing"."digest" ~ '^[0-9a-f]{64}$' and "sealing"."digest" = encode(sha256("sealing"."bytes"), 'hex')),
	CONSTRAINT "sealing_far_enough" CHECK ("sealing"."draw_at" >= "sealing"."sealed_at" + interval '120 seconds'),
	CONSTRAINT "sealing_replacement_has_reason" CHECK (("sealing"."supersedes" is null) = ("sealing"."reason" is null)),
	CONSTRAINT "sealing_replacement_has_counts" CHECK (("sealing"."supersedes" is null) = ("sealing"."added" is null) and ("sealing"."added" is null) = ("sealing"."removed" is null) and ("sealing"."added" is null) = ("sealing"."changed" is null))
);
--> statement-breakpoint
CREATE TABLE "timestamping" (
	"sealing_id" bigint PRIMARY KEY NOT NULL,
	"tries" integer NOT NULL,
	"tried_at" timestamp with time zone NOT NULL,
	"detail" text NOT NULL
);
--> statement-breakpoint
ALTER TABLE "seal_secret" DROP CONSTRAINT "seal_secret_seal_id_seal_id_fk";
--> statement-breakpoint
ALTER TABLE "sealed_leaf" DROP CONSTRAINT "sealed_leaf_seal_id_seal_id_fk";
--> statement-breakpoint
ALTER TABLE "sealed_leaf_person" DROP CONSTRAINT "sealed_leaf_person_seal_id_seal_id_fk";
--> statement-breakpoint
ALTER TABLE "seal" ALTER COLUMN "id" DROP IDENTITY;--> statement-breakpoint
ALTER TABLE "seal" ADD COLUMN "added" integer;--> statement-breakpoint
ALTER TABLE "seal" ADD COLUMN "removed" integer;--> statement-breakpoint
ALTER TABLE "seal" ADD COLUMN "changed" integer;--> statement-breakpoint
ALTER TABLE "seal" ADD COLUMN "timestamp" "bytea";--> statement-breakpoint
ALTER TABLE "seal" ADD COLUMN "timestamp_at" timestamp with time zone;--> statement-breakpoint
ALTER TABLE "seal" ADD COLUMN "timestamp_authority" text;--> statement-breakpoint
ALTER TABLE "sealing" ADD CONSTRAINT "sealing_draw_id_draw_id_fk" FOREIGN KEY ("draw_id") REFERENCES "public"."draw"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "timestamping" ADD CONSTRAINT "timestamping_sealing_id_sealing_id_fk" FOREIGN KEY ("sealing_id") REFERENCES "public"."sealing"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "sealing_draw" ON "sealing" USING btree ("draw_id");--> statement-breakpoint
ALTER TABLE "seal" ADD CONSTRAINT "seal_timestamp_whole" CHECK (("seal"."timestamp" is null) = ("seal"."timestamp_at" is null) and ("seal"."timestamp" is null) = ("seal"."timestamp_authority" is null));--> statement-breakpoint
ALTER TABLE "seal" ADD CONSTRAINT "seal_timestamp_in_time" CHECK ("seal"."timestamp_at" < "seal"."draw_at");--> statement-breakpoint

-- Seals from before timestamps were asked for: they count, and no list could change between two of them.
INSERT INTO sealing (id, draw_id, digest, bytes, signature, terms, key_fingerprint, root, entrants, tickets, seed_commit,
    beacon_chain, beacon_round, beacon_round_at, sealed_at, draw_at, supersedes, reason, added, removed, changed,
    draw_version, made_at)
  OVERRIDING SYSTEM VALUE
  SELECT s.id, s.draw_id, s.digest, s.bytes, s.signature, s.terms, s.key_fingerprint, s.root, s.entrants, s.tickets,
    s.seed_commit, s.beacon_chain, s.beacon_round, s.beacon_round_at, s.sealed_at, s.draw_at, s.supersedes, s.reason,
    CASE WHEN s.supersedes IS NULL THEN NULL ELSE 0 END, CASE WHEN s.supersedes IS NULL THEN NULL ELSE 0 END,
    CASE WHEN s.supersedes IS NULL THEN NULL ELSE 0 END, d.version, s.sealed_at
  FROM seal s JOIN draw d ON d.id = s.draw_id;
--> statement-breakpoint
ALTER TABLE "seal" ADD CONSTRAINT "seal_id_sealing_id_fk" FOREIGN KEY ("id") REFERENCES "public"."sealing"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "seal_secret" ADD CONSTRAINT "seal_secret_seal_id_sealing_id_fk" FOREIGN KEY ("seal_id") REFERENCES "public"."sealing"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "sealed_leaf" ADD CONSTRAINT "sealed_leaf_seal_id_sealing_id_fk" FOREIGN KEY ("seal_id") REFERENCES "public"."sealing"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "sealed_leaf_person" ADD CONSTRAINT "sealed_leaf_person_seal_id_sealing_id_fk" FOREIGN KEY ("seal_id") REFERENCES "public"."sealing"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
SELECT setval(pg_get_serial_sequence('sealing', 'id'), (SELECT coalesce(max(id), 0) + 1 FROM sealing), false);
--> statement-breakpoint
ALTER TABLE seal DISABLE TRIGGER append_only;
--> statement-breakpoint
UPDATE seal SET added = 0, removed = 0, changed = 0 WHERE supersedes IS NOT NULL;
--> statement-breakpoint
ALTER TABLE seal ENABLE TRIGGER append_only;
--> statement-breakpoint

-- What is true of a seal when it is made, and again when it begins to count.
CREATE OR REPLACE FUNCTION seal_rules() RETURNS trigger LANGUAGE plpgsql AS $$
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
  IF TG_TABLE_NAME = 'sealing' THEN
    IF EXISTS (SELECT FROM sealing s WHERE s.draw_id = NEW.draw_id AND NOT EXISTS (SELECT FROM seal WHERE id = s.id)) THEN
      PERFORM refuse('A seal of this draw waits for its timestamp already.');
    END IF;
    RETURN NEW;
  END IF;
  IF NEW.timestamp IS NULL THEN
    PERFORM refuse('A seal counts from its timestamp on: it has none.');
  END IF;
  IF NOT EXISTS (SELECT FROM sealing s WHERE s.id = NEW.id AND (s.draw_id, s.digest, s.bytes, s.signature, s.root,
      s.entrants, s.tickets, s.seed_commit, s.beacon_chain, s.beacon_round, s.beacon_round_at, s.sealed_at, s.draw_at,
      s.supersedes, s.reason, s.added, s.removed, s.changed)
    IS NOT DISTINCT FROM (NEW.draw_id, NEW.digest, NEW.bytes, NEW.signature, NEW.root, NEW.entrants, NEW.tickets,
      NEW.seed_commit, NEW.beacon_chain, NEW.beacon_round, NEW.beacon_round_at, NEW.sealed_at, NEW.draw_at,
      NEW.supersedes, NEW.reason, NEW.added, NEW.removed, NEW.changed)) THEN
    PERFORM refuse('A seal that counts is the one that was made.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE INSERT ON sealing FOR EACH ROW EXECUTE FUNCTION seal_rules();
--> statement-breakpoint
CREATE TRIGGER append_only BEFORE UPDATE ON sealing FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER append_only_whole BEFORE TRUNCATE ON sealing FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint

-- The whole list and both secrets, at the end of the transaction that makes a seal.
CREATE FUNCTION seal_is_whole(of_seal bigint, entrants_wanted integer, tickets_wanted bigint) RETURNS void
LANGUAGE plpgsql AS $$
DECLARE
  leaves record;
BEGIN
  SELECT count(*) AS entrants, sum(tickets) AS tickets, min(leaf) AS first, max(leaf) AS last INTO leaves
    FROM sealed_leaf WHERE seal_id = of_seal;
  IF (leaves.entrants, leaves.tickets, leaves.first, leaves.last)
    IS DISTINCT FROM (entrants_wanted::bigint, tickets_wanted::numeric, 0, entrants_wanted - 1) THEN
    PERFORM refuse('The sealed list does not have the leaves that the seal counts.');
  END IF;
  IF NOT EXISTS (SELECT FROM seal_secret WHERE seal_id = of_seal AND seed IS NOT NULL AND blinding_key IS NOT NULL) THEN
    PERFORM refuse('A seal needs its seed and its blinding key.');
  END IF;
END $$;
--> statement-breakpoint
CREATE FUNCTION sealing_complete() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  -- Discarded in the same transaction already.
  IF EXISTS (SELECT FROM sealing WHERE id = NEW.id) THEN
    PERFORM seal_is_whole(NEW.id, NEW.entrants, NEW.tickets);
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
CREATE CONSTRAINT TRIGGER complete AFTER INSERT ON sealing DEFERRABLE INITIALLY DEFERRED
  FOR EACH ROW EXECUTE FUNCTION sealing_complete();
--> statement-breakpoint
CREATE OR REPLACE FUNCTION seal_complete() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  its_draw draw;
BEGIN
  SELECT * INTO its_draw FROM draw WHERE id = NEW.draw_id;
  IF its_draw.state <> 'sealed' THEN
    PERFORM refuse('A seal makes its draw sealed.');
  END IF;
  PERFORM seal_is_whole(NEW.id, NEW.entrants, NEW.tickets);
  IF evenpenny_now(its_draw.demo) >= NEW.draw_at THEN
    PERFORM refuse('The draw time has come before the seal was complete.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint

-- What waits for a timestamp can be discarded whole; what counts cannot.
CREATE FUNCTION discard_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (SELECT FROM seal WHERE id = CASE WHEN TG_TABLE_NAME = 'sealing' THEN (to_jsonb(OLD) ->> 'id')::bigint
    ELSE (to_jsonb(OLD) ->> 'seal_id')::bigint END) THEN
    PERFORM refuse(format('Rows of %s are never changed or deleted.', TG_TABLE_NAME));
  END IF;
  RETURN OLD;
END $$;
--> statement-breakpoint
CREATE TRIGGER discard BEFORE DELETE ON sealing FOR EACH ROW EXECUTE FUNCTION discard_rules();
--> statement-breakpoint
DROP TRIGGER kept ON seal_secret;
--> statement-breakpoint
CREATE TRIGGER kept BEFORE DELETE ON seal_secret FOR EACH ROW EXECUTE FUNCTION discard_rules();
--> statement-breakpoint
CREATE FUNCTION leaf_discard_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (SELECT FROM seal WHERE id IN (SELECT DISTINCT seal_id FROM touched)) THEN
    PERFORM refuse(format('Rows of %s are never changed or deleted.', TG_TABLE_NAME));
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
DROP TRIGGER append_only ON sealed_leaf;
--> statement-breakpoint
CREATE TRIGGER append_only BEFORE UPDATE ON sealed_leaf FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER discard AFTER DELETE ON sealed_leaf REFERENCING OLD TABLE AS touched
  FOR EACH STATEMENT EXECUTE FUNCTION leaf_discard_rules();
--> statement-breakpoint
-- Leaves and people join a seal in the transaction that makes it, never later.
CREATE OR REPLACE FUNCTION leaf_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (SELECT FROM sealing WHERE id IN (SELECT DISTINCT seal_id FROM touched)
    AND xmin::text::bigint <> (txid_current() & 4294967295)) THEN
    PERFORM refuse('Nothing is added to a list that is sealed.');
  END IF;
  RETURN NULL;
END $$;
--> statement-breakpoint
-- A seed of a seal that only waits is erased with its seal, in no other way.
CREATE OR REPLACE FUNCTION seal_secret_rules() RETURNS trigger LANGUAGE plpgsql AS $$
DECLARE
  its_seal sealing;
  its_draw draw;
  replaced boolean;
BEGIN
  IF NEW.seal_id <> OLD.seal_id OR (NEW.seed IS NOT NULL AND NEW.seed IS DISTINCT FROM OLD.seed)
    OR (NEW.blinding_key IS NOT NULL AND NEW.blinding_key IS DISTINCT FROM OLD.blinding_key) THEN
    PERFORM refuse('The secrets of a seal can be erased, but not changed.');
  END IF;
  SELECT * INTO its_seal FROM sealing WHERE id = NEW.seal_id;
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

CREATE TRIGGER append_only BEFORE UPDATE OR DELETE ON log_cosignature FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER append_only_whole BEFORE TRUNCATE ON log_cosignature FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE FUNCTION site_key_rules() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF TG_OP = 'DELETE' OR (NEW.fingerprint, NEW.public_key_pem, NEW.since)
    IS DISTINCT FROM (OLD.fingerprint, OLD.public_key_pem, OLD.since) THEN
    PERFORM refuse('A key that the site has signed with stays on its list.');
  END IF;
  RETURN NEW;
END $$;
--> statement-breakpoint
CREATE TRIGGER rules BEFORE UPDATE OR DELETE ON site_key FOR EACH ROW EXECUTE FUNCTION site_key_rules();
