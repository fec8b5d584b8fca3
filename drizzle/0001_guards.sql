-- What must hold whoever writes: a signed revision never changes, a revision's cells never change after they were
-- stored, and the audit trail only grows.
CREATE FUNCTION refuse_signed_revision() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF OLD.state = 'signed' THEN
    RAISE EXCEPTION 'revision % is signed and cannot change', OLD.id USING ERRCODE = 'restrict_violation';
  END IF;
  IF TG_OP = 'DELETE' THEN
    RETURN OLD;
  END IF;
  IF NEW.cells IS DISTINCT FROM OLD.cells OR NEW.checksum IS DISTINCT FROM OLD.checksum
    OR NEW.rpm_axis IS DISTINCT FROM OLD.rpm_axis OR NEW.map_axis IS DISTINCT FROM OLD.map_axis
    OR NEW.parent_id IS DISTINCT FROM OLD.parent_id OR NEW.author_id IS DISTINCT FROM OLD.author_id
    OR NEW.logs IS DISTINCT FROM OLD.logs OR NEW.settings IS DISTINCT FROM OLD.settings
    OR NEW.core_version IS DISTINCT FROM OLD.core_version OR NEW.vehicle_id IS DISTINCT FROM OLD.vehicle_id
    OR NEW.number IS DISTINCT FROM OLD.number OR NEW.kind IS DISTINCT FROM OLD.kind THEN
    RAISE EXCEPTION 'the content of revision % is frozen', OLD.id USING ERRCODE = 'restrict_violation';
  END IF;
  RETURN NEW;
END $$;--> statement-breakpoint
CREATE TRIGGER revisions_frozen BEFORE UPDATE OR DELETE ON revisions
  FOR EACH ROW EXECUTE FUNCTION refuse_signed_revision();--> statement-breakpoint
CREATE FUNCTION refuse_audit_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION 'the audit trail only grows' USING ERRCODE = 'restrict_violation';
END $$;--> statement-breakpoint
CREATE TRIGGER audit_only_grows BEFORE UPDATE OR DELETE ON audit_entries
  FOR EACH ROW EXECUTE FUNCTION refuse_audit_change();--> statement-breakpoint
CREATE TRIGGER audit_never_emptied BEFORE TRUNCATE ON audit_entries
  FOR EACH STATEMENT EXECUTE FUNCTION refuse_audit_change();--> statement-breakpoint
-- Originals are gzip already: compressing them again costs time and saves nothing. Channel blocks take lz4.
ALTER TABLE log_originals ALTER COLUMN data SET STORAGE EXTERNAL;--> statement-breakpoint
ALTER TABLE log_blocks ALTER COLUMN data SET COMPRESSION lz4;--> statement-breakpoint
ALTER TABLE log_blocks ALTER COLUMN level SET COMPRESSION lz4;
