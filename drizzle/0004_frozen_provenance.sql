-- What a revision was made from is part of what is signed: from storing on, neither its provenance nor its origin changes,
-- and no statement empties the table around the trigger.
CREATE OR REPLACE FUNCTION refuse_signed_revision() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF OLD.state = 'signed' THEN
    RAISE EXCEPTION 'revision % is signed and cannot change', OLD.id USING ERRCODE = 'restrict_violation';
  END IF;
  IF TG_OP = 'DELETE' THEN
    RETURN OLD;
  END IF;
  IF NEW.id IS DISTINCT FROM OLD.id OR NEW.cells IS DISTINCT FROM OLD.cells OR NEW.checksum IS DISTINCT FROM OLD.checksum
    OR NEW.rpm_axis IS DISTINCT FROM OLD.rpm_axis OR NEW.map_axis IS DISTINCT FROM OLD.map_axis
    OR NEW.parent_id IS DISTINCT FROM OLD.parent_id OR NEW.author_id IS DISTINCT FROM OLD.author_id
    OR NEW.logs IS DISTINCT FROM OLD.logs OR NEW.settings IS DISTINCT FROM OLD.settings
    OR NEW.core_version IS DISTINCT FROM OLD.core_version OR NEW.vehicle_id IS DISTINCT FROM OLD.vehicle_id
    OR NEW.number IS DISTINCT FROM OLD.number OR NEW.kind IS DISTINCT FROM OLD.kind
    OR NEW.provenance IS DISTINCT FROM OLD.provenance OR NEW.proposal_id IS DISTINCT FROM OLD.proposal_id
    OR NEW.origin IS DISTINCT FROM OLD.origin OR NEW.created_at IS DISTINCT FROM OLD.created_at
    OR NEW.cells_changed IS DISTINCT FROM OLD.cells_changed THEN
    RAISE EXCEPTION 'the content of revision % is frozen', OLD.id USING ERRCODE = 'restrict_violation';
  END IF;
  RETURN NEW;
END $$;--> statement-breakpoint
CREATE FUNCTION refuse_emptying_revisions() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION 'revisions are never emptied' USING ERRCODE = 'restrict_violation';
END $$;--> statement-breakpoint
CREATE TRIGGER revisions_never_emptied BEFORE TRUNCATE ON revisions
  FOR EACH STATEMENT EXECUTE FUNCTION refuse_emptying_revisions();--> statement-breakpoint
-- The moves a revision went through are only added to.
CREATE FUNCTION refuse_review_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION 'the record of a review only grows' USING ERRCODE = 'restrict_violation';
END $$;--> statement-breakpoint
CREATE TRIGGER review_moves_only_grow BEFORE UPDATE OR DELETE ON review_moves
  FOR EACH ROW EXECUTE FUNCTION refuse_review_change();
