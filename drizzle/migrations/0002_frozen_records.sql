CREATE TRIGGER revisions_frozen BEFORE UPDATE ON revisions FOR EACH ROW
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
END;
--> statement-breakpoint
CREATE TRIGGER revisions_kept BEFORE DELETE ON revisions FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A revision is never deleted';
--> statement-breakpoint
CREATE TRIGGER signatures_frozen BEFORE UPDATE ON signatures FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A signature is never changed';
--> statement-breakpoint
CREATE TRIGGER signatures_kept BEFORE DELETE ON signatures FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A signature is never deleted';
--> statement-breakpoint
CREATE TRIGGER cards_frozen BEFORE UPDATE ON cards FOR EACH ROW
SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A card is never changed';
