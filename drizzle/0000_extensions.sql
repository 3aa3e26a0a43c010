-- Both come with Debian's postgresql package and are trusted: the owner of the database may create them.
CREATE EXTENSION IF NOT EXISTS btree_gist;
--> statement-breakpoint
CREATE EXTENSION IF NOT EXISTS pg_trgm;
