CREATE TABLE "documents" (
	"project_id" uuid NOT NULL,
	"hash" text NOT NULL,
	"document" jsonb NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "documents_project_id_hash_pk" PRIMARY KEY("project_id","hash")
);
--> statement-breakpoint
-- Edits of before have none; the default only lets them stay.
ALTER TABLE "floorplan_edits" ADD COLUMN "to_hash" text DEFAULT '' NOT NULL;--> statement-breakpoint
ALTER TABLE "floorplan_edits" ALTER COLUMN "to_hash" DROP DEFAULT;--> statement-breakpoint
ALTER TABLE "documents" ADD CONSTRAINT "documents_project_id_projects_id_fk" FOREIGN KEY ("project_id") REFERENCES "public"."projects"("id") ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "sessions_user" ON "sessions" USING btree ("user_id");