-- What was handed out stays as it was. Rows that go with their edition go by the foreign key, which fires no trigger.
CREATE OR REPLACE TRIGGER `edition_files_never_updated` BEFORE UPDATE ON `edition_files` FOR EACH ROW
	SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A file of an edition is immutable: its row is never changed.';
--> statement-breakpoint
CREATE OR REPLACE TRIGGER `edition_files_never_deleted` BEFORE DELETE ON `edition_files` FOR EACH ROW
	SIGNAL SQLSTATE '45000' SET MESSAGE_TEXT = 'A file of an edition is immutable: it goes only with its edition.';
