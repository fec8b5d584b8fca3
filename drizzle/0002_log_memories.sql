CREATE TABLE "log_memories" (
	"log_id" uuid PRIMARY KEY NOT NULL,
	"key" text NOT NULL,
	"memory" "bytea" NOT NULL,
	"created_at" timestamp with time zone DEFAULT now() NOT NULL
);
--> statement-breakpoint
ALTER TABLE "proposal_logs" ADD COLUMN "used" boolean DEFAULT true NOT NULL;--> statement-breakpoint
ALTER TABLE "log_memories" ADD CONSTRAINT "log_memories_log_id_logs_id_fk" FOREIGN KEY ("log_id") REFERENCES "public"."logs"("id") ON DELETE cascade ON UPDATE no action;