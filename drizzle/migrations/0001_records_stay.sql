CREATE TRIGGER IF NOT EXISTS revisions_frozen BEFORE UPDATE ON revisions FOR EACH ROW
BEGIN
  IF NOT (NEW.id <=> OLD.id AND NEW.page_id <=> OLD.page_id AND NEW.number <=> OLD.number
    AND NEW.major <=> OLD.major AND NEW.minor <=> OLD.minor AND NEW.patch <=> OLD.patch
    AND NEW.summary <=> OLD.summary AND NEW.document <=> OLD.document AND NEW.digest <=> OLD.digest
    AND NEW.fingerprint <=> OLD.fingerprint AND NEW.engine <=> OLD.engine AND NEW.card_id <=> OLD.card_id AND NEW.card_summary <=> OLD.card_summary
    AND NEW.base_id <=> OLD.base_id AND NEW.generation <=> OLD.generation
    AND NEW.sent_by <=> OLD.sent_by AND NEW.sent_at <=> OLD.sent_at) THEN
    SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A revision is frozen: only its state, settled_at and reason change';
  END IF;
  IF NOT (NEW.state = OLD.state
    OR (OLD.state = 'in-review' AND NEW.state IN ('returned', 'in-force'))
    OR (OLD.state = 'in-force' AND NEW.state IN ('superseded', 'withdrawn'))) THEN
    SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A settled revision does not change its state';
  END IF;
  IF NEW.state = OLD.state AND NOT (NEW.settled_at <=> OLD.settled_at AND NEW.reason <=> OLD.reason) THEN
    SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'When and why a revision was settled is written with its state, once';
  END IF;
END;
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS revisions_kept BEFORE DELETE ON revisions FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A revision is never deleted';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS signatures_frozen BEFORE UPDATE ON signatures FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A signature is never changed';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS signatures_kept BEFORE DELETE ON signatures FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A signature is never deleted';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS remarks_frozen BEFORE UPDATE ON remarks FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A remark is never changed';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS remarks_kept BEFORE DELETE ON remarks FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A remark is never deleted';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS cards_frozen BEFORE UPDATE ON cards FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A card is never changed';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS cards_kept BEFORE DELETE ON cards FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A card is never deleted';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS log_frozen BEFORE UPDATE ON log FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The log is only ever added to';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS log_kept BEFORE DELETE ON log FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The log is only ever added to';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS page_codes_frozen BEFORE UPDATE ON page_codes FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A code once given stays as it is';
--> statement-breakpoint
CREATE TRIGGER IF NOT EXISTS page_codes_kept BEFORE DELETE ON page_codes FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A code once given is never given again';
