CREATE TABLE "comments" (
	"id" uuid PRIMARY KEY DEFAULT gen_random_uuid() NOT NULL,
	"thread_id" uuid NOT NULL,
	"text" text NOT NULL,
	"user_id" uuid NOT NULL,
	"at" timestamp with time zone DEFAULT now() NOT NULL,
	"deleted_at" timestamp with time zone
);
--> statement-breakpoint
CREATE TABLE "revision_findings" (
	"id" uuid PRIMARY KEY DEFAULT gen_random_uuid() NOT NULL,
	"revision_id" uuid NOT NULL,
	"kind" text NOT NULL,
	"list" text NOT NULL,
	"subject" text NOT NULL,
	"partner" text NOT NULL,
	"mode" text NOT NULL,
	"corner" text NOT NULL,
	"value" double precision NOT NULL,
	"limit" double precision NOT NULL,
	"unit" text NOT NULL,
	"message" text NOT NULL,
	"x_um" double precision,
	"y_um" double precision,
	CONSTRAINT "revision_findings_identity" UNIQUE("revision_id","mode","corner","kind","list","subject","partner")
);
--> statement-breakpoint
CREATE TABLE "revision_moves" (
	"id" bigserial PRIMARY KEY NOT NULL,
	"revision_id" uuid NOT NULL,
	"position" integer NOT NULL,
	"from_state" text NOT NULL,
	"to_state" text NOT NULL,
	"hash" text NOT NULL,
	"note" text NOT NULL,
	"user_id" uuid NOT NULL,
	"at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "revision_moves_position" UNIQUE("revision_id","position")
);
--> statement-breakpoint
CREATE TABLE "revision_results" (
	"revision_id" uuid NOT NULL,
	"mode" text NOT NULL,
	"corner" text NOT NULL,
	"result_id" uuid NOT NULL,
	"at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "revision_results_revision_id_mode_corner_pk" PRIMARY KEY("revision_id","mode","corner")
);
--> statement-breakpoint
CREATE TABLE "revisions" (
	"id" uuid PRIMARY KEY DEFAULT gen_random_uuid() NOT NULL,
	"floorplan_id" uuid NOT NULL,
	"number" integer NOT NULL,
	"draft_version" integer NOT NULL,
	"hash" text NOT NULL,
	"document" jsonb NOT NULL,
	"title" text NOT NULL,
	"note" text NOT NULL,
	"frozen_by" uuid NOT NULL,
	"frozen_at" timestamp with time zone DEFAULT now() NOT NULL,
	CONSTRAINT "revisions_number" UNIQUE("floorplan_id","number"),
	CONSTRAINT "revisions_draft_version" UNIQUE("floorplan_id","draft_version")
);
--> statement-breakpoint
CREATE TABLE "thread_acts" (
	"id" bigserial PRIMARY KEY NOT NULL,
	"thread_id" uuid NOT NULL,
	"act" text NOT NULL,
	"user_id" uuid NOT NULL,
	"at" timestamp with time zone DEFAULT now() NOT NULL
);
--> statement-breakpoint
CREATE TABLE "threads" (
	"id" uuid PRIMARY KEY DEFAULT gen_random_uuid() NOT NULL,
	"floorplan_id" uuid NOT NULL,
	"revision_id" uuid,
	"anchor_kind" text NOT NULL,
	"item_list" text,
	"item_id" text,
	"x_um" double precision,
	"y_um" double precision,
	"opened_by" uuid NOT NULL,
	"opened_at" timestamp with time zone DEFAULT now() NOT NULL
);
--> statement-breakpoint
ALTER TABLE "comments" ADD CONSTRAINT "comments_thread_id_threads_id_fk" FOREIGN KEY ("thread_id") REFERENCES "public"."threads"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "comments" ADD CONSTRAINT "comments_user_id_users_id_fk" FOREIGN KEY ("user_id") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revision_findings" ADD CONSTRAINT "revision_findings_revision_id_revisions_id_fk" FOREIGN KEY ("revision_id") REFERENCES "public"."revisions"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revision_moves" ADD CONSTRAINT "revision_moves_revision_id_revisions_id_fk" FOREIGN KEY ("revision_id") REFERENCES "public"."revisions"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revision_moves" ADD CONSTRAINT "revision_moves_user_id_users_id_fk" FOREIGN KEY ("user_id") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revision_results" ADD CONSTRAINT "revision_results_revision_id_revisions_id_fk" FOREIGN KEY ("revision_id") REFERENCES "public"."revisions"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revision_results" ADD CONSTRAINT "revision_results_result_id_results_id_fk" FOREIGN KEY ("result_id") REFERENCES "public"."results"("id") ON DELETE restrict ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revisions" ADD CONSTRAINT "revisions_floorplan_id_floorplans_id_fk" FOREIGN KEY ("floorplan_id") REFERENCES "public"."floorplans"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "revisions" ADD CONSTRAINT "revisions_frozen_by_users_id_fk" FOREIGN KEY ("frozen_by") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "thread_acts" ADD CONSTRAINT "thread_acts_thread_id_threads_id_fk" FOREIGN KEY ("thread_id") REFERENCES "public"."threads"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "thread_acts" ADD CONSTRAINT "thread_acts_user_id_users_id_fk" FOREIGN KEY ("user_id") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "threads" ADD CONSTRAINT "threads_floorplan_id_floorplans_id_fk" FOREIGN KEY ("floorplan_id") REFERENCES "public"."floorplans"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "threads" ADD CONSTRAINT "threads_revision_id_revisions_id_fk" FOREIGN KEY ("revision_id") REFERENCES "public"."revisions"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "threads" ADD CONSTRAINT "threads_opened_by_users_id_fk" FOREIGN KEY ("opened_by") REFERENCES "public"."users"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "comments_thread" ON "comments" USING btree ("thread_id");--> statement-breakpoint
CREATE INDEX "revision_results_result" ON "revision_results" USING btree ("result_id");--> statement-breakpoint
CREATE INDEX "revisions_hash" ON "revisions" USING btree ("hash");--> statement-breakpoint
CREATE INDEX "thread_acts_thread" ON "thread_acts" USING btree ("thread_id");--> statement-breakpoint
CREATE INDEX "threads_floorplan" ON "threads" USING btree ("floorplan_id");--> statement-breakpoint
CREATE INDEX "threads_revision" ON "threads" USING btree ("revision_id");