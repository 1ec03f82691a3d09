-- The logbook is append-only for everybody, so that one DATABASE_URL is enough: no second database user guards it.
CREATE OR REPLACE TRIGGER `logbook_never_updated` BEFORE UPDATE ON `logbook` FOR EACH ROW
	SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The logbook is append-only: its rows are never changed.';
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `logbook_never_deleted` BEFORE DELETE ON `logbook` FOR EACH ROW
	SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'The logbook is append-only: its rows are never removed.';
