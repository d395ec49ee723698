CREATE TRIGGER audit_log_no_update BEFORE UPDATE ON audit_log FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'audit_log is append-only';
--> statement-breakpoint
CREATE TRIGGER audit_log_no_delete BEFORE DELETE ON audit_log FOR EACH ROW SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'audit_log is append-only';
--> statement-breakpoint
CREATE TRIGGER revisions_content_frozen BEFORE UPDATE ON revisions FOR EACH ROW IF NEW.content <> OLD.content OR NEW.hash <> OLD.hash OR NEW.number <> OLD.number OR NEW.tree_id <> OLD.tree_id THEN SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'the content of a revision is frozen'; END IF;
