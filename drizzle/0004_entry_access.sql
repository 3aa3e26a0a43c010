CREATE TABLE "correction_request" (
	"id" bigint PRIMARY KEY GENERATED ALWAYS AS IDENTITY (sequence name "correction_request_id_seq" INCREMENT BY 1 MINVALUE 1 MAXVALUE 9223372036854775807 START WITH 1 CACHE 1),
	"draw_id" uuid NOT NULL,
	"entrant_id" bigint NOT NULL,
	"words" text NOT NULL,
	"after_seal" boolean NOT NULL,
	"asked_at" timestamp with time zone NOT NULL,
	"state" text DEFAULT 'open' NOT NULL,
	"answer" text,
	"answered_at" timestamp with time zone,
	"answered_by" uuid,
	CONSTRAINT "correction_request_state" CHECK ("correction_request"."state" in ('open', 'done', 'refused')),
	CONSTRAINT "correction_request_answered" CHECK (("correction_request"."state" = 'open') = ("correction_request"."answer" is null) and ("correction_request"."answer" is null) = ("correction_request"."answered_at" is null))
);
--> statement-breakpoint
CREATE TABLE "entry_code" (
	"code_hash" text PRIMARY KEY NOT NULL,
	"entrant_id" bigint NOT NULL,
	"created_at" timestamp with time zone NOT NULL,
	CONSTRAINT "entry_code_hash" CHECK ("entry_code"."code_hash" ~ '^[0-9a-f]{64}$')
);
--> statement-breakpoint
CREATE TABLE "entry_token" (
	"token_hash" text PRIMARY KEY NOT NULL,
	"entrant_id" bigint NOT NULL,
	"created_at" timestamp with time zone NOT NULL,
	CONSTRAINT "entry_token_hash" CHECK ("entry_token"."token_hash" ~ '^[0-9a-f]{64}$')
);
--> statement-breakpoint
CREATE TABLE "receipt_opening" (
	"seal_id" bigint NOT NULL,
	"leaf" integer NOT NULL,
	"at" timestamp with time zone NOT NULL,
	CONSTRAINT "receipt_opening_seal_id_leaf_pk" PRIMARY KEY("seal_id","leaf")
);
--> statement-breakpoint
ALTER TABLE "entrant_person" ADD COLUMN "announced" text DEFAULT 'label' NOT NULL;--> statement-breakpoint
ALTER TABLE "entrant_person" ADD COLUMN "given_label" text;--> statement-breakpoint
ALTER TABLE "mail" ADD COLUMN "correction_id" bigint;--> statement-breakpoint
ALTER TABLE "correction_request" ADD CONSTRAINT "correction_request_draw_id_draw_id_fk" FOREIGN KEY ("draw_id") REFERENCES "public"."draw"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "correction_request" ADD CONSTRAINT "correction_request_entrant_id_entrant_person_entrant_id_fk" FOREIGN KEY ("entrant_id") REFERENCES "public"."entrant_person"("entrant_id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "correction_request" ADD CONSTRAINT "correction_request_answered_by_person_id_fk" FOREIGN KEY ("answered_by") REFERENCES "public"."person"("id") ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "entry_code" ADD CONSTRAINT "entry_code_entrant_id_entrant_person_entrant_id_fk" FOREIGN KEY ("entrant_id") REFERENCES "public"."entrant_person"("entrant_id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "entry_token" ADD CONSTRAINT "entry_token_entrant_id_entrant_person_entrant_id_fk" FOREIGN KEY ("entrant_id") REFERENCES "public"."entrant_person"("entrant_id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "receipt_opening" ADD CONSTRAINT "receipt_opening_seal_id_leaf_sealed_leaf_seal_id_leaf_fk" FOREIGN KEY ("seal_id","leaf") REFERENCES "public"."sealed_leaf"("seal_id","leaf") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "correction_request_draw" ON "correction_request" USING btree ("draw_id","id");--> statement-breakpoint
CREATE INDEX "correction_request_entrant" ON "correction_request" USING btree ("entrant_id");--> statement-breakpoint
CREATE INDEX "entry_code_entrant" ON "entry_code" USING btree ("entrant_id");--> statement-breakpoint
CREATE INDEX "entry_token_entrant" ON "entry_token" USING btree ("entrant_id");--> statement-breakpoint
CREATE INDEX "entrant_person_by_email" ON "entrant_person" USING btree (lower("email")) WHERE "entrant_person"."email" is not null;--> statement-breakpoint
ALTER TABLE "entrant_person" ADD CONSTRAINT "entrant_person_announced" CHECK ("entrant_person"."announced" in ('label', 'initials', 'code'));--> statement-breakpoint
ALTER TABLE "entrant_person" ADD CONSTRAINT "entrant_person_given_label" CHECK (("entrant_person"."announced" = 'label') = ("entrant_person"."given_label" is null));