-- The history of edits and the audit trail only grow: nobody changes or removes a line of them.
CREATE FUNCTION refuse_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
	RAISE EXCEPTION 'rows of % are never changed or removed', TG_TABLE_NAME USING ERRCODE = '23001';
END;
$$;
--> statement-breakpoint
CREATE TRIGGER floorplan_edits_append_only BEFORE UPDATE OR DELETE ON floorplan_edits
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER floorplan_edits_keep BEFORE TRUNCATE ON floorplan_edits
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER audit_events_append_only BEFORE UPDATE OR DELETE ON audit_events
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER audit_events_keep BEFORE TRUNCATE ON audit_events
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
