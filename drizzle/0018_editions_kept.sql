-- What keeps editions hangs on the row of their team, so that row keeps its id, and goes only when it was marked deleted long
-- ago. SYSDATE() is the server's own clock, which a session cannot set; a day is left for time zones.
CREATE OR REPLACE TRIGGER `teams_marks_kept` BEFORE UPDATE ON `teams` FOR EACH ROW
BEGIN
	IF NEW.`id` <> OLD.`id` THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The id of a team never changes: its editions are kept by it.';
	END IF;
	IF NEW.`deleted_at` < SYSDATE() - INTERVAL 1 DAY AND NOT (NEW.`deleted_at` <=> OLD.`deleted_at`) THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A team is not marked as deleted in the past.';
	END IF;
END;
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `teams_never_deleted_early` BEFORE DELETE ON `teams` FOR EACH ROW
BEGIN
	IF OLD.`deleted_at` IS NULL OR OLD.`deleted_at` > SYSDATE() - INTERVAL 29 DAY THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A team goes only 30 days after it was marked as deleted.';
	END IF;
END;
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `ensembles_id_kept` BEFORE UPDATE ON `ensembles` FOR EACH ROW
BEGIN
	IF NEW.`id` <> OLD.`id` THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The id of an ensemble never changes: its editions name it.';
	END IF;
END;
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `editions_never_deleted` BEFORE DELETE ON `editions` FOR EACH ROW
BEGIN
	IF @@foreign_key_checks = 0 OR EXISTS (SELECT 1 FROM `teams` WHERE `id` = OLD.`team_id`) THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'An edition is immutable: it goes only with its whole team.';
	END IF;
END;
--> statement-breakpoint
-- The entry of the logbook is written behind the last piece, in the same transaction.
CREATE OR REPLACE TRIGGER `edition_files_complete` BEFORE INSERT ON `edition_files` FOR EACH ROW
BEGIN
	IF EXISTS (
		SELECT 1 FROM `editions` e JOIN `logbook` l ON l.`ensemble_id` = e.`ensemble_id`
		WHERE e.`id` = NEW.`edition_id` AND l.`type` = 'edition-frozen' AND JSON_VALUE(l.`data`, '$.number') = e.`number`
	) THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'An edition is immutable: no file is added to a frozen one.';
	END IF;
END;
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `verifications_never_deleted` BEFORE DELETE ON `verifications` FOR EACH ROW
BEGIN
	IF @@foreign_key_checks = 0 OR EXISTS (
		SELECT 1 FROM `editions` e JOIN `teams` t ON t.`id` = e.`team_id` WHERE e.`id` = OLD.`edition_id`
	) THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A verification is a record: it goes only with its whole team.';
	END IF;
END;
