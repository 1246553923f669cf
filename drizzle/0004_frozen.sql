-- What was frozen, decided and found only grows: nobody changes or removes a line of it, not even by
-- a mistake of ours. A floorplan that has a revision can therefore not be deleted, only put away.
CREATE TRIGGER revisions_append_only BEFORE UPDATE OR DELETE ON revisions
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revisions_keep BEFORE TRUNCATE ON revisions
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revision_moves_append_only BEFORE UPDATE OR DELETE ON revision_moves
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revision_moves_keep BEFORE TRUNCATE ON revision_moves
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revision_results_append_only BEFORE UPDATE OR DELETE ON revision_results
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revision_results_keep BEFORE TRUNCATE ON revision_results
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revision_findings_append_only BEFORE UPDATE OR DELETE ON revision_findings
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER revision_findings_keep BEFORE TRUNCATE ON revision_findings
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER thread_acts_append_only BEFORE UPDATE OR DELETE ON thread_acts
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER thread_acts_keep BEFORE TRUNCATE ON thread_acts
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
-- A result is what a solve found: another answer is another row. One that a revision has is kept
-- by its foreign key, and its maps by the function below.
CREATE TRIGGER results_unchanged BEFORE UPDATE ON results
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE TRIGGER result_maps_unchanged BEFORE UPDATE ON result_maps
	FOR EACH ROW EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
CREATE FUNCTION refuse_bound_map() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
	IF EXISTS (SELECT 1 FROM revision_results WHERE result_id = OLD.result_id) THEN
		RAISE EXCEPTION 'maps of a revision are never removed' USING ERRCODE = '23001';
	END IF;
	RETURN OLD;
END;
$$;
--> statement-breakpoint
CREATE TRIGGER result_maps_keep_bound BEFORE DELETE ON result_maps
	FOR EACH ROW EXECUTE FUNCTION refuse_bound_map();
--> statement-breakpoint
CREATE TRIGGER result_maps_keep BEFORE TRUNCATE ON result_maps
	FOR EACH STATEMENT EXECUTE FUNCTION refuse_change();
--> statement-breakpoint
-- A comment is written once; deleting it takes its words and says when. Its row stays.
CREATE FUNCTION refuse_rewording() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
	IF TG_OP = 'UPDATE' AND OLD.deleted_at IS NULL AND NEW.deleted_at IS NOT NULL AND NEW.text = ''
		AND (OLD.id, OLD.thread_id, OLD.user_id, OLD.at) = (NEW.id, NEW.thread_id, NEW.user_id, NEW.at)
	THEN
		RETURN NEW;
	END IF;
	RAISE EXCEPTION 'a comment is only ever emptied' USING ERRCODE = '23001';
END;
$$;
--> statement-breakpoint
CREATE TRIGGER comments_keep BEFORE UPDATE OR DELETE ON comments
	FOR EACH ROW EXECUTE FUNCTION refuse_rewording();
