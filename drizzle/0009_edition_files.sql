CREATE TABLE `edition_files` (
	`edition_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(60) NOT NULL,
	`position` int NOT NULL,
	`data` longblob NOT NULL,
	CONSTRAINT `edition_files_edition_id_name_position_pk` PRIMARY KEY(`edition_id`,`name`,`position`)
);
--> statement-breakpoint
ALTER TABLE `edition_files` ADD CONSTRAINT `edition_files_edition_id_editions_id_fk` FOREIGN KEY (`edition_id`) REFERENCES `editions`(`id`) ON DELETE cascade ON UPDATE no action;