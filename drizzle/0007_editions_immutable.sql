-- An edition is what it was when it was frozen, for everybody. It goes only with its whole team: then the team's row is gone first.
CREATE OR REPLACE TRIGGER `editions_never_updated` BEFORE UPDATE ON `editions` FOR EACH ROW
	SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'An edition is immutable: its row is never changed.';
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `editions_never_deleted` BEFORE DELETE ON `editions` FOR EACH ROW
BEGIN
	IF EXISTS (SELECT 1 FROM `teams` WHERE `id` = OLD.`team_id`) THEN
		SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'An edition is immutable: it goes only with its whole team.';
	END IF;
END;
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `verifications_never_updated` BEFORE UPDATE ON `verifications` FOR EACH ROW
	SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A verification is a record: its row is never changed.';
