CREATE TABLE "notice_choices" (
	"workshop_id" uuid NOT NULL,
	"person_id" uuid NOT NULL,
	"kind" text NOT NULL,
	"in_app" boolean NOT NULL,
	"mail" boolean NOT NULL,
	CONSTRAINT "notice_choices_workshop_id_person_id_kind_pk" PRIMARY KEY("workshop_id","person_id","kind")
);
--> statement-breakpoint
CREATE TABLE "notices" (
	"id" bigserial PRIMARY KEY NOT NULL,
	"workshop_id" uuid NOT NULL,
	"person_id" uuid NOT NULL,
	"vehicle_id" uuid NOT NULL,
	"kind" text NOT NULL,
	"title" text NOT NULL,
	"words" text DEFAULT '' NOT NULL,
	"path" text NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL,
	"read_at" timestamp with time zone
);
--> statement-breakpoint
ALTER TABLE "comments" ADD COLUMN "mentions" uuid[] DEFAULT '{}' NOT NULL;--> statement-breakpoint
ALTER TABLE "review_moves" ADD COLUMN "checklist" text[] DEFAULT '{}' NOT NULL;--> statement-breakpoint
ALTER TABLE "notice_choices" ADD CONSTRAINT "notice_choices_workshop_id_workshops_id_fk" FOREIGN KEY ("workshop_id") REFERENCES "public"."workshops"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "notice_choices" ADD CONSTRAINT "notice_choices_person_id_people_id_fk" FOREIGN KEY ("person_id") REFERENCES "public"."people"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "notices" ADD CONSTRAINT "notices_workshop_id_workshops_id_fk" FOREIGN KEY ("workshop_id") REFERENCES "public"."workshops"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "notices" ADD CONSTRAINT "notices_person_id_people_id_fk" FOREIGN KEY ("person_id") REFERENCES "public"."people"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE "notices" ADD CONSTRAINT "notices_vehicle_id_vehicles_id_fk" FOREIGN KEY ("vehicle_id") REFERENCES "public"."vehicles"("id") ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX "notices_person_id_workshop_id_id_index" ON "notices" USING btree ("person_id","workshop_id","id");